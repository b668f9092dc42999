"""The shop's books between two dates, and what is unaccounted for.

Days are the shop's; a movement counts on the day on which it happened. *As known when* leaves out
what was recorded later than a moment, so that a report of then can be had again.
"""

from __future__ import annotations

import math
from collections import defaultdict
from dataclasses import dataclass
from datetime import date, datetime, time, timedelta
from typing import Any

from django.db.models import F, OuterRef, Q, QuerySet, Subquery, Sum

from bottles.models import Account, Line, Weighing
from shop.base import clock
from shop.base.models import Shop

# Where grams came from or went, in the order in which a manager reads it.
FLOWS = (
    ("delivery", "delivered by the supplier"),
    ("opening supplier", "held at a first weighing, the shop's and the supplier's"),
    ("customer", "came with customers' bottles, less used by their owners"),
    ("returned", "went back to the supplier"),
    ("car", "used on cars"),
    ("line", "line loss"),
    ("vented", "vented"),
    ("scale", "between scales at a refill"),
    ("unaccounted", "unaccounted for"),
    ("supplier", "supplier, tickets against the scale"),
)


# What was reversed cancels out and leaves no ± behind.
STANDS = Q(movement__reverses__isnull=True, movement__reversal__isnull=True)


@dataclass(frozen=True, slots=True)
class Flow:
    """Into the bottles and out of them, by where it came from or went; ± of the weighings behind it."""

    code: str
    words: str
    into_g: int
    out_g: int
    error_g: int

    @property
    def net_g(self) -> int:
        """What it added to the bottles; below nothing: took away."""
        return self.into_g - self.out_g


@dataclass(frozen=True, slots=True)
class Balance:
    """Opening stock, what came and went, closing stock: each counted by itself."""

    first: date
    last: date
    opening_g: int
    opening_error_g: int
    flows: tuple[Flow, ...]
    closing_g: int
    closing_error_g: int
    filled_g: int  # from bottle to bottle: inside the stock
    all_accounts_g: int  # every balance together: nothing, or the books are wrong

    @property
    def difference_g(self) -> int:
        """Opening and flows less closing: nothing, or the books are wrong."""
        return self.opening_g + sum(flow.net_g for flow in self.flows) - self.closing_g


def balance_between(first: date, last: date, *, shop: Shop, known_at: datetime | None = None) -> Balance:
    """Return the shop's books from the start of one day to the end of another: seven queries."""
    start, end = day_start(first, shop), day_start(last + timedelta(days=1), shop)
    lines = _known(Line.objects.all(), known_at)
    grouped = _by_kind(lines.filter(movement__happened_at__gte=start, movement__happened_at__lt=end))
    flows: dict[str, list[int]] = defaultdict(lambda: [0, 0, 0])
    filled = 0
    for row in grouped:
        source, target = row["source__kind"], row["target__kind"]
        if source == target == "bottle":
            filled += row["sum_g"] * (-1 if row["movement__kind"] == "reversal" else 1)
            continue
        into = target == "bottle"
        kept = flows[_flow(row, source if into else target)]
        kept[0 if into else 1] += row["sum_g"]
        kept[2] += row["sum_e2"]
    total = Account.objects.aggregate(all=Sum("balance_g"))["all"] or 0
    return Balance(
        first, last, _stock(lines, start), _stock_error(start, known_at),
        tuple(Flow(code, words, flows[code][0], flows[code][1], _root(flows[code][2])) for code, words in FLOWS if code in flows),
        _stock(lines, end), _stock_error(end, known_at), filled, total,
    )  # fmt: skip


def day_start(day: date, shop: Shop) -> datetime:
    """Return the instant at which a day of the shop begins."""
    return datetime.combine(day, time.min, tzinfo=clock.zone(shop))


def _known(lines: QuerySet[Line], known_at: datetime | None) -> QuerySet[Line]:
    return lines.filter(act__recorded_at__lte=known_at) if known_at is not None else lines


def _by_kind(lines: QuerySet[Line]) -> Any:
    return lines.values("source__kind", "target__kind", "movement__kind", "movement__reverses__kind").annotate(
        sum_g=Sum("grams"), sum_e2=Sum(F("error_g") * F("error_g"), filter=STANDS, default=0)
    )


def _flow(row: dict[str, Any], other: str) -> str:
    """Name the flow of a line between the bottles and another account; a reversal goes by what it reverses."""
    if other != "supplier":
        return other
    kind = row["movement__reverses__kind"] or row["movement__kind"]
    return {"delivery": "delivery", "opening": "opening supplier"}.get(kind, "supplier")


def _stock(lines: QuerySet[Line], until: datetime) -> int:
    told = lines.filter(movement__happened_at__lt=until).aggregate(
        came=Sum("grams", filter=Q(target__kind="bottle")), went=Sum("grams", filter=Q(source__kind="bottle"))
    )
    return (told["came"] or 0) - (told["went"] or 0)


def _stock_error(until: datetime, known_at: datetime | None) -> int:
    """Return the ± of the stock at a moment: each bottle's last weighing, and what moved since."""
    weighings = Weighing.objects.filter(happened_at__lt=until)
    if known_at is None:
        weighings = weighings.filter(strike__isnull=True)
    else:
        weighings = weighings.filter(act__recorded_at__lte=known_at)
        weighings = weighings.exclude(strike__act__recorded_at__lte=known_at)

    def last(bottle: str, field: str) -> Subquery:
        rows = weighings.filter(bottle=OuterRef(bottle)).order_by("-happened_at", "-id")
        return Subquery(rows.values(field)[:1])

    accounts = Account.objects.filter(kind="bottle").annotate(error=last("bottle_id", "error_g"))
    square: int = sum(error**2 for error in accounts.values_list("error", flat=True) if error is not None)
    lines = _known(Line.objects.filter(movement__happened_at__lt=until), known_at)
    for side in ("source", "target"):
        since = lines.filter(STANDS, **{f"{side}__kind": "bottle"}).annotate(weighed=last(f"{side}__bottle_id", "happened_at"))
        told = since.filter(movement__happened_at__gt=F("weighed")).aggregate(all=Sum(F("error_g") * F("error_g")))
        square += told["all"] or 0
    return _root(square)


def _root(square: int) -> int:
    root = math.isqrt(square)
    return root if root * root == square else root + 1
