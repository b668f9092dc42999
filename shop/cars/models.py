"""Cars: a number in a class, its owner and what is known of its engine."""

from __future__ import annotations

from django.db import models
from django.db.models.functions import Lower

from shop.people.models import Customer


class Car(models.Model):
    """A car that comes into the shop."""

    number = models.CharField(max_length=12)
    car_class = models.CharField("class", max_length=60, blank=True)
    description = models.CharField(max_length=120, blank=True)
    engine = models.CharField(max_length=200, blank=True)
    customer = models.ForeignKey(Customer, null=True, blank=True, on_delete=models.PROTECT, related_name="+")
    active = models.BooleanField(default=True)
    version = models.PositiveIntegerField(default=1)

    class Meta:
        constraints = [
            models.UniqueConstraint(
                Lower("number"), Lower("car_class"), condition=models.Q(active=True), name="one_car_a_number_and_class"
            )
        ]

    def __str__(self) -> str:
        return f"car {self.number}" + (f" ({self.car_class})" if self.car_class else "")
