"""Keep each bottle's standing: the latest of each kind of fact, recomputed, never edited."""

from __future__ import annotations

from bottles.models import Bottle, Custody, Ownership, Standing, Tare, Weighing


def restate(bottle: Bottle) -> Standing:
    """Work out the bottle's standing from its facts and keep it; within the act's transaction."""
    custody = Custody.objects.filter(bottle=bottle).order_by("-happened_at", "-id").first()
    standing = Standing(
        bottle=bottle,
        ownership=Ownership.objects.filter(bottle=bottle).order_by("-since", "-id").first(),
        custody=custody,
        tare=Tare.objects.filter(bottle=bottle).order_by("-since", "-id").first(),
        weighing=latest_weighing(bottle),
        is_in=bool(custody and custody.is_in),
        waits=bool(custody and custody.is_in and custody.wanted),
    )
    standing.save()  # by its key: the row that is there is replaced
    return standing


def restate_weighing(bottle: Bottle) -> None:
    """Bring the standing to the bottle's weighings alone, where an act touched nothing else of it."""
    if not Standing.objects.filter(bottle=bottle).update(weighing=latest_weighing(bottle)):
        restate(bottle)


def latest_weighing(bottle: Bottle) -> Weighing | None:
    """Return the last weighing that isn't struck, by when it happened."""
    return (
        Weighing.objects.filter(bottle=bottle, strike__isnull=True).order_by("-happened_at", "-id").first()
    )
