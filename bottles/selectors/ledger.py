"""Whether what is kept beside the facts still says what the facts say.

Each comparison is one statement of the database, so that a desk that saves meanwhile can't be
taken for a difference.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from django.db.models import F, OuterRef, QuerySet, Subquery, Sum
from django.db.models.functions import Coalesce

from bottles.models import Account, Bottle, Custody, Line, Ownership, Tare, Weighing


def balance_differences() -> list[str]:
    """Return the accounts whose balance isn't the sum of their lines; and whether all are nothing."""

    def told(side: str) -> Coalesce:
        sums = Line.objects.filter(**{side: OuterRef("pk")}).order_by().values(side).annotate(all=Sum("grams"))
        return Coalesce(Subquery(sums.values("all")), 0)

    accounts = Account.objects.annotate(by_lines=told("target") - told("source")).exclude(by_lines=F("balance_g"))
    found = [
        f"account of {account}: its balance is {account.balance_g} g, its lines make {account.by_lines} g"
        for account in accounts.select_related("bottle", "customer", "car").order_by("pk")
    ]
    total = Account.objects.aggregate(all=Sum("balance_g"))["all"] or 0
    if total:
        found.append(f"all balances together are {total} g, not nothing")
    return found


def standing_differences() -> list[str]:
    """Return the bottles whose standing isn't what their facts make it."""
    return list(_standings_that_differ())


def _standings_that_differ() -> Iterator[str]:
    custody = _latest(Custody.objects.all(), "happened_at")
    rows = Bottle.objects.annotate(
        ownership=_first(_latest(Ownership.objects.all(), "since")),
        custody=_first(custody),
        custody_kind=_first(custody, "kind"),
        custody_wanted=_first(custody, "wanted"),
        tare=_first(_latest(Tare.objects.all(), "since")),
        weighing=_first(_latest(Weighing.objects.filter(strike__isnull=True), "happened_at")),
    ).order_by("pk")
    names = ("ownership", "custody", "tare", "weighing")
    fields = ("code", *names, "custody_kind", "custody_wanted", *(f"standing__{name}_id" for name in names))
    for row in rows.values("standing__pk", "standing__is_in", "standing__waits", *fields).iterator(chunk_size=2000):
        if row["standing__pk"] is None:
            yield f"{row['code']} has no standing"
            continue
        is_in = row["custody_kind"] in Custody.INSIDE
        wrong = [name for name in names if row[name] != row[f"standing__{name}_id"]]
        wrong += ["is in"] if row["standing__is_in"] != is_in else []
        wrong += ["waits"] if row["standing__waits"] != (is_in and bool(row["custody_wanted"])) else []
        if wrong:
            yield f"standing of {row['code']}: {', '.join(wrong)}"


def _latest(rows: QuerySet[Any], by: str) -> QuerySet[Any]:
    return rows.filter(bottle=OuterRef("pk")).order_by(f"-{by}", "-id")


def _first(rows: QuerySet[Any], field: str = "pk") -> Subquery:
    return Subquery(rows.values(field)[:1])
