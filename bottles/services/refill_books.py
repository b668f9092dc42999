"""Post what a refill moved: at each weighing the difference to what was posted before.

What the whole refill moved so far is worked out anew from all its weighings (`rules.refill_flows`)
and compared with the movements that carry its key. So an open refill's books are right at every
moment, and a weighing that was struck or came late is put right by the next one.

Called inside an act's transaction, after its bottles are locked.
"""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Container

from django.db.models import Q

from bottles.models import Account, Bottle, Line, Movement, Refill, Weighing
from bottles.physics.weighing import net_uncertainty
from bottles.rules.refill_flows import Flow, Read, Source, flows
from bottles.selectors.refills import Course, net_without_hose, source_weighings
from bottles.services.booking import book
from bottles.services.posting import Move, account_of, own_account
from shop.base.models import Act

# A line's loss is known to about a half: liquid when the valve is shut, vapour once it has warmed
# (common practice, no source).
LINE_SHARE = 2

Pair = tuple[int, int]  # keys of two accounts: from, to


def post_flows(*, act: Act, course: Course, weighing: Weighing | None) -> list[Movement]:
    """Bring the books of a refill to its weighings; return what was posted, nothing where they agree.

    The course was read within the act, after the weighing was inserted.
    """
    if course.before is None or not course.draws:
        return []
    refill, accounts = course.refill, _Accounts(course)
    wanted = _wanted(course, accounts)
    posted = _posted(refill, wanted)
    happened_at = weighing.happened_at if weighing else act.recorded_at
    filled: list[Move] = []
    vented: list[Move] = []
    for pair in sorted(wanted.keys() | posted.keys()):
        grams, error, origin = wanted.get(pair, (0, 0, "computed"))
        difference = grams - posted.get(pair, 0)
        if not difference:
            continue
        source, target = (accounts.by_key(key) for key in (pair if difference > 0 else pair[::-1]))
        move = Move(source=source, target=target, grams=abs(difference), origin=origin, error_g=error)
        (vented if "vented" in (source.kind, target.kind) else filled).append(move)
    made = [
        book(act=act, kind=kind, happened_at=happened_at, moves=moves, refill=refill, weighing=weighing)
        for kind, moves in (("refill", filled), ("vent", vented))
        if moves
    ]
    return [movement for movement in made if movement is not None]


def flows_of(course: Course) -> list[Flow]:
    """Return all that a refill moved so far, by its weighings."""
    if course.before is None:
        return []
    before = Read(net_without_hose(course.refill, course.before), course.before.error_g, 0, line_off=True)
    reads = [
        Read(
            net_without_hose(course.refill, row), row.error_g, course.draw_at(row.happened_at, row.act_id),
            line_off=row.step == "disconnected",
        )
        for row in course.reads
    ]
    return flows(before, reads, [_source(course, number) for number in range(len(course.draws))])


def line_loss_of(course: Course, number: int) -> tuple[int, int]:
    """Return the line loss of a draw, as entered for its station or as forecast, and its ±."""
    station, draw = course.refill.station, course.draws[number]
    if station.line_loss_g is not None:
        return station.line_loss_g, math.ceil(station.line_loss_g / LINE_SHARE)
    grams = int(draw.forecast.result.get("line_g", 0)) if draw.forecast else 0
    return grams, math.ceil(grams / LINE_SHARE)


def _source(course: Course, number: int) -> Source:
    line_g, line_error_g = line_loss_of(course, number)
    moved_on = number + 1 < len(course.draws)
    rows = source_weighings(course, number)
    if len(rows) < 2:
        return Source(line_g=line_g, line_error_g=line_error_g, moved_on=moved_on)
    first, last = rows[0], rows[-1]
    return Source(
        lost_g=max(0, first.net_g) - max(0, last.net_g), lost_error_g=net_uncertainty(first.error_g, last.error_g),
        line_g=line_g, line_error_g=line_error_g, moved_on=moved_on,
    )  # fmt: skip


class _Accounts:
    """The accounts that a refill may touch, read at once; one that isn't there yet is opened when it's named."""

    def __init__(self, course: Course) -> None:
        bottles = {bottle.pk: bottle for bottle in (course.refill.bottle, *(draw.source for draw in course.draws))}
        rows = Account.objects.filter(Q(bottle__in=bottles) | Q(kind__in=Account.OWN))
        self._found: dict[int, Account] = {}
        self._keys: dict[int | str, int] = {}
        for row in rows:
            if row.bottle_id:
                row.bottle = bottles[row.bottle_id]
            self._keep(row)

    def of(self, bottle: Bottle) -> Account:
        """A bottle's account."""
        return self._found[self._keys[bottle.pk]] if bottle.pk in self._keys else self._keep(account_of(bottle))

    def own(self, kind: str) -> Account:
        """One of the shop's own."""
        return self._found[self._keys[kind]] if kind in self._keys else self._keep(own_account(kind))

    def by_key(self, key: int) -> Account:
        """Any that was named, or that a movement of the refill touched."""
        return self._found[key] if key in self._found else self._keep(Account.objects.get(pk=key))

    def _keep(self, row: Account) -> Account:
        self._keys[row.bottle_id or row.kind] = row.pk
        self._found[row.pk] = row
        return row


def _wanted(course: Course, accounts: _Accounts) -> dict[Pair, tuple[int, int, str]]:
    """Grams from one account to another over the whole refill, with their ± and origin."""
    receiver = accounts.of(course.refill.bottle)
    found: dict[Pair, tuple[int, int, str]] = {}
    for flow in flows_of(course):
        supply = accounts.of(course.draws[flow.draw].source) if flow.draw is not None else receiver
        source, target = {
            "arrived": lambda s: (s, receiver),
            "line": lambda s: (s, accounts.own("line")),
            "missing": lambda s: (s, accounts.own("unaccounted")),
            "found": lambda s: (accounts.own("scale"), receiver),
            "found beyond": lambda s: (accounts.own("unaccounted"), receiver),
            "vented": lambda s: (receiver, accounts.own("vented")),
        }[flow.kind](supply)
        before = found.get((source.pk, target.pk), (0, 0, flow.origin))
        found[source.pk, target.pk] = (before[0] + flow.grams, net_uncertainty(before[1], flow.error_g), flow.origin)
    return found


def _posted(refill: Refill, wanted: Container[Pair]) -> dict[Pair, int]:
    """Grams between two accounts that carry this refill, counted the way they're wanted.

    What had to be booked as found because some books fell short (it comes from *unaccounted* and is
    computed) is no flow of the refill and mustn't be taken back by the next weighing.
    """
    net: dict[Pair, int] = defaultdict(int)
    rows = Line.objects.filter(movement__refill=refill, movement__kind__in=("refill", "vent", "reversal"))
    rows = rows.exclude(Q(source__kind="unaccounted") | Q(target__kind="unaccounted"), origin="computed")
    for source, target, grams in rows.values_list("source_id", "target_id", "grams"):
        if (target, source) in net:
            net[target, source] -= grams
        else:
            net[source, target] += grams
    return {pair[::-1] if pair[::-1] in wanted else pair: -grams if pair[::-1] in wanted else grams for pair, grams in net.items()}
