"""A small filling shop: a station with its scale and hose, supply bottles on it, bottles to fill.

Capacities, walls and tares are those of common sizes; every figure is invented.
"""

from __future__ import annotations

import uuid
from dataclasses import dataclass, field, replace
from datetime import timedelta
from typing import Any

from bottles.models import Account, Bottle, Refill, Scale, ScaleCheck, Station, Supply, Tare, TarePart, Weighing
from bottles.selectors.judging import judge_bottle
from bottles.services.forecasting import Answer, Asked, Readings, work_out
from bottles.services.refill_steps import Weight
from bottles.services.refilling import Opened, Opening, look_items, open_refill
from bottles.services.standing import restate
from bottles.services.weighing import weigh
from shop.base import clock
from shop.base.models import Shop
from shop.physics.units import Entry, parse_mass, parse_pressure, parse_temperature
from tests import factories

AMBIENT_PA = 99_182.0  # 180 m above the sea
TARE_G = 6_420
SUPPLY_TARE_G = 33_500
SUPPLY_NET_G = 15_000
LIMIT_G = 4_614  # 68 % of 6.8 L of water by 49 CFR, rounded down: see tests/physics/test_filling.py


def key() -> uuid.UUID:
    return uuid.uuid4()


def mass(text: str) -> Entry:
    return parse_mass(text, default_unit="kg")


def grams(value: int) -> Entry:
    return mass(f"{value} g")


def degrees(text: str) -> Entry:
    return parse_temperature(text, default_unit="°C")


def gauge(text: str) -> Entry:
    return parse_pressure(text, default_unit="bar", ambient_pa=AMBIENT_PA)


def holds(bottle: Bottle) -> int:
    """What the books say is in a bottle now."""
    return Account.objects.filter(bottle=bottle).values_list("balance_g", flat=True).first() or 0


def balance(kind: str) -> int:
    """The balance of one of the shop's own accounts."""
    return Account.objects.filter(kind=kind).values_list("balance_g", flat=True).first() or 0


@dataclass
class Works:
    """The shop, ready to fill; each part can be asked for by name."""

    shop: Shop
    person: Any
    scale: Scale = field(init=False)
    station: Station = field(init=False)
    supply: Supply = field(init=False)
    bottle: Bottle = field(init=False)

    def __post_init__(self) -> None:
        self.scale = factories.ScaleFactory(name="scale B")
        self.station = self.make_station()
        self.supply = self.connected("S-07")
        self.bottle = self.bottle_to_fill("T-0412")
        self.check()

    def make_station(self, **changes: Any) -> Station:
        values = {
            "code": "ST1", "name": "Station 1", "scale": self.scale, "hose_length_um": 1_500_000, "hose_length_typed": "1.5 m",
            "hose_bore_um": 4_800, "hose_bore_typed": "4.8 mm",
        }  # fmt: skip
        return Station.objects.create(**values | changes)

    def check(self, scale: Scale | None = None) -> ScaleCheck:
        """The day's check of a scale."""
        return ScaleCheck.objects.create(
            act=factories.ActFactory(), scale=scale or self.scale, known_g=10_000, known_typed="10 kg", read_g=10_000,
            read_typed="10 kg", passed=True, happened_at=clock.now(),
        )  # fmt: skip

    def connected(self, code: str, *, net_g: int | None = SUPPLY_NET_G, **changes: Any) -> Supply:
        """A supply bottle, weighed, on the station; net_g None: never weighed."""
        bottle = factories.BottleFactory(
            **{
                "code": code, "mark": "DOT-3AA2015", "capacity_ml": 29_000, "wall": "steel", "dip_tube": "dip", "use": "supply",
            } | changes
        )  # fmt: skip
        self._settled(bottle, SUPPLY_TARE_G, (("bottle", 32_000), ("valve", 1_500)))
        if net_g is not None:
            self.weigh(bottle, SUPPLY_TARE_G + net_g)
        return Supply.objects.create(station=self.station, bottle=bottle)

    def bottle_to_fill(self, code: str, *, net_g: int = 300, **changes: Any) -> Bottle:
        """A bottle in date, weighed here, allowed to be filled after the look."""
        bottle = factories.BottleFactory(**{"code": code, "wall": "aluminium", "dip_tube": "dip", "last_held": "nitrous"} | changes)
        self._settled(bottle, TARE_G, (("bottle", 5_900), ("valve", 520)))
        self.weigh(bottle, TARE_G + net_g)
        return bottle

    def _settled(self, bottle: Bottle, total_g: int, parts: tuple[tuple[str, int], ...]) -> None:
        factories.owned(bottle)
        factories.placed(bottle, "in", place=factories.PlaceFactory())
        for kind, year in (("made", 2020), ("test", 2025)):
            factories.StampFactory(bottle=bottle, kind=kind, year=year, month=6, typed=f"06/{year}")
        tare = Tare.objects.create(
            act=factories.ActFactory(), bottle=bottle, since=factories.THEN, total_g=total_g, error_g=10, basis="weighed"
        )
        for thing, weight in parts:
            TarePart.objects.create(act=factories.ActFactory(), tare=tare, thing=thing, grams=weight, typed=f"{weight} g")
        restate(bottle)

    def weigh(self, bottle: Bottle, gross_g: int, **more: Any) -> Weighing:
        """Weigh a bottle as any is weighed in the shop, an hour ago."""
        happened_at = more.pop("happened_at", clock.now() - timedelta(hours=1))
        return weigh(
            key=key(), person=self.person, bottle=bottle, scale=self.scale, gross=grams(gross_g), happened_at=happened_at, **more
        )

    # --- a refill ---------------------------------------------------------------------------------

    def readings(self, **changes: Any) -> Readings:
        """Sound readings at 20 °C: 49.5 bar is what nitrous oxide shows there."""
        sound = Readings(
            supply_temperature=degrees("20 °C"), bottle_temperature=degrees("-12 °C"), gauge=gauge("49.5 bar"),
            bottle_weight=grams(TARE_G + 300),
        )  # fmt: skip
        return replace(sound, **changes)

    def asked(self, bottle: Bottle | None = None, supply: Supply | None = None) -> Asked:
        bottle, supply = bottle or self.bottle, supply or self.supply
        limits = [judge_bottle(each, shop=self.shop).limit.grams for each in (bottle, supply.bottle)]
        fresh = Supply.objects.select_related("station", "bottle").get(pk=supply.pk)
        return Asked(bottle, fresh, limits[0] or 0, limits[1], self.shop)

    def forecast(self, bottle: Bottle | None = None, supply: Supply | None = None, **changes: Any) -> Answer:
        return work_out(self.asked(bottle, supply), self.readings(**changes))

    def opening(self, bottle: Bottle | None = None, supply: Supply | None = None, **changes: Any) -> Opening:
        """A whole submission; give readings by name, else what an Opening takes."""
        own = {name: changes.pop(name) for name in list(changes) if name in Opening.__dataclass_fields__}
        asked = self.asked(bottle, supply)
        answer = work_out(asked, self.readings(**changes))
        look: dict[str, bool | None] = {item.code: True for item in look_items(asked.bottle, self.shop)}
        return Opening(**{"asked": asked, "answer": answer, "method": "chilled", "look": look} | own)

    def open(self, bottle: Bottle | None = None, supply: Supply | None = None, **changes: Any) -> Refill:
        """Open a refill; it must be opened."""
        found: Opened = open_refill(key=key(), person=self.person, opening=self.opening(bottle, supply, **changes))
        assert found.refill is not None
        return found.refill

    def weight(self, net_g: int, *, line_off: bool = True, **more: Any) -> Weight:
        """What the scale says of the bottle being filled, holding so much."""
        return Weight(gross=grams(TARE_G + net_g), line_off=line_off, **more)
