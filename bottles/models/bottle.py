"""The register: what a bottle is, whose it is, where it is, what is known of it now.

- A *bottle* is a master: what is stamped or known of the vessel itself.
- *Ownership* and *custody* are facts: whose from when; where and with whom from when.
- *Standing* holds the latest of each fact for lists; it can always be recomputed.

Always: a code is never used twice; the latest custody row is where the bottle is.
"""

from __future__ import annotations

from django.core.validators import MaxValueValidator, MinValueValidator
from django.db import models
from django.urls import reverse

from shop.base.facts import Fact
from shop.base.models import Act, Place
from shop.cars.models import Car
from shop.people.models import Customer


class Bottle(models.Model):
    """A vessel for nitrous oxide, of the shop, a customer or the supplier."""

    CAPACITY_BASES = [
        ("stamped", "stamped on the bottle"),
        ("measured", "measured with water"),
        ("maker", "maker's data"),
        ("inferred", "inferred from the labelled size"),
        ("unknown", "unknown"),
    ]
    WALLS = [("aluminium", "aluminium"), ("steel", "steel"), ("composite", "composite"), ("unknown", "unknown")]
    DIP_TUBES = [
        ("dip", "dip (siphon) tube to the low end"),
        ("none", "no dip tube"),
        ("unknown", "unknown"),
    ]
    HELD = [
        ("", "not asked yet"),
        ("nitrous", "nitrous oxide and nothing else"),
        ("new", "nothing yet: new and clean"),
        ("other", "something else"),
        ("unknown", "nobody knows"),
    ]
    USES = [("supply", "supply bottle"), ("car", "car bottle"), ("stock", "shop stock"), ("other", "other")]

    code = models.CharField(max_length=20, unique=True)
    maker = models.CharField(max_length=80, blank=True)
    serial = models.CharField(max_length=60, blank=True)  # blank: not legible
    mark = models.CharField(max_length=60, blank=True)  # as stamped; blank: not legible
    capacity_ml = models.PositiveIntegerField(null=True, validators=[MinValueValidator(50), MaxValueValidator(1_000_000)])
    capacity_basis = models.CharField(max_length=10, choices=CAPACITY_BASES, default="unknown")
    capacity_typed = models.CharField(max_length=64, blank=True)
    charge_g = models.PositiveIntegerField(null=True)  # stamped or labelled charge ("size")
    charge_typed = models.CharField(max_length=64, blank=True)
    wall = models.CharField(max_length=10, choices=WALLS, default="unknown")
    alloy = models.CharField(max_length=40, blank=True)
    dip_tube = models.CharField(max_length=8, choices=DIP_TUBES, default="unknown")
    below_tube_ml = models.PositiveIntegerField(null=True)  # liquid that the dip tube's end doesn't reach; null: not known
    below_tube_typed = models.CharField(max_length=64, blank=True)
    outlet = models.CharField(max_length=60, blank=True)
    disc = models.CharField(max_length=60, blank=True)  # safety disc: burst pressure as marked
    use = models.CharField(max_length=8, choices=USES, default="car")
    permit = models.CharField(max_length=60, blank=True)
    permit_charge_g = models.PositiveIntegerField(null=True)
    permit_until = models.DateField(null=True)
    permit_lists_nitrous = models.BooleanField(null=True)  # null: not looked up
    own_limit_g = models.PositiveIntegerField(null=True)  # the shop's own figure for this bottle
    last_held = models.CharField(max_length=8, choices=HELD, blank=True)  # before it first came here
    race_grade = models.BooleanField(null=True)  # with SO2; null: not known
    note = models.TextField(blank=True)
    retired_at = models.DateTimeField(null=True)
    act = models.ForeignKey(Act, on_delete=models.PROTECT, related_name="+")  # that registered it
    version = models.PositiveIntegerField(default=1)

    class Meta:
        constraints = [
            models.UniqueConstraint(
                fields=["maker", "mark", "serial"],
                condition=~models.Q(serial=""),
                name="one_bottle_a_maker_mark_and_serial",
            )
        ]
        indexes = [models.Index(fields=["serial"], name="bottle_serial")]

    def __str__(self) -> str:
        return self.code

    def get_absolute_url(self) -> str:
        return reverse("bottles:bottle", args=[self.code])


class Ownership(Fact):
    """Whose the bottle is from a day on."""

    KINDS = [("shop", "the shop's"), ("customer", "a customer's"), ("supplier", "the supplier's")]

    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="ownerships")
    kind = models.CharField(max_length=10, choices=KINDS)
    customer = models.ForeignKey(Customer, null=True, on_delete=models.PROTECT, related_name="+")
    supplier = models.CharField(max_length=120, blank=True)
    since = models.DateField()

    class Meta:
        constraints = [
            models.CheckConstraint(
                condition=models.Q(kind="customer", customer__isnull=False)
                | (~models.Q(kind="customer") & models.Q(customer__isnull=True)),
                name="a_customers_bottle_names_the_customer",
            )
        ]

    def __str__(self) -> str:
        return self.get_kind_display()


class Custody(Fact):
    """The bottle came in, went out or was moved; the latest row is where it is."""

    KINDS = [
        ("in", "checked in"),
        ("moved", "moved"),
        ("out", "handed over"),
        ("car", "put on a car"),
        ("loan", "lent"),
        ("test", "sent to the test house"),
        ("supplier", "given back to the supplier"),
    ]
    INSIDE = ("in", "moved")

    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="custodies")
    kind = models.CharField(max_length=10, choices=KINDS)
    place = models.ForeignKey(Place, null=True, on_delete=models.PROTECT, related_name="+")
    car = models.ForeignKey(Car, null=True, on_delete=models.PROTECT, related_name="+")
    with_whom = models.CharField(max_length=120, blank=True)  # brought by, or handed to
    wanted = models.CharField(max_length=200, blank=True)
    promised_at = models.DateTimeField(null=True)
    happened_at = models.DateTimeField()

    class Meta:
        constraints = [
            models.CheckConstraint(
                condition=models.Q(kind__in=["in", "moved"], place__isnull=False)
                | ~models.Q(kind__in=["in", "moved"]),
                name="a_bottle_that_is_in_has_a_place",
            )
        ]

    def __str__(self) -> str:
        return self.get_kind_display()

    @property
    def is_in(self) -> bool:
        """Whether the bottle stands in the shop after this."""
        return self.kind in self.INSIDE
