"""What is read off the metal: stamps, and conditions noted until something ends them."""

from __future__ import annotations

from django.db import models

from bottles.models.bottle import Bottle
from shop.base.facts import Fact


class Stamp(Fact):
    """A date seen on the bottle, as it's stamped."""

    KINDS = [
        ("made", "made"),
        ("test", "hydrostatic test"),
        ("visual", "visual inspection"),
        ("disc", "safety disc"),
        ("end", "end of service life"),
    ]

    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="stamps")
    kind = models.CharField(max_length=8, choices=KINDS)
    year = models.PositiveSmallIntegerField()
    month = models.PositiveSmallIntegerField(null=True)  # null: only the year is stamped
    star = models.BooleanField(default=False)
    plus = models.BooleanField(default=False)
    facility = models.CharField(max_length=40, blank=True)
    typed = models.CharField(max_length=64)

    class Meta:
        constraints = [
            models.CheckConstraint(
                condition=models.Q(month__isnull=True) | models.Q(month__gte=1, month__lte=12), name="a_month_is_1_to_12"
            )
        ]

    def __str__(self) -> str:
        return f"{self.kind} {self.typed}"


class StampStrike(Fact):
    """A stamp that was read wrongly; the act carries the reason."""

    stamp = models.OneToOneField(Stamp, on_delete=models.PROTECT, related_name="strike")


class Condition(Fact):
    """Something seen on a bottle that stops it, whatever its stamp says.

    The codes are those of bottles.rules; the words stand there too.
    """

    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="conditions")
    code = models.CharField(max_length=30)
    note = models.TextField(blank=True)
    seen_on = models.DateField()

    def __str__(self) -> str:
        return self.code


class ConditionEnd(Fact):
    """What ended a condition: a repair, a test, a look that found nothing."""

    condition = models.OneToOneField(Condition, on_delete=models.PROTECT, related_name="end")
    how = models.CharField(max_length=200)
