"""What every other app stands on.

- An *act* is one submission by one person: audit line and idempotency key in one.
- The *shop* is one row; a *policy* is what the shop decided from a day on.
- A *place* is where a bottle can stand.
- A *job* is work done in the background; its row is the truth, the broker only rings.

Always: an act is never changed; one database is one shop; of a job's effects there is one.
"""

from __future__ import annotations

from django.conf import settings
from django.core.validators import MaxValueValidator, MinValueValidator
from django.db import models
from django.utils import timezone

from shop.base.facts import Fact, InsertedOnce


class Act(InsertedOnce):
    """One submission: who, when, what, and the key of the form that carried it."""

    key = models.UUIDField(unique=True)
    person = models.ForeignKey(
        settings.AUTH_USER_MODEL, null=True, on_delete=models.PROTECT, related_name="+"
    )  # null: the program itself
    recorded_at = models.DateTimeField(default=timezone.now)
    code = models.CharField(max_length=60)
    subject = models.CharField(max_length=80)
    reason = models.TextField(blank=True)
    changes = models.JSONField(default=dict)

    class Meta:
        indexes = [models.Index(fields=["subject", "id"], name="act_subject")]

    def __str__(self) -> str:
        return f"{self.code} {self.subject}"


class Shop(models.Model):
    """The one shop of this database."""

    UNITS = [("us", "lb, psi, °F"), ("metric", "kg, bar, °C")]
    PAPER = [("a4", "A4"), ("letter", "Letter")]

    name = models.CharField(max_length=120)
    country = models.CharField(max_length=8)  # code of a rule set, or HAND
    authority = models.CharField(max_length=120, blank=True)  # named where rules are by hand
    units = models.CharField(max_length=8, choices=UNITS, default="metric")
    time_zone = models.CharField(max_length=64, default="UTC")
    height_m = models.IntegerField(default=0, validators=[MinValueValidator(-430), MaxValueValidator(5500)])
    paper = models.CharField(max_length=8, choices=PAPER, default="a4")
    public_address = models.URLField(blank=True)
    local_notice = models.TextField(blank=True)
    version = models.PositiveIntegerField(default=1)

    class Meta:
        constraints = [models.CheckConstraint(condition=models.Q(id=1), name="shop_is_one_row")]

    def __str__(self) -> str:
        return self.name


class Policy(Fact):
    """What the shop decided from a day on; the latest in force holds."""

    effective_from = models.DateField()
    values = models.JSONField()

    class Meta:
        indexes = [models.Index(fields=["-effective_from", "-id"], name="policy_latest")]

    def __str__(self) -> str:
        return f"policy from {self.effective_from}"


class Place(models.Model):
    """Where a bottle can stand: its kind decides what is true of a bottle there."""

    KINDS = [
        ("counter", "counter"),
        ("shelf", "shelf"),
        ("freezer", "freezer"),
        ("bath", "bath"),
        ("station", "station"),
        ("quarantine", "quarantine"),
    ]

    code = models.CharField(max_length=20, unique=True)
    name = models.CharField(max_length=80)
    kind = models.CharField(max_length=12, choices=KINDS)
    outdoors = models.BooleanField(default=False)
    limit_g = models.PositiveIntegerField(null=True, blank=True)
    coldest_mk = models.PositiveIntegerField(null=True, blank=True)  # of a freezer or bath
    coldest_typed = models.CharField(max_length=64, blank=True)
    takes_at_once = models.PositiveSmallIntegerField(null=True, blank=True)  # bottles that it chills together
    active = models.BooleanField(default=True)
    version = models.PositiveIntegerField(default=1)

    def __str__(self) -> str:
        return self.name


class Job(models.Model):
    """Work in the background: state, progress, result and error, all here for the screen."""

    STATES = [(s, s) for s in ("queued", "running", "done", "failed", "cancelled")]

    kind = models.CharField(max_length=40)
    key = models.CharField(max_length=120)
    args = models.JSONField(default=dict)
    state = models.CharField(max_length=10, choices=STATES, default="queued")
    done = models.PositiveIntegerField(default=0)
    total = models.PositiveIntegerField(default=0)
    note = models.CharField(max_length=200, blank=True)
    lease = models.UUIDField(null=True)
    lease_until = models.DateTimeField(null=True)
    tries = models.PositiveSmallIntegerField(default=0)
    cancel_asked = models.BooleanField(default=False)
    result = models.JSONField(null=True)
    error = models.TextField(blank=True)
    asked_at = models.DateTimeField(default=timezone.now)
    asked_by = models.ForeignKey(
        settings.AUTH_USER_MODEL, null=True, on_delete=models.PROTECT, related_name="+"
    )
    finished_at = models.DateTimeField(null=True)

    class Meta:
        constraints = [models.UniqueConstraint(fields=["kind", "key"], name="job_once")]
        indexes = [models.Index(fields=["state", "lease_until"], name="job_open")]

    def __str__(self) -> str:
        return f"{self.kind} {self.key}: {self.state}"
