"""The tare: a dated list of what is on the bottle when it's weighed.

Always: a new list starts a new tare; a weighing keeps the tare that it was judged with.
"""

from __future__ import annotations

from django.db import models

from bottles.models.bottle import Bottle
from shop.base.facts import Fact


class Tare(Fact):
    """What hangs on the scale besides nitrous, from a day on."""

    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="tares")
    since = models.DateTimeField()
    total_g = models.PositiveIntegerField()
    error_g = models.PositiveIntegerField()  # ± of the total
    basis = models.CharField(
        max_length=10, choices=[("stamped", "stamped"), ("weighed", "weighed empty"), ("maker", "maker's data")]
    )

    def __str__(self) -> str:
        return f"{self.total_g} g"


class TarePart(Fact):
    """One thing of the list, with its grams."""

    THINGS = [
        ("bottle", "bottle"),
        ("valve", "valve"),
        ("gauge", "gauge"),
        ("ring", "bracket ring"),
        ("adapter", "adapter"),
        ("cap", "cap or plug"),
        ("other", "other"),
    ]

    tare = models.ForeignKey(Tare, on_delete=models.PROTECT, related_name="parts")
    thing = models.CharField(max_length=10, choices=THINGS)
    grams = models.PositiveIntegerField()
    typed = models.CharField(max_length=64)

    def __str__(self) -> str:
        return f"{self.get_thing_display()} {self.grams} g"
