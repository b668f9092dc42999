"""May it be filled, may it be emptied: every rule by itself, and unknowns all together."""

from __future__ import annotations

import datetime
import json
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.rules.conditions import CONDITIONS
from bottles.rules.edition_files import edition_on, editions
from bottles.rules.facts import Condition, Facts, Permit, kept_form
from bottles.rules.fitness import Judgement, judge
from bottles.rules.marks import read_mark
from bottles.rules.policy import Overlay, Policy
from bottles.rules.stamps import read_stamp
from shop.rules import month as months
from tests.bottles.rules.tables import rows
from tests.bottles.rules.test_requalification import DAYS, MARKS, MONTHS, policies, stamps

ON = datetime.date(2026, 3, 10)
US = edition_on("US", ON)
ADR = edition_on("ADR", ON)
assert US is not None
assert ADR is not None


def stamp(text: str):
    return read_stamp(text, year_first=False, today=ON)


GOOD = Facts(
    mark=read_mark("DOT-3AL1800"),
    made=stamp("06/2016"),
    tests=(stamp("06/2021"),),
    marks_legible=True,
    capacity_ml=6800,
    tare_known=True,
    net_g=1000,
    net_plus_minus_g=20,
    contents="nitrous oxide",
    owner="shop",
    condemned=False,
    conditions=(),
    pressure_kept=True,
    look_done=True,
    in_open_refill=False,
)
PERMITTED = {"mark": read_mark("DOT-SP 10915-4500"), "service_life_end": months.from_ym(2031, 6)}
STAR = {"mark": read_mark("DOT-3AA2015"), "tests": (stamp("03/2018*"),), "made": stamp("03/2008")}
# 6,800 mL at 68 % by the 60 °F water of 49 CFR: worked out below.
LIMIT = 4614


def listed(permit: Permit) -> dict[str, object]:
    return {**PERMITTED, "permit": permit}


CHANGES: dict[str, dict[str, object]] = {
    "nothing": {},
    "condemned": {"condemned": True},
    "condemned unknown": {"condemned": None},
    "service life over": {"service_life_end": months.from_ym(2026, 2)},
    "service life last month": {"service_life_end": months.from_ym(2026, 3)},
    "a word nobody listed": {"conditions": (Condition("chewed by a dog"),)},
    "conditions unknown": {"conditions": None},
    "contents unknown noted": {"conditions": (Condition("contents unknown"),)},
    "contents unknown": {"contents": "unknown"},
    "contents other": {"contents": "other"},
    "contents not given": {"contents": None},
    "new and clean": {"contents": "nothing yet", "net_g": 0},
    "overdue": {"tests": (stamp("02/2021"),)},
    "due this month": {"tests": (stamp("03/2021"),)},
    "due this month strict": {"tests": (stamp("03/2021"),), "policy": Policy(month_rule="from first day")},
    "visual overdue": {"policy": Policy(visual_interval_months=24), "visual": months.from_ym(2024, 2)},
    "visual in its month": {"policy": Policy(visual_interval_months=24), "visual": months.from_ym(2024, 3)},
    "disc overdue": {"policy": Policy(disc_interval_months=60), "disc": months.from_ym(2021, 2)},
    "consent refused": {"owner": "customer", "consent": False},
    "consent not given": {"owner": "customer", "consent": None},
    "customer agrees": {"owner": "customer", "consent": True},
    "owner not given": {"owner": None},
    "supplier": {"owner": "supplier"},
    "at limit": {"net_g": LIMIT},
    "over limit": {"net_g": LIMIT + 1},
    "within plus minus": {"net_g": LIMIT - 20},
    "never weighed": {"net_g": None},
    "empty by the scale": {"net_g": 0},
    "not refillable": {"mark": read_mark("DOT-39")},
    "low pressure": {"mark": read_mark("DOT-4BA240")},
    "foreign": {"mark": read_mark("pi ISO 7866 PH250")},
    "aircraft": {"mark": read_mark("DOT-3HT1850")},
    "mark unknown": {"mark": read_mark("XYZ-1")},
    "mark not read": {"mark": None},
    "pressure too low": {"mark": read_mark("DOT-3AL1500")},
    "pressure not read": {"mark": read_mark("DOT-3AL")},
    "illegible": {"marks_legible": False},
    "legibility not given": {"marks_legible": None},
    "no stamp read": {"tests": None, "made": None},
    "no tare": {"tare_known": False},
    "tare not given": {"tare_known": None},
    "no capacity": {"capacity_ml": None},
    "permit not known": {"mark": read_mark("DOT-SP 10915-4500")},
    "permit without nitrous": listed(Permit(lists_nitrous=False, expires=datetime.date(2027, 1, 1))),
    "permit in order": listed(Permit(lists_nitrous=True, expires=datetime.date(2026, 3, 10))),
    "permit expired": listed(Permit(lists_nitrous=True, expires=datetime.date(2026, 3, 9))),
    "open refill": {"in_open_refill": True},
    "open refill not given": {"in_open_refill": None},
    "found open": {"pressure_kept": False},
    "found open and purged": {"pressure_kept": False, "dried_and_purged": True},
    "pressure kept not given": {"pressure_kept": None},
    "look owed": {"look_done": None},
    "star kept with checks": {**STAR, "star_kept": True, "star_check_done": True},
    "star kept no checks": {**STAR, "star_kept": True},
    "star unknown": {**STAR, "star_check_done": True},
    "plus": {"tests": (stamp("06/2021+"),)},
    "alloy 6351": {"alloy_6351": True},
}
CASES = rows("fitness_cases.csv")


def judged(change: str) -> Judgement:
    named = dict(CHANGES.get(change, {"conditions": (Condition(change),)}))
    policy = named.pop("policy", Policy())
    return judge(replace(GOOD, **named), US, policy, ON)


@pytest.mark.parametrize("case", CASES, ids=lambda case: case["change"])
def test_one_thing_changed(case: dict[str, str]) -> None:
    assert case["change"] in CHANGES or case["change"] in CONDITIONS
    found = judged(case["change"])
    assert (found.may_be_filled, found.may_be_emptied) == (case["fill"], case["empty"])
    assert case["code"] in {reason.code for reason in found.reasons}
    assert case["source"]


def test_every_change_stands_in_the_table() -> None:
    assert set(CHANGES) <= {case["change"] for case in CASES}


def test_refusing_reasons_come_first_each_with_what_it_rests_on() -> None:
    found = judge(replace(GOOD, condemned=True, look_done=None, tests=(stamp("02/2021+"),)), US, Policy(), ON)
    severities = [reason.severity for reason in found.reasons]
    assert severities == sorted(severities, key=["refuses", "unknown", "first", "warns", "explains"].index)
    for reason in found.reasons:
        assert reason.sentence
        assert reason.citation
        if reason.severity in ("refuses", "first"):
            assert reason.next_step, reason.code


@pytest.mark.parametrize(
    ("mark", "edition", "capacity", "grams", "worked"),
    [
        # 6,800 mL / 16.387064 mL/in³ / 27.737 in³/lb × 453.59237 g/lb × 0.68 = 4,614.5 g
        ("DOT-3AL1800", "US", 6800, 4614, "49 CFR 173.304a(a)(2), Note 1 (memory)"),
        ("DOT-3AA2400", "US", 6800, 4614, "68 % whatever the higher service pressure"),
        # 6,800 mL × 0.9991 g/mL × 0.68 = 4,619.8 g
        ("ISO 7866 PH180", "ADR", 6800, 4619, "P200 table 2 (read)"),
        # 10,000 mL × 0.9991 × 0.68 / 0.74 / 0.75
        ("ISO 7866 PH224", "ADR", 10000, 6793, "P200 table 2 (read)"),
        ("ISO 7866 PH225", "ADR", 10000, 7393, "P200 table 2 (read)"),
        ("ISO 7866 PH250", "ADR", 10000, 7493, "P200 table 2 (read)"),
        ("ISO 7866 PH300", "ADR", 10000, 7493, "P200 table 2 (read)"),
        ("ISO 7866 PH179", "ADR", 10000, None, "P200: 180 bar at least"),
        ("ISO 7866", "ADR", 10000, None, "test pressure not read"),
        ("DOT-4BA240", "US", 10000, None, "not on the row"),
        ("DOT-3AL1800", "ADR", 10000, None, "no row"),
        ("TC-3ALM124", "CA", 6800, 4614, "CSA B340 (memory)"),
    ],
)
def test_the_limit_by_water_capacity(mark: str, edition: str, capacity: int, grams: int | None, worked: str) -> None:
    rules = edition_on(edition, ON)
    assert rules is not None
    facts = replace(GOOD, mark=read_mark(mark), capacity_ml=capacity, charge_g=10**6)
    limit = judge(facts, rules, Policy(), ON).limit
    assert limit.grams == grams, worked
    assert limit.binds == (None if grams is None else "filling density")


@pytest.mark.parametrize(
    ("change", "policy", "grams", "binds"),
    [
        ({"charge_g": 4536}, Policy(), 4536, "charge"),
        ({"charge_g": 4700}, Policy(), 4614, "filling density"),
        ({"own_limit_g": 4000, "charge_g": 4536}, Policy(), 4000, "own"),
        # 4,614 g × 0.95 = 4,383.3 g, rounded down
        ({"charge_g": 4536}, Policy(own_limit_per_mille=950), 4383, "shop"),
        ({"permit": Permit(True, None, 4100)}, Policy(), 4100, "permit"),
    ],
)
def test_the_least_figure_binds(change: dict[str, object], policy: Policy, grams: int, binds: str) -> None:
    limit = judge(replace(GOOD, **change), US, policy, ON).limit
    assert (limit.grams, limit.binds) == (grams, binds)
    assert limit.grams == min(each.grams for each in limit.candidates)
    assert all(each.origin for each in limit.candidates)


def test_a_label_alone_gives_no_limit() -> None:
    limit = judge(replace(GOOD, capacity_ml=None, charge_g=4536), US, Policy(), ON).limit
    assert (limit.grams, [each.code for each in limit.candidates]) == (None, ["charge"])


def test_a_script_may_leave_out_what_the_counter_must_know() -> None:
    given_facts = Facts(mark=read_mark("DOT-3AL1800"), tests=(stamp("06/2021"),))
    counter = judge(given_facts, US, Policy(), ON)
    script = judge(given_facts, US, Policy(), ON, at_counter=False)
    assert counter.may_be_filled == "no"
    assert not counter.fillable_on_what_is_given
    assert script.may_be_filled == "only after"
    assert script.fillable_on_what_is_given
    assert {"tare", "capacity", "net", "contents", "look"} <= set(script.not_judged)


def test_without_any_stamp_a_script_is_told_that_it_cannot_be_judged() -> None:
    found = judge(Facts(mark=read_mark("DOT-3AL1800")), US, Policy(), ON, at_counter=False)
    assert found.status == "cannot be judged"
    assert not found.fillable_on_what_is_given


def test_only_the_look_is_left() -> None:
    assert judge(replace(GOOD, look_done=None), US, Policy(), ON).only_the_look_is_left
    assert not judge(replace(GOOD, look_done=None, net_g=None), US, Policy(), ON).only_the_look_is_left
    assert not judge(GOOD, US, Policy(), ON).only_the_look_is_left


DECIDING = [
    "mark",
    "marks_legible",
    "capacity_ml",
    "tare_known",
    "net_g",
    "contents",
    "owner",
    "condemned",
    "conditions",
    "pressure_kept",
    "look_done",
    "in_open_refill",
]


@given(st.sets(st.sampled_from(DECIDING), min_size=1), st.booleans(), DAYS)
def test_an_unknown_never_becomes_a_yes(left_out: set[str], at_counter: bool, on: datetime.date) -> None:
    facts = replace(GOOD, **dict.fromkeys(left_out))
    assert judge(facts, US, Policy(), on, at_counter=at_counter).may_be_filled != "yes"
    if left_out & {"contents", "condemned", "conditions", "in_open_refill"}:
        assert judge(facts, US, Policy(), on, at_counter=at_counter).may_be_emptied != "yes"


def maybe(strategy: st.SearchStrategy[object]) -> st.SearchStrategy[object]:
    return st.none() | strategy


PERMITS = st.builds(Permit, maybe(st.booleans()), maybe(DAYS), maybe(st.integers(1, 9000)), maybe(st.integers(1, 15)))
CONDITION = st.builds(Condition, st.sampled_from([*CONDITIONS, "something else"]), maybe(DAYS))
ANY_FACTS = st.builds(
    Facts,
    mark=maybe(st.sampled_from([*MARKS, "XYZ", "foreign", "pi", "ISO 7866", "DOT-3AL"]).map(read_mark)),
    wall=maybe(st.sampled_from(["steel", "aluminium", "composite"])),
    made=maybe(stamps()),
    tests=maybe(st.lists(stamps(), max_size=2).map(tuple)),
    star_kept=maybe(st.booleans()),
    service_life_end=maybe(MONTHS),
    permit=maybe(PERMITS),
    marks_legible=maybe(st.booleans()),
    alloy_6351=maybe(st.booleans()),
    capacity_ml=maybe(st.integers(0, 100_000)),
    tare_known=maybe(st.booleans()),
    charge_g=maybe(st.integers(0, 50_000)),
    own_limit_g=maybe(st.integers(0, 50_000)),
    net_g=maybe(st.integers(-100, 50_000)),
    contents=maybe(st.sampled_from(["nitrous oxide", "nothing yet", "other", "unknown"])),
    owner=maybe(st.sampled_from(["shop", "customer", "supplier"])),
    consent=maybe(st.booleans()),
    condemned=maybe(st.booleans()),
    conditions=maybe(st.lists(CONDITION, max_size=2).map(tuple)),
    pressure_kept=maybe(st.booleans()),
    dried_and_purged=maybe(st.booleans()),
    look_done=maybe(st.booleans()),
    star_check_done=maybe(st.booleans()),
    in_open_refill=maybe(st.booleans()),
    visual=maybe(MONTHS),
    disc=maybe(MONTHS),
)


@given(ANY_FACTS, st.sampled_from(editions()), policies(), DAYS, st.booleans())
def test_any_facts_are_judged_without_an_error(facts, edition, policy, on, at_counter) -> None:
    found = judge(facts, edition, policy, on, at_counter=at_counter)
    assert json.dumps([reason.as_dict() for reason in found.reasons])
    assert json.dumps(kept_form(facts))
    if found.may_be_filled == "yes":
        assert found.limit.grams is not None
        assert facts.net_g is not None
        assert facts.net_g < found.limit.grams
        assert found.status in ("in date", "due this month")
        assert facts.owner == "shop" or facts.consent
    if found.may_be_filled == "no":
        assert found.reasons[0].severity == "refuses"
    if found.status == "service life over" or facts.condemned:
        assert (found.may_be_filled, found.may_be_emptied) == ("no", "no")


@given(ANY_FACTS, st.sampled_from(editions()), policies(), DAYS, st.integers(1, 200))
def test_a_stricter_policy_never_allows_more(facts, edition, policy, on, interval) -> None:
    stricter = replace(policy, month_rule="from first day", overlays=(*policy.overlays, Overlay(interval)))
    order = ["yes", "only after", "unknown", "no"]
    before = judge(facts, edition, policy, on).may_be_filled
    after = judge(facts, edition, stricter, on).may_be_filled
    assert order.index(after) >= order.index(before)
