"""Contradictions caught while registering, the capacity inferred, and the filler's look."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from bottles.rules.facts import Facts, Permit
from bottles.rules.look import look_for, look_result
from bottles.rules.marks import read_mark
from bottles.rules.register import contradictions, infer_capacity
from shop.rules import month as months
from tests.bottles.rules.test_fitness import ADR, ANY_FACTS, GOOD, ON, US, stamp

ORDINARY = replace(GOOD, wall="aluminium", charge_g=4536)


def codes(facts: Facts, tare_g: int | None = 6420) -> set[str]:
    return {reason.code for reason in contradictions(facts, US, ON, tare_g=tare_g)}


def test_an_ordinary_bottle_contradicts_nothing() -> None:
    assert codes(ORDINARY) == set()
    # The very most that its capacity allows is no contradiction yet.
    assert codes(replace(ORDINARY, charge_g=4614)) == set()


@pytest.mark.parametrize(
    ("change", "code"),
    [
        ({"charge_g": 4615}, "charge-above-capacity"),
        ({"tests": (stamp("05/2016"),)}, "test-before-manufacture"),
        ({"mark": read_mark("DOT-3AL1500")}, "service-pressure-too-low"),
        ({"mark": read_mark("DOT-39"), "wall": None}, "not-refillable"),
        ({"mark": read_mark("foreign")}, "foreign-mark"),
        ({"mark": read_mark("DOT-3AL1800"), "wall": "steel"}, "wall-contradicts-mark"),
        ({"tests": (stamp("06/2021*"),)}, "star-on-aluminium"),
        ({"mark": read_mark("XYZ")}, "mark-unknown"),
        ({"mark": read_mark("ISO 7866 PH250")}, "no-row-for-mark"),
        ({"mark": read_mark("DOT-SP 10915-4500"), "wall": "composite"}, "permit-missing"),
        ({"mark": read_mark("DOT-SP 10915-4500"), "wall": "composite"}, "composite-without-life"),
        ({"service_life_end": months.from_ym(2015, 1)}, "life-before-manufacture"),
        ({"service_life_end": months.from_ym(2026, 2)}, "service-life-over"),
        ({"mark": read_mark("DOT-3AL")}, "pressure-not-read"),
        # 125 lb of water is 56.7 kg, 56.8 L at 60 °F (49 CFR 180.209(b), from memory).
        ({"mark": read_mark("DOT-3AA2015"), "wall": "steel", "tests": (stamp("03/2018*"),), "capacity_ml": 57_000},
         "star-too-large"),
    ],
)  # fmt: skip
def test_a_contradiction_is_caught(change: dict[str, object], code: str) -> None:
    assert code in codes(replace(ORDINARY, **change), tare_g=None)


def test_a_permit_and_a_life_entered_are_enough() -> None:
    facts = replace(
        ORDINARY,
        mark=read_mark("DOT-SP 10915-4500"),
        wall="composite",
        permit=Permit(lists_nitrous=True),
        service_life_end=months.from_ym(2031, 6),
    )
    assert codes(facts, tare_g=None) == set()


@pytest.mark.parametrize(
    ("wall", "capacity", "tare", "plausible"),
    [
        # Common practice, no source: a 10 lb aluminium bottle weighs 14 to 15 lb with its valve.
        ("aluminium", 6800, 6420, True),
        ("aluminium", 6800, 14_200, True),
        ("aluminium", 6800, 642, False),
        ("aluminium", 6800, 64_200, False),
        ("aluminium", 680, 1200, True),
        ("steel", 29_000, 35_000, True),
        ("steel", 29_000, 3_500, False),
        ("composite", 6800, 3_000, True),
    ],
)
def test_a_tare_of_another_unit_stands_out(wall, capacity, tare, plausible) -> None:
    facts = Facts(wall=wall, capacity_ml=capacity)
    found = {reason.code for reason in contradictions(facts, US, ON, tare_g=tare)}
    assert ("tare-implausible" in found) != plausible


@pytest.mark.parametrize(
    ("charge", "mark", "edition", "capacity"),
    [
        # 4,536 g / 0.68 / 0.997942 g/mL = 6,684.3 mL, up to the next whole one
        (4536, "DOT-3AL1800", US, 6685),
        # 4,536 g / 0.75 / 0.9991 g/mL = 6,053.4 mL
        (4536, "ISO 7866 PH250", ADR, 6054),
    ],
)
def test_a_capacity_is_inferred_from_the_label_and_says_so(charge, mark, edition, capacity) -> None:
    found = infer_capacity(charge, Facts(mark=read_mark(mark)), edition)
    assert found is not None
    assert found.capacity_ml == capacity
    assert found.reason.code == "capacity-inferred"


def test_without_a_filling_ratio_no_capacity_is_inferred() -> None:
    assert infer_capacity(4536, Facts(mark=read_mark("ISO 7866")), ADR) is None


@given(ANY_FACTS, st.none() | st.integers(0, 100_000))
def test_any_facts_are_looked_through_without_an_error(facts, tare) -> None:
    for edition in (US, ADR):
        assert all(reason.sentence for reason in contradictions(facts, edition, ON, tare_g=tare))


def test_a_star_adds_its_own_items_on_steel_only() -> None:
    plain = {item.code for item in look_for(US, star=False, wall="steel")}
    assert {item.code for item in look_for(US, star=True, wall="steel")} - plain == {"star apart", "star hammer"}
    assert {item.code for item in look_for(US, star=True, wall="aluminium")} == plain


def test_a_look_is_done_when_every_item_is_in_order() -> None:
    items = look_for(US, star=True, wall="steel")
    fine = {item.code: True for item in items}
    assert look_result(items, fine).done
    assert look_result(items, fine).star_checks_done
    for item in items:
        for answer in (False, None):
            found = look_result(items, {**fine, item.code: answer})
            if item.when == "star":
                assert not found.star_checks_done
                assert found.done == (answer is None or item.failed is None)
            else:
                assert not found.done
            assert found.conditions == ((item.failed,) if answer is False and item.failed else ())


def test_an_empty_look_is_not_done() -> None:
    items = look_for(ADR, star=False, wall=None)
    found = look_result(items, {})
    assert not found.done
    assert set(found.open_items) == {item.code for item in items}
