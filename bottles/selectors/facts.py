"""Gather what the register knows of bottles into the facts that the rules judge.

A fixed number of queries, however many bottles. What nobody recorded stays None: the rules
ask for it, they never assume it.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, NamedTuple

from django.db.models import QuerySet

from bottles.models import Bottle, Condition, Custody, Refill, RefillCheck, Stamp, Standing
from bottles.rules.facts import Condition as Noted
from bottles.rules.facts import Contents, Facts, Permit
from bottles.rules.marks import read_mark
from bottles.rules.stamps import DateStamp
from shop.base.composed import composed
from shop.people.models import Consent
from shop.rules.month import Month

CONDEMNED = "condemned"
WITHOUT_PRESSURE = "without pressure"
HELD: dict[str, Contents] = {"nitrous": "nitrous oxide", "new": "nothing yet", "other": "other", "unknown": "unknown"}


class _Stamped(NamedTuple):
    """The columns of a stamp that are judged: a row without a model, as many are read at once."""

    id: int
    kind: str
    typed: str
    year: int
    month: int | None
    star: bool
    plus: bool
    facility: str


@dataclass(slots=True)
class _Rows:
    """What the tables hold of one bottle."""

    standing: Standing | None = None
    stamps: list[_Stamped] = field(default_factory=list)
    conditions: list[Noted] = field(default_factory=list)
    consent: bool | None = None
    open_refill: bool = False
    came_back: Any = None  # when it last came in after having been out
    left: Any = None  # when it last went out
    stars: list[bool] = field(default_factory=list)  # of each refill: were the star's checks done


def facts_of(
    bottles: Sequence[Bottle], *, star_items: Collection[str] = (), standings: Mapping[int, Standing] | None = None
) -> dict[int, Facts]:
    """Return the facts of each bottle by key; `star_items` are the look's items that a star asks for.

    Whoever has just read the bottles' standings, with ownership and weighing, hands them over.
    """
    keys = [bottle.pk for bottle in bottles]
    if standings is None:
        standings = Standing.objects.select_related("ownership", "weighing").in_bulk(keys)
    rows = _read(keys, standings, star_items)
    return {bottle.pk: _facts(bottle, rows[bottle.pk]) for bottle in bottles}


def _read(keys: list[int], standings: Mapping[int, Standing], star_items: Collection[str]) -> dict[int, _Rows]:
    found: dict[int, _Rows] = {key: _Rows(standings.get(key)) for key in keys}
    for key, *columns in _stamps(keys):
        found[key].stamps.append(_Stamped(*columns))
    for key, code, seen_on in _conditions(keys):
        found[key].conditions.append(Noted(code, seen_on))
    for key in _open_refills(keys):
        found[key].open_refill = True
    _read_journeys(found)
    _read_consents(found)
    _read_stars(found, star_items)
    return found


@composed
def _stamps(keys: Iterable[int]) -> QuerySet[Any]:
    stamps = Stamp.objects.filter(bottle__in=keys, strike__isnull=True).order_by("id")
    return stamps.values_list("bottle_id", *_Stamped._fields)


@composed
def _conditions(keys: Iterable[int]) -> QuerySet[Any]:
    conditions = Condition.objects.filter(bottle__in=keys, end__isnull=True).order_by("id")
    return conditions.values_list("bottle_id", "code", "seen_on")


@composed
def _open_refills(keys: Iterable[int]) -> QuerySet[Any]:
    return Refill.objects.filter(bottle__in=keys, closed_at__isnull=True).values_list("bottle_id", flat=True)


@composed
def _journeys(keys: Iterable[int]) -> QuerySet[Any]:
    journeys = Custody.objects.filter(bottle__in=keys).exclude(kind="moved").order_by("happened_at", "id")
    return journeys.values_list("bottle_id", "kind", "happened_at")


@composed
def _consents(customers: Iterable[int]) -> QuerySet[Any]:
    consents = Consent.objects.filter(customer__in=customers, purpose="fill").order_by("on", "id")
    return consents.values_list("customer_id", "given")


def _read_journeys(found: dict[int, _Rows]) -> None:
    """When each bottle last left, and last came back: a weight from before that is stale."""
    out: set[int] = set()
    for key, kind, at in _journeys(found.keys()):
        if kind == "in":
            if key in out:
                found[key].came_back = at
                out.discard(key)
        else:
            found[key].left = at
            out.add(key)


def _read_consents(found: dict[int, _Rows]) -> None:
    owners: dict[int, list[_Rows]] = defaultdict(list)
    for rows in found.values():
        ownership = rows.standing.ownership if rows.standing else None
        if ownership and ownership.customer_id:
            owners[ownership.customer_id].append(rows)
    for customer, given in _consents(owners.keys()) if owners else ():
        for rows in owners[customer]:
            rows.consent = given


def _read_stars(found: dict[int, _Rows], star_items: Collection[str]) -> None:
    """For each refill of a star-stamped bottle since that stamp: whether the star's checks were done."""
    starred = {
        key: max(stamp.id for stamp in rows.stamps if stamp.star)
        for key, rows in found.items()
        if any(stamp.star and stamp.kind == "test" for stamp in rows.stamps)
    }
    if not starred or not star_items:
        return
    done: dict[int, set[str]] = defaultdict(set)
    checks = RefillCheck.objects.filter(refill__bottle__in=starred, item__in=star_items, passed=True)
    for key, item in checks.values_list("refill_id", "item"):
        done[key].add(item)
    since = {stamp.id: stamp for rows in found.values() for stamp in rows.stamps}
    for refill in Refill.objects.filter(bottle__in=starred).exclude(ended_by="abandoned").order_by("id"):
        stamp = since[starred[refill.bottle_id]]
        opened = refill.opened_at
        if (opened.year, opened.month) >= (stamp.year, stamp.month or 1):
            found[refill.bottle_id].stars.append(done[refill.pk] >= set(star_items))


def _facts(bottle: Bottle, rows: _Rows) -> Facts:
    standing = rows.standing
    codes = {condition.code for condition in rows.conditions}
    made = [stamp for stamp in rows.stamps if stamp.kind == "made"]
    tests = [stamp for stamp in rows.stamps if stamp.kind == "test"]
    ownership = standing.ownership if standing else None
    net, error = _weighed(rows)
    return Facts(
        mark=read_mark(bottle.mark) if bottle.mark else None,
        wall=None if bottle.wall == "unknown" else bottle.wall,  # type: ignore[arg-type]
        made=_date_stamp(made[-1]) if made else None,
        tests=tuple(_date_stamp(stamp) for stamp in tests) if tests or made else None,
        star_kept=all(rows.stars) if rows.stars else None,
        service_life_end=min(_months(rows.stamps, "end"), default=None),
        permit=_permit(bottle),
        marks_legible=bool(bottle.mark and bottle.serial),
        alloy_6351=("6351" in bottle.alloy) if bottle.alloy else None,
        capacity_ml=bottle.capacity_ml,
        capacity_basis="computed" if bottle.capacity_basis == "inferred" else "entered",
        tare_known=bool(standing and standing.tare_id),
        charge_g=bottle.charge_g,
        own_limit_g=bottle.own_limit_g,
        net_g=net,
        net_plus_minus_g=error,
        contents=_contents(bottle, standing),
        owner=ownership.kind if ownership else None,  # type: ignore[arg-type]
        consent=rows.consent,
        condemned=CONDEMNED in codes or bottle.retired_at is not None,
        conditions=tuple(condition for condition in rows.conditions if condition.code != CONDEMNED),
        pressure_kept=_pressure_kept(codes, net, error),
        in_open_refill=rows.open_refill,
        visual=max(_months(rows.stamps, "visual"), default=None),
        disc=max(_months(rows.stamps, "disc"), default=None),
    )


def _weighed(rows: _Rows) -> tuple[int | None, int]:
    """The last weight that still holds: none from before the bottle was out."""
    weighing = rows.standing.weighing if rows.standing else None
    if weighing is None:
        return None, 0
    gone = max((at for at in (rows.left, rows.came_back) if at is not None), default=None)
    if gone is not None and weighing.happened_at < gone:
        return None, 0
    return weighing.net_g, weighing.error_g


def _contents(bottle: Bottle, standing: Standing | None) -> Contents | None:
    """What it last held: our own record once it was weighed here, else what was said of it."""
    if bottle.last_held in ("other", "unknown"):
        return HELD[bottle.last_held]
    if standing and standing.weighing and standing.weighing.net_g > standing.weighing.error_g:
        return "nitrous oxide"
    return HELD.get(bottle.last_held)


def _pressure_kept(codes: set[str], net: int | None, error: int) -> bool | None:
    """Nitrous on the scale is pressure in the bottle; an empty one has to be looked at."""
    if WITHOUT_PRESSURE in codes:
        return False
    return True if net is not None and net > error else None


def _permit(bottle: Bottle) -> Permit | None:
    if not bottle.permit:
        return None
    return Permit(
        lists_nitrous=bottle.permit_lists_nitrous, expires=bottle.permit_until, charge_g=bottle.permit_charge_g
    )


def _months(stamps: Iterable[_Stamped], kind: str) -> list[Month]:
    return [_date_stamp(stamp).at for stamp in stamps if stamp.kind == kind]


def _date_stamp(stamp: _Stamped) -> DateStamp:
    """Return a stamp's row as the rules take it."""
    return DateStamp(
        typed=stamp.typed, year=stamp.year, month=stamp.month, star=stamp.star, plus=stamp.plus,
        facility=stamp.facility or None,
    )
