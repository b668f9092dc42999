"""A bottle for each state that the rules know, so that every answer can be looked at."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

from shop.demo.counter import customer
from shop.demo.cylinders import Spec
from shop.demo.filling import limit_of
from shop.demo.past import Past
from shop.demo.steps import Step
from shop.physics.units import parse_mass

_NOTED = (
    # code, owner, condition, place, note
    ("T-0209", "Katrin Osterlohe", "dent", "HOLD", "Dent below the shoulder, dropped in the paddock."),
    ("T-0210", "Lindiwe Mokwayo", "leak", "CAGE-Q", "Bubbles at the valve stem."),
    ("T-0211", "Mateo Quintarosa", "heat", "HOLD", "Label scorched after an engine fire."),
    ("T-0212", "Nils Fagerholt", "dirty outlet", "RACK-A", "Grease at the outlet."),
    ("T-0213", "Oyelaran Adebisko", "stamp illegible", "RACK-A", "Stamp under the bracket worn away."),
    ("T-0228", "Priya Venkatamma", "without pressure", "RACK-A", "Came in with its valve open."),
)


def by_their_dates(past: Past) -> Iterator[Step]:
    """Give bottles that differ by what is stamped on them."""
    full = past.kit.interval_months
    _stands(past, Spec("T-0201", owner="Bartek Szelmowski", made_ago=full - 20, visual_ago=26), filled=0.97, days=2)
    _stands(past, Spec("T-0202", size="5", owner="Chiara Montefalk", made_ago=full, visual_ago=26, maker=1), filled=0.05, days=3,
            wanted="test")  # fmt: skip
    _stands(past, Spec("T-0203", owner="Dmitri Averolsky", made_ago=full + 40, tests_ago=(full + 3,), visual_ago=26), filled=None,
            days=5, wanted="test")  # fmt: skip
    _stands(past, Spec("T-0204", size="15", owner="Elif Karadursun", made_ago=full + 2, visual_ago=28), filled=0.95, days=4)
    _stands(past, Spec("T-0205", wall="composite", owner="Hiroto Kanemizu", since_days=300, made_ago=182, tests_ago=(20,),
                       visual_ago=20, end_in=-2, confirmed=("service-life-over",)), filled=0.3, days=6)  # fmt: skip
    _stands(past, Spec("T-0206", wall="composite", owner="Ioana Petreval", since_days=300, made_ago=130, tests_ago=(18,),
                       visual_ago=18, end_in=50), filled=0.4, days=9)  # fmt: skip
    star = past.kit.country != "ADR"
    _stands(past, Spec("T-0207", size="20", wall="steel", owner="Jamal Whitterby", made_ago=170, tests_ago=(32,), star=star,
                       visual_ago=26), filled=0.5, days=7)  # fmt: skip
    _stands(past, Spec("T-0229", owner="Sefa Taumaloto", made_ago=full - 6, visual_ago=41, maker=1), filled=0.2, days=8)
    _stands(past, Spec("T-0230", owner="Tereza Novotmyer", made_ago=full - 12, visual_ago=26, disc_ago=70), filled=0.3, days=8)
    _stands(past, Spec("T-0231", owner="Umar Farouqi-Lund"), filled=0.6, days=10)
    _stands(past, Spec("T-0232", owner="Viktor Dragomesh", made_ago=90, tests_ago=(40,), year_only=True, visual_ago=26), filled=0.6,
            days=12)  # fmt: skip
    _stands(past, Spec("T-0240", wall="steel", owner="Wen Xiaolanti", made_ago=100, tests_ago=(36,), plus=True, visual_ago=26),
            filled=0.45, days=14)  # fmt: skip
    yield from past.drain()


def by_their_marks(past: Past) -> Iterator[Step]:
    """Give bottles that may not be filled for what is stamped as their mark, or isn't."""
    kit, full = past.kit, past.kit.interval_months
    low = "test-pressure-too-low" if kit.country == "ADR" else "service-pressure-too-low"
    row = "not-refillable" if kit.country == "ADR" else "not-on-the-row"
    weak_wall = "steel" if kit.country == "US" else "aluminium"
    dated: dict[str, Any] = {"made_ago": full - 18, "visual_ago": 26}
    marked = (
        Spec("T-0214", owner="Ysolde Brannagh", serial="", **dated),
        Spec("T-0215", owner="Zuri Achterholm", mark=kit.unknown, confirmed=("mark-unknown",), **dated),
        Spec("T-0216", owner="Sefa Taumaloto", mark=kit.foreign, confirmed=("foreign-mark",), **dated),
        Spec("T-0217", size="2.5", wall="steel", owner="Tereza Novotmyer", mark=kit.throwaway, confirmed=("not-refillable",),
             **dated),
        Spec("T-0218", wall=weak_wall, owner="Umar Farouqi-Lund", mark=kit.weak, confirmed=(low,), **dated),
        Spec("T-0219", wall="steel", owner="Viktor Dragomesh", mark=kit.low_row, confirmed=(row,), **dated),
        Spec("T-0235", owner="Wen Xiaolanti", alloy="6351-T6", made_ago=400, tests_ago=(full - 9,), visual_ago=26),
    )
    for number, spec in enumerate(marked):
        _stands(past, spec, filled=0.2 + 0.06 * number, days=3 + 4 * number)
    if kit.country == "US":
        _stands(past, Spec("T-0241", wall="steel", owner="Ysolde Brannagh", mark="DOT-3HT1850", made_ago=150, tests_ago=(29,),
                           visual_ago=26, confirmed=("aircraft-only",)), filled=0.1, days=30)  # fmt: skip
        _under_permit(past, Spec("T-0239", mark="DOT-SP 15431-1800", permit="DOT-SP 15431", permit_lists=False, permit_days=400))
    if kit.country == "CA":
        _under_permit(past, Spec("T-0239", permit="TC-SU 7541", permit_lists=True, permit_days=-70))
    yield from past.drain()


def by_their_measures(past: Past) -> Iterator[Step]:
    """Give bottles whose tare, capacity, contents or owner's word decides."""
    full = past.kit.interval_months
    dated: dict[str, Any] = {"made_ago": full - 16, "visual_ago": 27}
    _stands(past, Spec("T-0220", owner="Amara Delacroix-Nwosu", tare=False, **dated), filled=0.4, days=6, weigh=False)
    _stands(past, Spec("T-0221", owner="Bartek Szelmowski", capacity=False, labelled=False, **dated), filled=0.4, days=6)
    _stands(past, Spec("T-0222", owner="Chiara Montefalk", inferred=True, **dated), filled=0.4, days=6)
    _stands(past, Spec("T-0223", owner="Quentin Lavoisel", **dated), filled=0.3, days=1, wanted="fill")
    _stands(past, Spec("T-0224", owner="Rosalind Thackeraw", **dated), filled=0.5, days=11)
    _stands(past, Spec("T-0234", owner="Dmitri Averolsky", last_held="", **dated), filled=0.5, days=1, weigh=False, wanted="fill")
    at_limit = Spec("T-0225", owner="Elif Karadursun", **dated)
    _stands(past, replace(at_limit, bottle_typed=_exactly(past, at_limit)), filled=1.0, days=2, exact=True)
    _stands(past, Spec("T-0226", owner="Fergus MacAldrith", **dated), filled=1.045, days=1, place="CAGE-Q")
    _stands(past, Spec("T-0249", owner="Hiroto Kanemizu", last_held="other", **dated), filled=None, days=2, place="HOLD")
    _stands(past, Spec("T-0250", owner="Ioana Petreval", last_held="new", since_days=9, made_ago=3), filled=None, days=9,
            wanted="fill")  # fmt: skip
    _stands(past, Spec("T-0251", owner="Jamal Whitterby", own_limit_g=4_000, **dated), filled=0.5, days=5)
    _stands(past, Spec("T-0252", owner="Katrin Osterlohe", last_held="", **dated), filled=None, days=5)
    elsewhere = Spec("T-0227", owner="Giulia Sartorell", **dated)
    _stands(past, elsewhere, filled=0.2, days=60)
    past.ago(59, "10:00").hand_over(elsewhere.code, to=elsewhere.owner)
    past.net_g[elsewhere.code] += 2_300
    past.ago(13, "11:00").check_in(elsewhere.code, brought_by=elsewhere.owner, wanted="find out what is in it", place="HOLD")
    past.later(6).weigh(elsewhere.code)
    yield from past.drain()


def by_what_was_noted(past: Past) -> Iterator[Step]:
    """Give bottles on which something was seen."""
    full = past.kit.interval_months
    for number, (code, owner, condition, place, note) in enumerate(_NOTED):
        spec = Spec(code, owner=owner, made_ago=full - 11, visual_ago=28, maker=number % 3)
        empty = condition == "without pressure"
        _stands(past, spec, filled=None if empty else 0.3 + 0.1 * (number % 5), days=3 + number, place=place)
        past.later(15).write("condition.note", bottle=code, condition=condition, note=note)
    condemned = Spec("T-0208", size="20", wall="steel", made_ago=280, tests_ago=(full + 30,), visual_ago=40, use="stock")
    _stands(past, condemned, filled=None, days=90, place="HOLD")
    past.later(60).write("condition.note", bottle=condemned.code, condition="condemned", note="Failed its hydrostatic test.")
    gone = Spec("T-0233", made_ago=full + 100, tests_ago=(full + 20,), use="stock", since_days=680)
    past.ago(gone.since_days, "13:00").register(gone)
    past.ago(200, "13:00").write("bottle.retire", bottle=gone.code, reason="Drilled through and scrapped after it was condemned.")
    healed = Spec("T-0247", owner="Pellworth Hauling & Racing", made_ago=full - 8, visual_ago=28)
    _stands(past, healed, filled=0.6, days=33, place="HOLD")
    past.later(10).write("condition.note", bottle=healed.code, condition="corrosion", note="White bloom under the bracket ring.")
    past.ago(25, "15:00").write(
        "condition.end", bottle=healed.code, condition="corrosion", how="Cleaned and looked at again: stain only."
    )
    past.later(5).move(healed.code, "RACK-A")
    yield from past.drain()


def _stands(
    past: Past, spec: Spec, *, filled: float | None, days: int, place: str = "", wanted: str = "", weigh: bool = True,
    exact: bool = False,
) -> None:  # fmt: skip
    """Register a bottle, and have it come in so many days ago; `filled` is a share of its limit, None empty."""
    if spec.owner not in ("shop", "supplier"):
        customer(past, spec.owner)
    limit = limit_of(spec, past.kit, past.days.today) or round(0.6 * spec.capacity_ml)
    past.ago(max(spec.since_days, days), "09:30").register(spec, net_g=limit * (filled or 0.0))
    brought_by = "the shop" if spec.owner == "shop" else spec.owner
    past.ago(days, "10:20").later(7 * (sum(map(ord, spec.code)) % 12)).check_in(spec.code, brought_by=brought_by, wanted=wanted)
    if weigh:
        scale = past.scales["BENCH-1"]
        gross = ""
        if exact:
            gross = scale.shows(past.tare_g(spec.code) + limit)
        elif filled is None:
            gross = scale.shows(past.tare_g(spec.code) - 0.6 * scale.resolution_g)
        past.later(4).weigh(spec.code, gross=gross)
    past.later(6).move(spec.code, place or ("RACK-B" if spec.owner == "shop" else "RACK-A"))


def _under_permit(past: Past, spec: Spec) -> None:
    made = replace(spec, wall="composite", owner="Zuri Achterholm", made_ago=70, tests_ago=(28,), visual_ago=26, end_in=110)
    _stands(past, made, filled=0.3, days=21)


def _exactly(past: Past, spec: Spec) -> str:
    """Return the bare bottle's weight for which a reading of the scale is the limit to the gram."""
    scale = past.scales["BENCH-1"]
    limit = limit_of(spec, past.kit, past.days.today) or 0
    others = sum(parse_mass(text, default_unit="kg").stored for thing, text in spec.parts(past.kit) if thing != "bottle")
    reading = parse_mass(scale.shows(spec.wall_g() + others + limit), default_unit="kg").stored
    return f"{reading - limit - others} g"
