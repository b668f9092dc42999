"""A fitted condensation figure, and what it was fitted from.

Always: never overwritten; the latest row of a scope holds. It can be recomputed from the readings
of the refills, which are kept.
"""

from __future__ import annotations

from django.db import models

from shop.base.facts import Fact


class Fit(Fact):
    """The condensation figure of the shop, of one way of entering, or of one size filled that way."""

    WAYS = [("", "either way"), ("dip", "under the vapour, through a dip tube"), ("spray", "sprayed through the vapour")]

    way = models.CharField(max_length=8, choices=WAYS, blank=True)
    size_ml = models.PositiveIntegerField(null=True)  # upper end of a class of sizes; null: all sizes
    figure_milli = models.PositiveSmallIntegerField()  # thousandths
    deviation_milli = models.PositiveSmallIntegerField()  # of one refill to come, thousandths
    informative = models.PositiveIntegerField()  # refills whose flow ceased
    bounds = models.PositiveIntegerField()  # refills stopped before: lower bounds
    left_out = models.JSONField(default=dict)  # {why: count}
    through = models.ForeignKey("bottles.Refill", null=True, on_delete=models.PROTECT, related_name="+")
    physics_version = models.CharField(max_length=20)

    class Meta:
        indexes = [models.Index(fields=["way", "size_ml", "-id"], name="fit_latest")]

    def __str__(self) -> str:
        return f"{self.figure_milli / 1000:.2f} ±{self.deviation_milli / 500:.2f}"
