"""A filling station, set up once: what hangs on it and what it fills through."""

from __future__ import annotations

from django.db import models

from bottles.models.bottle import Bottle
from bottles.models.scale import Scale
from shop.base.models import Place


class Station(models.Model):
    """Supply bottles, a hose, a scale for the bottle to fill, one for the supply or none."""

    code = models.CharField(max_length=20, unique=True)
    name = models.CharField(max_length=80)
    place = models.ForeignKey(Place, null=True, blank=True, on_delete=models.PROTECT, related_name="+")
    scale = models.ForeignKey(Scale, null=True, blank=True, on_delete=models.PROTECT, related_name="+")
    supply_scale = models.ForeignKey(Scale, null=True, blank=True, on_delete=models.PROTECT, related_name="+")
    hose_length_um = models.PositiveBigIntegerField()
    hose_length_typed = models.CharField(max_length=64)
    hose_bore_um = models.PositiveIntegerField()
    hose_bore_typed = models.CharField(max_length=64)
    hose_pull_g = models.IntegerField(default=0)  # what the hose adds to the reading; negative: it lifts
    hose_pull_typed = models.CharField(max_length=64, blank=True)
    line_loss_g = models.PositiveIntegerField(null=True)  # entered from experience; else computed
    line_loss_typed = models.CharField(max_length=64, blank=True)
    gauge_tolerance_pa = models.PositiveIntegerField(default=206_843)  # 30 psi
    thermometer_tolerance_mk = models.PositiveIntegerField(default=1000)
    pumped = models.BooleanField(default=False)
    pump_note = models.CharField(max_length=200, blank=True)  # limits from its plate
    pump_most_pa = models.PositiveIntegerField(null=True)  # highest delivery pressure on its plate
    pump_most_typed = models.CharField(max_length=64, blank=True)
    pump_least_pa = models.PositiveIntegerField(null=True)  # lowest pressure at its inlet
    pump_least_typed = models.CharField(max_length=64, blank=True)
    active = models.BooleanField(default=True)
    version = models.PositiveIntegerField(default=1)

    def __str__(self) -> str:
        return self.name


class Supply(models.Model):
    """A supply bottle that hangs on a station now."""

    station = models.ForeignKey(Station, on_delete=models.PROTECT, related_name="supplies")
    bottle = models.OneToOneField(Bottle, on_delete=models.PROTECT, related_name="supply")
    inverted = models.BooleanField(default=False)

    def __str__(self) -> str:
        return f"{self.bottle} on {self.station}"
