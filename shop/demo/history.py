"""The shop's days, one after the other: bottles come, are filled and go; supply bottles come and go back."""

from __future__ import annotations

import math
from collections.abc import Iterator
from datetime import date

from shop.demo.counter import deliver
from shop.demo.filling import SETTLED, Fill, fill_bottle, limit_of, open_fill
from shop.demo.names import SUPPLIER
from shop.demo.past import Past
from shop.demo.people import BENCH, BOTH, DEPUTY
from shop.demo.regulars import STAR_BROKEN, WAITS_OPEN, Regular, regulars
from shop.demo.steps import Step

POOL = tuple(f"S-{number}" for number in range(11, 23))  # the supplier's, in rotation
MOST_A_DAY = 7
STOCK_WANTED = 3


class History:
    """What the day's work needs to remember from one day to the next."""

    def __init__(self, past: Past) -> None:
        self.past = past
        self.rng = past.rng
        self.at_supplier = list(POOL)
        self.full: list[str] = []
        self.spent: list[str] = []
        self.hangs: dict[str, str] = {}
        self.seen: set[str] = set()
        self.checked: set[tuple[str, date]] = set()
        self.visits: dict[str, int] = {}
        self.going: list[Regular] = []  # filled, and fetched on the next day
        self.tickets = 1_000
        span = (past.days.today - past.days.first).days
        # Everybody comes once soon; in a short history too.
        self.due = {
            one.code: past.days.first.toordinal() + 1 + self.rng.randrange(max(2, min(span - 6, 30))) for one in regulars()
        }

    def days(self) -> Iterator[Step]:
        """Give the steps of every working day, then the refill that is open now."""
        days = list(self.past.days.workdays())
        for number, day in enumerate(days):
            last = number == len(days) - 1
            self.one_day(day, last=last)
            if last or (day.weekday() == 0 and day.day <= 7):
                # What a night's background work does; once a month is enough to see the figure come about.
                self.past.on(day, "18:30").write("learning.fit")
            yield from self.past.drain()
        self.left_open()
        yield from self.past.drain()

    def one_day(self, day: date, *, last: bool) -> None:
        """Write one day: supplier, arrivals, fills, hand-overs, now and then a stock-take."""
        past = self.past
        if not self.seen or (day.weekday() == 1 and day.isocalendar().week % 2 == 0):
            past.on(day, "08:05")
            self.supplier_comes()
        past.on(day, "08:40")
        for regular in self.going:
            self.goes(regular)
        self.going = []
        here = [one for one in regulars() if self.due[one.code] <= day.toordinal()][:MOST_A_DAY]
        past.on(day, "09:10")
        for regular in here:
            self.comes(regular)
        past.on(day, "11:00")
        for regular in here:
            self.fill(regular, day)
            past.later(14)
        past.on(day, "16:40")
        for regular in here:
            if self.rng.random() < 0.25 or last:
                self.going.append(regular)
                past.later(3).move(regular.code, "RACK-B" if regular.owner == "shop" else "RACK-A")
            else:
                self.goes(regular)
            self.due[regular.code] = day.toordinal() + self.pause(regular, day)
        if day.toordinal() % 91 == 0:
            self.stocktake(day)

    def pause(self, regular: Regular, day: date) -> int:
        """How many days until it comes again: more in winter than in the season."""
        season = 1.35 + 0.55 * math.cos(2 * math.pi * (day.timetuple().tm_yday - 15) / 365.25)
        return max(4, round(regular.days * season * self.rng.uniform(0.6, 1.3)))

    def comes(self, regular: Regular) -> None:
        """Take a bottle in; what was used of it is known to nobody yet."""
        past, code = self.past, regular.code
        first = code not in self.visits
        self.visits[code] = self.visits.get(code, 0) + 1
        if not first:
            past.net_g[code] *= self.rng.uniform(0.04, 0.45)
        past.later(8).check_in(
            code, brought_by="the shop" if regular.owner == "shop" else regular.owner, wanted="fill",
            promised=past.days.at(past.now.date(), "17:00"),
        )
        if regular.car and not first:
            gross = past.reading(code, "BENCH-1")
            past.later(3).write("use", bottle=code, car=list(regular.car), amount="", scale="BENCH-1", gross=gross, note="runs")
        if self.cold(regular):
            past.later(2).move(code, "FREEZER")

    def cold(self, regular: Regular) -> bool:
        """Whether this visit's fill is a chilled one: two of three."""
        return (self.visits[regular.code] + int(regular.code[-2:])) % 3 != 0

    def fill(self, regular: Regular, day: date) -> None:
        """Fill it at one of the stations, with that day's check of the scale before the first."""
        past = self.past
        station = "ST-1" if self.rng.random() < 0.6 else "ST-2"
        self.check(past.stations[station].scale, day)
        supply = self.hangs.get(station) or self.hang(station)
        season = 21.0 + 3.0 * math.cos(2 * math.pi * (day.timetuple().tm_yday - 200) / 365.25)
        spent = fill_bottle(
            past,
            Fill(
                regular.code, station, supply, method="chilled" if self.cold(regular) else "pressure", room_c=season,
                line_on=self.rng.random() < 0.25, star_checks=regular.code != STAR_BROKEN,
                spilt_g=self.rng.uniform(250, 600) if station == "ST-2" and self.rng.random() < 0.08 else 0.0,
                by=self.rng.choice((BENCH, BENCH, BOTH, DEPUTY)).sign_in,
            ),
        )  # fmt: skip
        if spent:
            past.later(5).write("supply.disconnect", bottle=supply, place="CAGE")
            self.spent.append(supply)
            del self.hangs[station]

    def check(self, scale: str, day: date) -> None:
        """Put the known weight on a scale, before the day's first fill on it."""
        if (scale, day) in self.checked:
            return
        self.checked.add((scale, day))
        of = self.past.scales[scale]
        known = of.shows(20 * 453.59237 if not self.past.kit.metric else 10_000)
        grams = 20 * 453.59237 if not self.past.kit.metric else 10_000
        self.past.later(2).write("scale.check", scale=scale, known=known, read=of.reads(grams, self.rng))

    def hang(self, station: str) -> str:
        """Hang a full supply bottle on a station."""
        if not self.full:
            self.supplier_comes()
        supply = self.full.pop(0)
        self.past.later(4).write("supply.connect", station=station, bottle=supply)
        self.hangs[station] = supply
        return supply

    def supplier_comes(self) -> None:
        """Send back what is spent, take in what is full."""
        past = self.past
        for code in self.spent:
            past.later(5).write(
                "give_back", bottle=code, supplier=SUPPLIER, scale="FLOOR", gross=past.reading(code, "FLOOR"), if_asked=SETTLED
            )
            self.at_supplier.append(code)
        self.spent = []
        while len(self.full) < STOCK_WANTED:
            code = self.at_supplier.pop(0)
            self.tickets += self.rng.randrange(3, 40)
            past.later(6)
            deliver(past, code, ticket=str(self.tickets), seen_before=code in self.seen)
            self.seen.add(code)
            self.full.append(code)

    def goes(self, regular: Regular) -> None:
        """Give a bottle back to its owner, or put it on its car."""
        past = self.past
        spec = past.specs[regular.code]
        past.later(5).hand_over(
            regular.code, to=regular.owner if not regular.car else "the shop's driver", kind="car" if regular.car else "out",
            car=regular.car, limit_g=limit_of(spec, past.kit, past.now.date()),
        )

    def stocktake(self, day: date) -> None:
        """Weigh the supply bottle that no scale stands under, and one on the rack."""
        self.past.on(day, "17:45")
        for supply in (*(self.hangs[one] for one in sorted(self.hangs)), *self.full[:1]):
            self.past.later(4).weigh(supply, "FLOOR", step="stocktake", if_asked=SETTLED)

    def left_open(self) -> None:
        """Open a refill yesterday that waits overnight in the freezer."""
        past = self.past
        regular = next(one for one in regulars() if one.code == WAITS_OPEN)
        past.ago(1, "16:05")
        if regular in self.going:
            self.goes(regular)
        self.visits[regular.code] = 0 if regular.code in self.visits else -1
        past.later(1)
        if self.visits[regular.code] == 0:
            past.net_g[regular.code] *= 0.2
        past.check_in(
            regular.code, brought_by=regular.owner, wanted="fill", promised=past.days.at(past.days.today, "12:00")
        )
        past.later(5).move(regular.code, "FREEZER")
        self.check(past.stations["ST-2"].scale, past.days.ago(1))
        supply = self.hangs.get("ST-2") or self.hang("ST-2")
        past.later(70)
        open_fill(past, Fill(regular.code, "ST-2", supply, method="pressure", by=BENCH.sign_in))
        past.later(4).write(
            "refill.wait", bottle=regular.code, until=past.days.at(past.days.today, "08:00").isoformat(), note="chill overnight"
        )
