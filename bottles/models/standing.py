"""What is known of a bottle now, kept for lists; recomputed by one service from the facts."""

from __future__ import annotations

from django.db import models

from bottles.models.bottle import Bottle, Custody, Ownership
from bottles.models.tare import Tare
from bottles.models.weighing import Weighing


class Standing(models.Model):
    """The latest of each kind of fact about one bottle."""

    bottle = models.OneToOneField(Bottle, primary_key=True, on_delete=models.CASCADE, related_name="standing")
    ownership = models.ForeignKey(Ownership, null=True, on_delete=models.PROTECT, related_name="+")
    custody = models.ForeignKey(Custody, null=True, on_delete=models.PROTECT, related_name="+")
    tare = models.ForeignKey(Tare, null=True, on_delete=models.PROTECT, related_name="+")
    weighing = models.ForeignKey(Weighing, null=True, on_delete=models.PROTECT, related_name="+")
    is_in = models.BooleanField(default=False)
    waits = models.BooleanField(default=False)  # in, and something is wanted

    class Meta:
        indexes = [models.Index(fields=["is_in", "bottle"], name="standing_in")]

    def __str__(self) -> str:
        return f"standing of {self.bottle_id}"
