"""Stock-take: every bottle that is in, when it was last weighed, what the books say."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from bottles.models import Bottle, Standing
from bottles.selectors.contents import Holding, holdings


@dataclass(frozen=True, slots=True)
class Stocked:
    """One bottle that is in."""

    standing: Standing
    holding: Holding
    weighed_since: bool

    @property
    def bottle(self) -> Bottle:
        """The bottle."""
        return self.standing.bottle


def stock_of_the_shop(since: datetime) -> list[Stocked]:
    """Return the bottles that are in, those not weighed since a moment first: five queries."""
    standings: Sequence[Standing] = list(
        Standing.objects.filter(is_in=True, bottle__retired_at__isnull=True)
        .select_related("bottle", "ownership__customer", "custody__place")
        .order_by("custody__place__name", "bottle__code")
    )
    held = holdings([standing.bottle for standing in standings])
    rows = [
        Stocked(standing, held[standing.bottle_id], _since(held[standing.bottle_id], since)) for standing in standings
    ]
    return sorted(rows, key=lambda row: row.weighed_since)


def _since(holding: Holding, since: datetime) -> bool:
    return holding.weighed_at is not None and holding.weighed_at >= since
