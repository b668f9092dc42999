"""People.

- A *user* signs in and holds roles; a badge or a short code says who acts at an open counter.
- A *customer* owns bottles and cars and never signs in.
- A *consent* is a customer's word, given or withdrawn; the latest for a purpose holds.

Always: a badge or code is kept as a keyed digest only, and belongs to one person.
"""

from __future__ import annotations

from typing import Any

from django.contrib.auth.base_user import AbstractBaseUser, BaseUserManager
from django.db import models
from django.db.models.functions import Lower

from shop.base.facts import Fact
from shop.base.models import Shop
from shop.base.permissions import Role


class UserManager(BaseUserManager["User"]):
    """Makes people who sign in; their name is matched whatever its case."""

    def get_by_natural_key(self, username: str | None) -> User:
        return self.get(sign_in_name__iexact=username)


class User(AbstractBaseUser):
    """A person who signs in."""

    sign_in_name = models.CharField(max_length=60, unique=True)
    name = models.CharField(max_length=120)
    is_front_desk = models.BooleanField("front desk", default=False)
    is_technician = models.BooleanField("technician", default=False)
    is_manager = models.BooleanField("manager", default=False)
    is_active = models.BooleanField(default=True)
    units = models.CharField(max_length=8, choices=[("", "the shop's"), *Shop.UNITS], blank=True)
    badge_digest = models.CharField(max_length=64, null=True, blank=True, unique=True)
    code_digest = models.CharField(max_length=64, null=True, blank=True, unique=True)
    version = models.PositiveIntegerField(default=1)

    objects = UserManager()

    USERNAME_FIELD = "sign_in_name"
    REQUIRED_FIELDS: list[str] = []  # type: ignore[misc]

    class Meta:
        constraints = [models.UniqueConstraint(Lower("sign_in_name"), name="one_person_a_sign_in_name")]

    def __str__(self) -> str:
        return self.name

    @property
    def roles(self) -> frozenset[Role]:
        """The roles this person holds; none while not active."""
        if not self.is_active:
            return frozenset()
        held = {
            Role.FRONT_DESK: self.is_front_desk,
            Role.TECHNICIAN: self.is_technician,
            Role.MANAGER: self.is_manager,
        }
        return frozenset(role for role, has in held.items() if has)


class Customer(models.Model):
    """Someone who owns bottles or cars."""

    name = models.CharField(max_length=120)
    phone = models.CharField(max_length=40, blank=True)
    email = models.EmailField(blank=True)
    note = models.TextField(blank=True)
    erased_at = models.DateTimeField(null=True)
    version = models.PositiveIntegerField(default=1)

    class Meta:
        indexes = [models.Index(Lower("name"), name="customer_name")]

    def __str__(self) -> str:
        return self.name or "erased customer"


class Consent(Fact):
    """A customer's word on one purpose, given or withdrawn."""

    PURPOSES = [("fill", "fill and look over my bottles"), ("remind", "remind me of tests that fall due")]

    customer = models.ForeignKey(Customer, on_delete=models.PROTECT, related_name="consents")
    purpose = models.CharField(max_length=12, choices=PURPOSES)
    given = models.BooleanField()
    on = models.DateField()
    how = models.CharField(max_length=120, blank=True)

    def __str__(self) -> str:
        return f"{self.purpose}: {'given' if self.given else 'withdrawn'}"


class Training(Fact):
    """What a person was trained in, and until when it holds."""

    person = models.ForeignKey(User, on_delete=models.PROTECT, related_name="+")
    what = models.CharField(max_length=120)
    on = models.DateField()
    expires = models.DateField(null=True, blank=True)

    def __str__(self) -> str:
        return self.what


def full_name(person: Any) -> str:
    """Return the name to show for a person of an act; the program itself has none."""
    return person.name if person else "Tarebook"
