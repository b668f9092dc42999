"""A refill: decided, forecast, opened, drawn from one or more supply bottles, weighed, closed.

Always: a bottle is in one open refill at most; nitrous is posted at each weighing, so closing
posts nothing; a refill closes only when weighed, line disconnected, at or below its limit.
"""

from __future__ import annotations

from django.conf import settings
from django.db import models

from bottles.models.bottle import Bottle
from bottles.models.fit import Fit
from bottles.models.station import Station
from shop.base.facts import Fact


class Decision(Fact):
    """What was answered to *may it be filled*, and from what."""

    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="decisions")
    on = models.DateField()
    edition = models.CharField(max_length=40)
    edition_sha256 = models.CharField(max_length=64)
    policy = models.ForeignKey("base.Policy", null=True, on_delete=models.PROTECT, related_name="+")
    inputs = models.JSONField()
    may_fill = models.CharField(max_length=12)
    may_empty = models.CharField(max_length=12)
    limit_g = models.PositiveIntegerField(null=True)
    binds = models.CharField(max_length=40, blank=True)
    reasons = models.JSONField()

    def __str__(self) -> str:
        return f"{self.may_fill} on {self.on}"


class Refill(models.Model):
    """One bottle being filled; several may be open at once and wait."""

    METHODS = [
        ("pressure", "by pressure"),
        ("chilled", "chilled"),
        ("warmed", "supply warmed by a listed device"),
        ("vented", "vented while filling"),
        ("pumped", "pumped"),
    ]
    ENDS = [
        ("limit", "the limit was reached"),
        ("flow ceased", "the flow ceased"),
        ("by hand", "stopped by hand"),
        ("abandoned", "abandoned"),
    ]

    bottle = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="refills")
    decision = models.ForeignKey(Decision, on_delete=models.PROTECT, related_name="+")
    station = models.ForeignKey(Station, on_delete=models.PROTECT, related_name="+")
    method = models.CharField(max_length=10, choices=METHODS)
    limit_g = models.PositiveIntegerField()
    target_g = models.PositiveIntegerField()
    stop_at_g = models.PositiveIntegerField()  # gross, as the scale will read it
    opened_at = models.DateTimeField()
    wait_until = models.DateTimeField(null=True)
    wait_note = models.CharField(max_length=80, blank=True)
    closed_at = models.DateTimeField(null=True)
    ended_by = models.CharField(max_length=12, choices=ENDS, blank=True)
    act = models.ForeignKey("base.Act", on_delete=models.PROTECT, related_name="+")  # that opened it
    person = models.ForeignKey(settings.AUTH_USER_MODEL, null=True, on_delete=models.PROTECT, related_name="+")
    version = models.PositiveIntegerField(default=1)

    class Meta:
        constraints = [
            models.UniqueConstraint(
                fields=["bottle"], condition=models.Q(closed_at__isnull=True), name="one_open_refill_a_bottle"
            ),
            models.CheckConstraint(
                condition=models.Q(closed_at__isnull=True, ended_by="")
                | (models.Q(closed_at__isnull=False) & ~models.Q(ended_by="")),
                name="a_closed_refill_says_what_ended_it",
            ),
        ]
        indexes = [models.Index(fields=["closed_at"], name="refill_open")]

    def __str__(self) -> str:
        return f"refill of {self.bottle}"


class Forecast(Fact):
    """What was forecast before a valve was opened: readings as typed and SI, and the answer."""

    receiver = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="+")
    source = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="+")
    station = models.ForeignKey(Station, on_delete=models.PROTECT, related_name="+")
    readings = models.JSONField()  # {name: {"typed": …, "stored": …}}
    physics_version = models.CharField(max_length=20)
    fit = models.ForeignKey(Fit, null=True, on_delete=models.PROTECT, related_name="+")  # null: the prior
    low_g = models.PositiveIntegerField()
    likely_g = models.PositiveIntegerField(null=True)  # null: the supply bottle was known by a reading alone
    high_g = models.PositiveIntegerField()
    result = models.JSONField()

    def __str__(self) -> str:
        return f"{self.low_g}–{self.high_g} g"


class Draw(Fact):
    """A supply bottle that a refill draws on, in turn."""

    refill = models.ForeignKey(Refill, on_delete=models.PROTECT, related_name="draws")
    source = models.ForeignKey(Bottle, on_delete=models.PROTECT, related_name="+")
    forecast = models.ForeignKey(Forecast, null=True, on_delete=models.PROTECT, related_name="+")
    lot = models.CharField(max_length=60, blank=True)
    happened_at = models.DateTimeField()

    def __str__(self) -> str:
        return f"from {self.source}"


class RefillCheck(Fact):
    """One item of the look that the filler owes before each fill."""

    refill = models.ForeignKey(Refill, on_delete=models.PROTECT, related_name="checks")
    item = models.CharField(max_length=30)
    passed = models.BooleanField()

    def __str__(self) -> str:
        return self.item
