"""The nitrous ledger: double entry, whole grams, append only.

- An *account* holds grams: a bottle, a customer (used by its owner), a car, or one of the shop's
  own (supplier, returned, line, vented, unaccounted, scale). Its balance is kept beside it.
- A *movement* is what happened once; its *lines* each move grams from one account to another.

Always: a line moves grams, so a movement can't fail to balance and all balances sum to zero;
a bottle's balance is never below nothing; a movement is reversed at most once, by a second one.
"""

from __future__ import annotations

from django.db import models

from bottles.models.bottle import Bottle
from bottles.models.weighing import Weighing
from shop.base.facts import Fact
from shop.cars.models import Car
from shop.people.models import Customer


class Account(models.Model):
    """Where grams are, or where they went."""

    OWN = ("supplier", "returned", "line", "vented", "unaccounted", "scale")
    KINDS = [
        ("bottle", "bottle"),
        ("customer", "used by its owner"),
        ("car", "used by a car"),
        ("supplier", "from the supplier"),
        ("returned", "returned to the supplier"),
        ("line", "line loss"),
        ("vented", "vented"),
        ("unaccounted", "unaccounted"),
        ("scale", "scale"),
    ]

    kind = models.CharField(max_length=12, choices=KINDS)
    bottle = models.OneToOneField(Bottle, null=True, on_delete=models.PROTECT, related_name="account")
    customer = models.OneToOneField(Customer, null=True, on_delete=models.PROTECT, related_name="+")
    car = models.OneToOneField(Car, null=True, on_delete=models.PROTECT, related_name="+")
    balance_g = models.BigIntegerField(default=0)

    class Meta:
        constraints = [
            models.UniqueConstraint(
                fields=["kind"],
                condition=~models.Q(kind__in=["bottle", "customer", "car"]),
                name="one_own_account_a_kind",
            ),
            models.CheckConstraint(
                condition=~models.Q(kind="bottle") | models.Q(balance_g__gte=0), name="no_bottle_below_nothing"
            ),
            models.CheckConstraint(
                condition=models.Q(kind="bottle", bottle__isnull=False, customer__isnull=True, car__isnull=True)
                | models.Q(kind="customer", bottle__isnull=True, customer__isnull=False, car__isnull=True)
                | models.Q(kind="car", bottle__isnull=True, customer__isnull=True, car__isnull=False)
                | (
                    ~models.Q(kind__in=["bottle", "customer", "car"])
                    & models.Q(bottle__isnull=True, customer__isnull=True, car__isnull=True)
                ),
                name="an_account_is_of_one_thing",
            ),
        ]

    def __str__(self) -> str:
        return str(self.bottle or self.customer or self.car or self.get_kind_display())


class Movement(Fact):
    """What happened to grams, once."""

    KINDS = [
        ("opening", "first weighing"),
        ("delivery", "delivery"),
        ("returned", "returned to the supplier"),
        ("refill", "refill"),
        ("use", "used"),
        ("vent", "vented"),
        ("adjust", "books brought to the scale"),
        ("reversal", "reversal"),
    ]

    kind = models.CharField(max_length=10, choices=KINDS)
    happened_at = models.DateTimeField(db_index=True)
    refill = models.ForeignKey("bottles.Refill", null=True, on_delete=models.PROTECT, related_name="movements")
    weighing = models.ForeignKey(Weighing, null=True, on_delete=models.PROTECT, related_name="movements")
    reverses = models.OneToOneField("self", null=True, on_delete=models.PROTECT, related_name="reversal")
    note = models.CharField(max_length=200, blank=True)

    def __str__(self) -> str:
        return self.get_kind_display()


class Line(Fact):
    """Grams from one account to another, within one movement."""

    ORIGINS = [("weighed", "weighed"), ("computed", "computed"), ("entered", "entered")]

    movement = models.ForeignKey(Movement, on_delete=models.PROTECT, related_name="lines")
    source = models.ForeignKey(Account, on_delete=models.PROTECT, related_name="+")
    target = models.ForeignKey(Account, on_delete=models.PROTECT, related_name="+")
    grams = models.PositiveIntegerField()
    error_g = models.PositiveIntegerField(default=0)  # ± of the weighings behind it
    origin = models.CharField(max_length=10, choices=ORIGINS)

    class Meta:
        constraints = [
            models.CheckConstraint(condition=models.Q(grams__gt=0), name="a_line_moves_something"),
            models.CheckConstraint(condition=~models.Q(source=models.F("target")), name="a_line_moves_elsewhere"),
        ]

    def __str__(self) -> str:
        return f"{self.grams} g"


class Delivery(Fact):
    """A supply bottle that came full: the ticket's weight beside ours, and its lot."""

    movement = models.OneToOneField(Movement, null=True, on_delete=models.PROTECT, related_name="delivery")
    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="deliveries")
    supplier = models.CharField(max_length=120)
    ticket = models.CharField(max_length=60)
    ticket_net_g = models.PositiveIntegerField(null=True)
    ticket_typed = models.CharField(max_length=64, blank=True)
    lot = models.CharField(max_length=60, blank=True)
    race_grade = models.BooleanField(null=True)  # with SO2; null: not stated
    weighing = models.ForeignKey(Weighing, null=True, on_delete=models.PROTECT, related_name="+")
    happened_at = models.DateTimeField()

    def __str__(self) -> str:
        return self.ticket
