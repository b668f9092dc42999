"""Whatever two bottles are read to be, what stands behind their forecast is an answer or a sentence."""

from __future__ import annotations

import re
from types import SimpleNamespace
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.models import Station
from bottles.physics.condensation import PRIOR
from bottles.physics.contents import SCALE_TOLERANCE, THERMOMETER_TOLERANCE
from bottles.physics.forecast_band import Tolerances
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, WEIGHED, Start
from bottles.physics.vessel import Vessel
from bottles.selectors.cold_places import USUAL_MK, _place
from bottles.services import forecast_details
from bottles.services.forecast_details import course_over_time, fills_ahead, starts_compared, would_help
from bottles.services.forecasting import Pair
from bottles.views.course_chart import course_context
from bottles.views.forecast_details_words import COLDER_GIVES_MORE, fills_said
from bottles.views.helps_words import colder, helps_context
from bottles.views.refill_words import RefillWords
from shop.physics.errors import PhysicsError
from shop.physics.formatting import unit_system
from tests.examples import times

WORDS = RefillWords(unit_system("metric"), 101_325.0)
AMERICAN = RefillWords(unit_system("us"), 101_325.0)
STATION = Station(hose_length_um=1_500_000, hose_bore_um=4_800)
NUMBER = re.compile(r"\b(nan|inf)\b")


@pytest.fixture(autouse=True)
def _usual_places(monkeypatch: pytest.MonkeyPatch) -> None:
    """Chilling as where no freezer is written down, without asking a database."""
    monkeypatch.setattr(forecast_details, "cold_places", lambda: [_place(*usual, written_down=False) for usual in USUAL_MK])


def pair(net: float = 15.0, supply_c: float = 20.0, bottle_c: float = 15.0, **changes: Any) -> Pair:
    """A 29 L steel supply bottle and a 6.8 L aluminium one."""
    values: dict[str, Any] = {
        "source": Vessel(0.029, 15_000.0, net, supply_c + 273.15), "receiver_volume_m3": 0.0068, "receiver_wall_j_k": 5_290.0,
        "receiver_temperature_k": bottle_c + 273.15, "limit_kg": 4.614, "start": Start(WEIGHED, 0.3), "source_range_kg": None,
        "line_volume_m3": 3e-5, "condensation": PRIOR, "tolerances": Tolerances(THERMOMETER_TOLERANCE, SCALE_TOLERANCE),
    }  # fmt: skip
    return Pair(**values | changes)


def written(two: Pair) -> str:
    """All that the details and *would help* write, as one text."""
    answer = two.worked_out()
    likely = answer.likely_kg or 0.0
    stated: Any = SimpleNamespace(
        start_g=round(two.receiver.net_kg * 1000), target_g=round(two.limit_kg * 1000), low_g=int(answer.low_kg * 1000),
        likely_g=round(likely * 1000), high_g=round(answer.high_kg * 1000),
    )  # fmt: skip
    said = [str(helps_context(would_help(two), words)) for words in (WORDS, AMERICAN)]
    course = course_over_time(two, STATION)
    if course is not None:
        said += [str(course_context(course, stated, words)) for words in (WORDS, AMERICAN)]
    return " ".join([*said, str(fills_ahead(two)), str(starts_compared(two))])


@settings(max_examples=times(40), deadline=None)
@given(
    net=st.floats(0.05, 19.0), supply=st.floats(-39.0, 51.0), bottle=st.floats(-39.0, 51.0),
    kind=st.sampled_from([VENTED, OWN_VAPOUR, AIR, WEIGHED]), held=st.floats(0.0, 5.0),
)  # fmt: skip
def test_any_two_bottles_get_an_answer_without_a_number_that_is_none(
    net: float, supply: float, bottle: float, kind: str, held: float
) -> None:
    two = pair(net, supply, bottle, start=Start(kind, held if kind == WEIGHED else None))
    try:
        two.worked_out()
    except PhysicsError as refusal:
        assert refusal.sentence
        return
    assert not NUMBER.search(written(two))


def test_equal_bottles_have_a_course_of_one_moment() -> None:
    two = pair(15.0, 20.0, 20.0, start=Start(WEIGHED, 2.0))
    course = course_over_time(two, STATION)
    assert course is not None and course.likely.moved_kg[-1] < 1e-3
    assert "<svg" in written(two)


def test_a_supply_known_by_its_gauge_alone_has_neither_course_nor_count() -> None:
    two = pair(source_range_kg=(5.0, 15.0))
    assert course_over_time(two, STATION) is None and fills_ahead(two) is None and starts_compared(two) == []


def test_where_a_supply_gives_more_without_warming_up_it_says_why() -> None:
    more, fewer = fills_ahead(pair(16.0, 20.0, -40.0)), fills_ahead(pair(15.0, 20.0, -40.0))
    assert more and more.straight_likely.count > more.warmed_likely.count and COLDER_GIVES_MORE in fills_said(more)
    assert fewer and fewer.straight_likely.count <= fewer.warmed_likely.count and COLDER_GIVES_MORE not in fills_said(fewer)


def test_chilling_times_are_told_for_what_fills_it_and_only_where_it_gets_there() -> None:
    found = would_help(pair())
    assert found.chill_k is not None
    assert [name for name, time in found.times if time.quick_s is not None] == ["a freezer"]
    times = helps_context(found, WORDS)
    assert times and re.fullmatch(r"To −?\d+ °C in a freezer: .+ to .+", times["rows"][0]["times"][0])


def test_a_temperature_not_to_be_passed_is_rounded_down() -> None:
    assert colder(273.15 - 0.2, WORDS) == "−1 °C"
    assert colder(325.15, AMERICAN) == "125 °F"
    assert colder(255.372, AMERICAN) == "0 °F"  # as it's kept when 0 °F was entered
    assert colder(273.15 + 14.99, WORDS) == "14 °C"
