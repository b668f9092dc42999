"""Scales: how well each tells, and when each was last checked with a known weight."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date, datetime

from django.db.models import F, Window
from django.db.models.functions import RowNumber

from bottles.models import Scale, ScaleCheck
from bottles.physics.weighing import net_uncertainty
from shop.base import clock
from shop.base.models import Shop


@dataclass(frozen=True, slots=True)
class Checked:
    """A scale with its last check."""

    scale: Scale
    check: ScaleCheck | None
    today: bool  # whether that check was made on the shop's day

    @property
    def passed_today(self) -> bool:
        """Whether the day's first fill may follow."""
        return self.today and self.check is not None and self.check.passed

    @property
    def failed(self) -> bool:
        """Whether its last check failed: out of use until one passes."""
        return self.check is not None and not self.check.passed


def scale_uncertainty(scale: Scale) -> int:
    """Return the ± of one reading in grams: the scale's error, and half of what it can tell apart."""
    return net_uncertainty(scale.error_g, (scale.resolution_g + 1) // 2)


def last_check(scale: Scale, at: datetime | None = None) -> ScaleCheck | None:
    """Return the last check that was made by a moment (now, where none is given)."""
    checks = ScaleCheck.objects.filter(scale=scale)
    if at is not None:
        checks = checks.filter(happened_at__lte=at)
    return checks.order_by("-happened_at", "-id").first()


def checked_scales(shop: Shop, scales: Iterable[Scale] | None = None) -> list[Checked]:
    """Return scales (those in use, where none are given) with their last checks: two queries."""
    found = list(Scale.objects.filter(active=True).order_by("name")) if scales is None else list(scales)
    newest = Window(RowNumber(), partition_by=F("scale"), order_by=[F("happened_at").desc(), F("id").desc()])
    checks = {
        check.scale_id: check
        for check in ScaleCheck.objects.filter(scale__in=found).annotate(place=newest).filter(place=1)
    }
    today = clock.today(shop)
    return [Checked(scale, checks.get(scale.pk), _on(checks.get(scale.pk), today, shop)) for scale in found]


def scale_checked(scale: Scale, shop: Shop) -> Checked:
    """Return one scale with its last check."""
    check = last_check(scale)
    return Checked(scale, check, _on(check, clock.today(shop), shop))


def _on(check: ScaleCheck | None, day: date, shop: Shop) -> bool:
    return check is not None and clock.day_of(check.happened_at, shop) == day
