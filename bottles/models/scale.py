"""Scales and their checks with a known weight."""

from __future__ import annotations

from django.db import models

from shop.base.facts import Fact


class Scale(models.Model):
    """A scale of the shop: what it can tell apart, how wrong it may be, how it writes."""

    STYLES = [("kg", "11.06 kg"), ("g", "11060 g"), ("lb", "24.4 lb"), ("lb oz", "24 lb 6 oz")]

    code = models.CharField(max_length=20, unique=True)
    name = models.CharField(max_length=80)
    resolution_g = models.PositiveIntegerField()  # a scale in ounces: 28
    resolution_typed = models.CharField(max_length=64)
    error_g = models.PositiveIntegerField()
    error_typed = models.CharField(max_length=64)
    capacity_g = models.PositiveIntegerField()
    capacity_typed = models.CharField(max_length=64)
    style = models.CharField(max_length=6, choices=STYLES, default="kg")
    calibrated_on = models.DateField(null=True)
    calibration_due = models.DateField(null=True)
    active = models.BooleanField(default=True)
    version = models.PositiveIntegerField(default=1)

    def __str__(self) -> str:
        return self.name


class ScaleCheck(Fact):
    """A known weight put on the scale, before the day's first fill."""

    scale = models.ForeignKey(Scale, on_delete=models.PROTECT, related_name="checks")
    known_g = models.PositiveIntegerField()
    known_typed = models.CharField(max_length=64)
    read_g = models.PositiveIntegerField()
    read_typed = models.CharField(max_length=64)
    passed = models.BooleanField()
    happened_at = models.DateTimeField()

    def __str__(self) -> str:
        return "passed" if self.passed else "failed"
