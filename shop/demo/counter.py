"""What must be there at once: the premises, three bottles on the counter, a supply bottle to fill from."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from shop.demo import names
from shop.demo.cylinders import Spec
from shop.demo.past import Past
from shop.demo.people import BOSS, DESK
from shop.demo.premises import CHILLS, PLACES
from shop.demo.steps import Step
from shop.physics.units import parse_temperature

ON_THE_COUNTER = ("T-0101", "T-0102", "T-0103")
FULL_SUPPLY_G = 27_100
# Days: a calibration of the floor scale has run out, one of the second bench soon does.
_CALIBRATED_AGO = 760
_CALIBRATION_DUE_IN = {"BENCH-1": 210, "BENCH-2": 18, "FLOOR": -12}
# What the shop decided beyond its country's rules.
POLICY: dict[str, Any] = {
    "month_rule": None, "visual_interval_months": 36, "disc_interval_months": 60, "own_limit_per_mille": None, "overlays": [],
}  # fmt: skip


def premises(past: Past) -> Iterator[Step]:
    """Give the places, scales, stations and settings, and the customers whose bottles stand on the counter."""
    past.on(past.days.beginning, "08:00")
    past.write("policy.decide", by=BOSS.sign_in, **POLICY)
    for code, name, kind, outdoors in PLACES:
        past.write("place.add", by=BOSS.sign_in, code=code, name=name, kind=kind, outdoors=outdoors, **_cold(past, code))
    for scale in past.scales.values():
        past.write(
            "scale.add", by=BOSS.sign_in, calibrated_on=past.days.ago(_CALIBRATED_AGO).isoformat(),
            calibration_due=past.days.ago(-_CALIBRATION_DUE_IN[scale.code]).isoformat(), **scale.values(),
        )
    for station in past.stations.values():
        past.write("station.add", by=BOSS.sign_in, **station.values())
    yield from past.drain()


def at_the_counter(past: Past) -> Iterator[Step]:
    """Give the three bottles that wait on the counter now."""
    interval = past.kit.interval_months
    fillable = Spec(ON_THE_COUNTER[0], owner="Amara Delacroix-Nwosu", since_days=410, made_ago=interval + 46,
                    tests_ago=(interval - 14,), visual_ago=15, race_grade=True)  # fmt: skip
    due = Spec(ON_THE_COUNTER[1], size="12", owner="Fergus MacAldrith", since_days=300, made_ago=interval, visual_ago=20, maker=1)
    refused = Spec(ON_THE_COUNTER[2], size="15", owner="Giulia Sartorell", since_days=390, made_ago=interval + 65,
                   tests_ago=(interval + 2,), visual_ago=14, maker=2)  # fmt: skip
    for spec in (fillable, due, refused):
        customer(past, spec.owner)
        past.ago(spec.since_days, "09:40").register(spec, net_g=0.62 * spec.capacity_ml * 0.66)
        past.later(10).check_in(spec.code, brought_by=spec.owner, wanted="weigh")
        past.later(5).weigh(spec.code)
        past.later(20).hand_over(spec.code, to=spec.owner)
        past.net_g[spec.code] *= 0.35
        yield from past.drain()
    for number, (spec, wanted) in enumerate(((fillable, "fill to its limit; the customer waits"),
                                             (due, "fill; its test is due"), (refused, "fill"))):  # fmt: skip
        past.ago(1, "16:20").later(12 * number)
        promised = past.days.at(past.days.today, "17:00" if number else "10:00")
        past.check_in(spec.code, brought_by=spec.owner, wanted=wanted, promised=promised)
        past.later(4).weigh(spec.code)
        yield from past.drain()


def ready_supply(past: Past) -> Iterator[Step]:
    """Give two full supply bottles of the supplier, one of them on the first station, and two nearly empty ones."""
    for number, code in enumerate(("S-01", "S-02")):
        past.ago(4, "08:20").later(10 * number)
        deliver(past, code, ticket=f"{9_100 + number}", seen_before=False)
    past.ago(1, "15:05").write("supply.connect", station="ST-1", bottle="S-01")
    own = Spec("S-03", size="60", wall="steel", use="supply", since_days=500, made_ago=70, tests_ago=(30,), note="The shop's own.")
    past.ago(own.since_days, "11:00").register(own, net_g=6_900)
    past.later(10).check_in(own.code, brought_by="bought second-hand", place="CAGE")
    past.ago(20, "14:00").weigh(own.code, "FLOOR", step="stored")
    past.later(15).write("supply.connect", station="ST-2", bottle=own.code)
    left = Spec("S-04", size="60", wall="steel", owner="supplier", use="supply", since_days=46, made_ago=81, tests_ago=(26,),
                maker=1, note="Left with us by a customer; the supplier fetches it.")  # fmt: skip
    past.ago(left.since_days, "12:10").register(left, net_g=6_300)
    past.later(5).check_in(left.code, brought_by="Pellworth Hauling & Racing", place="CAGE", wanted="the supplier fetches it")
    past.later(6).weigh(left.code, "FLOOR")
    yield from past.drain()


def everybody_else(past: Past) -> Iterator[Step]:
    """Give the customers who aren't in the book yet, and all cars."""
    for someone in names.CUSTOMERS:
        customer(past, someone.name)
    for car in names.CARS:
        past.on(past.days.beginning, "12:00").write(
            "car.add", by=DESK.sign_in, number=car.number, car_class=car.car_class, description=car.description,
            engine=car.engine, owner=car.owner,
        )  # fmt: skip
    yield from past.drain()


def _cold(past: Past, code: str) -> dict[str, Any]:
    """How cold a place gets and how many bottles it takes, for the places that chill."""
    if code not in CHILLS:
        return {}
    celsius, at_once = CHILLS[code]
    typed = past.kit.temperature(celsius + 273.15)
    return {
        "coldest_mk": parse_temperature(typed, default_unit="°C").stored, "coldest_typed": typed, "takes_at_once": at_once,
    }  # fmt: skip


def customer(past: Past, name: str) -> None:
    """Write a customer into the book once, with their word on being filled for."""
    if name in past.known:
        return
    past.known.add(name)
    someone = next(one for one in names.CUSTOMERS if one.name == name)
    past.on(past.days.beginning, "10:00")
    past.write("customer.add", by=DESK.sign_in, name=someone.name, phone=someone.phone, email=someone.email, note=someone.note)
    if someone.consent is not None:
        past.later(1).write("consent", by=DESK.sign_in, name=someone.name, given=someone.consent)


def deliver(past: Past, code: str, *, ticket: str, seen_before: bool) -> None:
    """Write that the supplier brought a full bottle: its ticket beside our own weighing."""
    if not seen_before:
        month = past.days.month
        age = 26 + sum(map(ord, code)) % 10
        spec = Spec(code, size="60", wall="steel", owner="supplier", use="supply", made_ago=age + 60, tests_ago=(age,),
                    maker=month % 3, race_grade=None)  # fmt: skip
        past.register(spec)
        past.later(5)
    label_g = 27_000 if past.kit.metric else 27_216
    past.net_g[code] = label_g * past.rng.uniform(0.986, 0.998)
    past.write(
        "deliver", bottle=code, ticket=f"H-{ticket}", ticket_net="27.0 kg" if past.kit.metric else "60 lb",
        lot=f"L{past.rng.randrange(100, 999)}", place="CAGE", scale="FLOOR", gross=past.reading(code, "FLOOR"),
    )  # fmt: skip
