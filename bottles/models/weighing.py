"""A weighing is a statement by a scale, not a movement.

Always: its net was worked out with the tare and the scale's error of that moment and is never
recomputed; a mistyped one is struck by a second row, with a reason.
"""

from __future__ import annotations

from django.db import models

from bottles.models.bottle import Bottle
from bottles.models.scale import Scale, ScaleCheck
from bottles.models.tare import Tare
from shop.base.facts import Fact


class Weighing(Fact):
    """What a scale said of a bottle."""

    STEPS = [
        ("arrival", "on arrival"),
        ("before", "before filling"),
        ("after", "after filling"),
        ("disconnected", "after the line was disconnected"),
        ("stored", "in storage"),
        ("dispatch", "before handing over"),
        ("stocktake", "stock-take"),
    ]

    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="weighings")
    scale = models.ForeignKey(Scale, on_delete=models.PROTECT, related_name="+")
    check_row = models.ForeignKey(ScaleCheck, null=True, on_delete=models.PROTECT, related_name="+")
    tare = models.ForeignKey(Tare, on_delete=models.PROTECT, related_name="+")
    refill = models.ForeignKey("bottles.Refill", null=True, on_delete=models.PROTECT, related_name="weighings")
    step = models.CharField(max_length=14, choices=STEPS)
    gross_g = models.PositiveIntegerField()
    typed = models.CharField(max_length=64)
    net_g = models.IntegerField()  # may be slightly below nothing, within its ±
    error_g = models.PositiveIntegerField()  # ± of the net
    wet = models.BooleanField(default=False)
    happened_at = models.DateTimeField()

    class Meta:
        indexes = [models.Index(fields=["bottle", "happened_at", "id"], name="weighing_of_bottle")]

    def __str__(self) -> str:
        return f"{self.net_g} ±{self.error_g} g"


class WeighingStrike(Fact):
    """A weighing that was mistyped; the act carries the reason."""

    weighing = models.OneToOneField(Weighing, on_delete=models.PROTECT, related_name="strike")
