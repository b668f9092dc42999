"""Lock what an act touches, in order of key, before anything is checked."""

from __future__ import annotations

from collections.abc import Iterable

from bottles.models import Bottle


def lock(bottles: Iterable[Bottle]) -> dict[int, Bottle]:
    """Lock the bottles of an act and return them as they stand now, by key.

    In order of key, so that two acts that share two bottles can't wait for each other. On
    SQLite the act's own first write holds the whole database and this only reads anew.
    """
    keys = sorted({bottle.pk for bottle in bottles})
    rows = Bottle.objects.select_for_update().filter(pk__in=keys).order_by("pk")
    return {bottle.pk: bottle for bottle in rows}
