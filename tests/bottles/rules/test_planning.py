"""Plans of small days beside brute force, and what holds of every plan."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise, permutations, product
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from bottles.rules.planning.bound import bound_of
from bottles.rules.planning.exact import best_plan
from bottles.rules.planning.heuristic import first_come_first_served, good_plan
from bottles.rules.planning.problem import LEAST_DRAW_S, Choice, Day, Plan, Score, Source, Start, Waiting
from bottles.rules.planning.schedule import Rehearsal
from bottles.rules.planning.spans import span_of
from bottles.rules.planning.told import tell
from shop.physics.errors import OutOfRange
from tests.examples import times

SIZES = ((3.4e-3, 2_700.0), (6.8e-3, 5_300.0), (10e-3, 7_300.0))  # m3, J/K: aluminium
STEEL = 15_000.0
HOUR = 3600


def bottle(code: str, size: int = 1, *, held: float = 0.05, chilled: bool = True, promised: int | None = None) -> Waiting:
    volume, wall = SIZES[size]
    starts = (Start(293.15), Start(258.15, 0, 5_400)) if chilled else (Start(293.15),)
    return Waiting(code, volume, wall, held * 680 * volume, 680 * volume, starts, promised)


def supply(code: str, net: float, station: int | None = 0) -> Source:
    return Source(code, 0.029, STEEL, net, 293.15, station, line_m3=3e-5)


def day(bottles: Any, sources: Any, **more: Any) -> Day:
    values: dict[str, Any] = {"stations_free_s": (0,), "closes_s": 8 * HOUR, "slots": (2,)}
    return Day(tuple(bottles), tuple(sources), **values | more)


@st.composite
def days(draw: Any, most_bottles: int = 3, most_sources: int = 2) -> Day:
    """A random day; nets and promises such that something is often short."""
    many = draw(st.integers(1, most_bottles))
    bottles = [
        bottle(
            f"T-{number}", draw(st.integers(0, 2)), held=draw(st.sampled_from((0.01, 0.1, 0.4))), chilled=draw(st.booleans()),
            promised=draw(st.sampled_from((None, HOUR, 2 * HOUR, 4 * HOUR))),
        )
        for number in range(many)
    ]  # fmt: skip
    stations = draw(st.integers(1, 2))
    sources = [
        supply(f"S-{number}", draw(st.sampled_from((2.5, 4.5, 8.0, 19.0))), draw(st.sampled_from((None, 0, stations - 1))))
        for number in range(draw(st.integers(1, most_sources)))
    ]
    return day(
        bottles, sources, stations_free_s=(0,) * stations, people=draw(st.integers(1, 2)), slots=(draw(st.integers(1, 2)),),
        closes_s=draw(st.sampled_from((2_400, 2 * HOUR, 3 * HOUR, 8 * HOUR))),
    )  # fmt: skip


def brute_force(of: Day) -> Score:
    """Every order of every choice of bottles, every way of filling each, nothing cut."""
    rehearsal = Rehearsal(of)
    best = rehearsal.score(rehearsal.beginning())

    def go_on(at: Any, order: tuple[int, ...]) -> None:
        nonlocal best
        best = min(best, rehearsal.score(at))
        if order:
            for choice in rehearsal.choices(at, order[0]):
                placed = rehearsal.place(at, choice)
                if placed is not None:
                    go_on(placed[0], order[1:])

    for order in permutations(range(len(of.bottles))):
        go_on(rehearsal.beginning(), order)
    return best


@settings(max_examples=times(30), deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(days())
def test_the_exact_plan_is_as_good_as_brute_force(of: Day) -> None:
    plan = best_plan(of)
    assert plan.exact
    assert plan.score == brute_force(of)


@settings(max_examples=times(25), deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(days(6, 3))
def test_no_plan_is_worse_than_first_come_first_served(of: Day) -> None:
    rehearsal = Rehearsal(of)
    served = rehearsal.score(rehearsal.follow(first_come_first_served(rehearsal))[0])
    assert good_plan(of).score <= served
    assert best_plan(of, nodes=500).score <= served


@settings(max_examples=times(25), deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(days())
def test_no_plan_passes_the_bound(of: Day) -> None:
    best, bound = brute_force(of), bound_of(Rehearsal(of))
    assert best[0] >= bound.broken
    assert -best[2] <= bound.good


@settings(max_examples=times(40), deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(days(6, 3))
def test_a_plan_keeps_to_hoses_people_slots_hours_and_masses(of: Day) -> None:
    check(of, good_plan(of, most=800))


def check(of: Day, plan: Plan) -> None:
    draws = [(draw, filled) for filled in plan.fills for draw in filled.draws]
    assert len({filled.choice.bottle for filled in plan.fills}) == len(plan.fills)
    for name in ("station", "source"):
        for one in {getattr(draw, name) for draw, _ in draws}:
            taken = sorted((draw.from_s, draw.until_s) for draw, _ in draws if getattr(draw, name) == one)
            assert all(before[1] <= after[0] for before, after in pairwise(taken))
    for filled in plan.fills:
        one = of.bottles[filled.choice.bottle]
        start = one.starts[filled.choice.start]
        assert filled.final_kg <= one.target_kg + 1e-9
        assert filled.final_kg == pytest.approx(one.net_kg + sum(draw.moved_kg for draw in filled.draws))
        assert filled.draws[0].from_s >= 0 and filled.until_s <= of.closes_s
        assert len({draw.station for draw in filled.draws}) == 1  # a refill stays at its station
        took = [draw.until_s - draw.from_s for draw in filled.draws]
        assert min(took) >= min(LEAST_DRAW_S, of.fill_s)
        assert of.fill_s <= sum(took) <= of.fill_s + LEAST_DRAW_S * (len(took) - 1) and (len(took) > 1 or took == [of.fill_s])
        if start.place is not None:
            assert filled.chill_from_s is not None and filled.chill_until_s is not None
            assert filled.chill_until_s - filled.chill_from_s >= start.seconds
    moments = {draw.from_s for draw, _ in draws}
    for moment in moments:
        assert sum(filled.draws[0].from_s <= moment < filled.until_s for filled in plan.fills) <= of.people
    for place, slots in enumerate(of.slots):
        inside = [
            (filled.chill_from_s, filled.chill_until_s) for filled in plan.fills
            if of.bottles[filled.choice.bottle].starts[filled.choice.start].place == place
        ]  # fmt: skip
        for begin, _ in inside:
            assert sum(other[0] <= begin < other[1] for other in inside) <= slots  # type: ignore[operator]
    for number, source in enumerate(of.sources):
        given_kg = sum(draw.moved_kg + draw.line_kg for draw, _ in draws if draw.source == number)
        left = [draw.left_kg for draw, _ in sorted(draws, key=lambda each: each[0].from_s) if draw.source == number]
        assert (left[-1] if left else source.net_kg) == pytest.approx(source.net_kg - given_kg)
        assert not left or left[-1] >= 0.0
        if source.station is not None:
            assert {draw.station for draw, _ in draws if draw.source == number} <= {source.station}


def test_the_same_day_gives_the_same_plan() -> None:
    of = day([bottle(f"T-{n}", n % 3, promised=(n + 1) * HOUR) for n in range(9)], [supply("S-1", 19.0), supply("S-2", 4.5, None)])
    first, second = good_plan(of, most=1_000), good_plan(of, most=1_000)
    assert first == second
    assert tell(of, first) == tell(of, second)


def test_a_promise_goes_before_the_number_of_full_bottles() -> None:
    """One supply bottle fills two small bottles or one large one; the large one is promised."""
    of = day(
        [bottle("small", 0), bottle("smaller", 0), bottle("large", 2, promised=3 * HOUR)], [supply("S-1", 11.5)],
    )  # fmt: skip
    plan = best_plan(of)
    assert plan.score[0] == 0
    assert of.bottles[plan.fills[0].choice.bottle].code == "large" or plan.good == 3


def test_a_weak_supply_bottle_is_drawn_on_first_and_a_fresh_one_fills_up() -> None:
    of = day([bottle("T-1")], [supply("weak", 6.5), supply("fresh", 19.0, None)])
    fill = best_plan(of).fills[0]
    assert [of.sources[draw.source].code for draw in fill.draws] == ["weak", "fresh"]
    assert fill.final_kg == pytest.approx(of.bottles[0].target_kg)


def test_the_minutes_of_a_fill_are_split_over_its_draws_by_mass_and_the_change_comes_on_top() -> None:
    of = day([replace(bottle("T-1"), starts=(Start(258.15),))], [supply("weak", 6.5), supply("fresh", 19.0, None)])
    first, second = best_plan(of).fills[0].draws
    room = of.bottles[0].target_kg - of.bottles[0].net_kg
    assert first.moved_kg + second.moved_kg == pytest.approx(room)
    assert first.until_s - first.from_s == pytest.approx(of.fill_s * first.moved_kg / room, abs=1)
    assert second.from_s == first.until_s + of.change_s
    assert second.until_s == of.fill_s + of.change_s


def test_no_draw_takes_less_than_three_minutes_and_none_more_than_a_shops_own_fill() -> None:
    of = day([bottle("T-1")], [supply("S-1", 19.0)])
    assert of.draw_s(0.1, 4.0, spent_s=0, last=False) == 180
    assert of.draw_s(4.0, 4.0, spent_s=890, last=True) == 180
    assert of.draw_s(0.5, 4.0, spent_s=0, last=True) == 900  # where one gives it all: equal pressures take their time
    assert replace(of, fill_s=60).draw_s(0.1, 4.0, spent_s=0, last=False) == 60


def test_a_top_up_fits_where_only_the_change_and_no_second_fill_does() -> None:
    of = day(
        [replace(bottle("T-1"), starts=(Start(258.15),))], [supply("weak", 6.5), supply("fresh", 19.0, None)],
        closes_s=900 + 300,
    )  # fmt: skip
    plan = best_plan(of)
    assert plan.exact and plan.score == brute_force(of) == good_plan(of).score
    assert plan.good == plan.bound.good == 1 and len(plan.fills[0].draws) == 2


def test_as_warm_as_its_supply_a_bottle_stays_short_and_chilled_it_is_full() -> None:
    warm = best_plan(day([bottle("T-1", chilled=False)], [supply("S-1", 19.0)]))
    cold = best_plan(day([bottle("T-1")], [supply("S-1", 19.0)]))
    assert warm.good == 0 and cold.good == 1
    assert cold.fills[0].chill_until_s == 5_400


def test_what_is_left_out_says_why() -> None:
    told = tell(of := day([bottle("T-1")], []), good_plan(of))
    assert [one["why"] for one in told["unfilled"]] == ["no supply"]
    told = tell(of := day([bottle("T-1")], [supply("S-1", 19.0)], closes_s=600), good_plan(of))
    assert [one["why"] for one in told["unfilled"]] == ["no time"]
    told = tell(of := day([bottle("T-1", chilled=False, held=0.3)], [supply("S-1", 0.5)]), good_plan(of))
    assert [one["why"] for one in told["unfilled"]] == ["too warm"]


def test_an_empty_supply_bottle_tells_what_a_cold_bottle_could_draw() -> None:
    of = day([bottle("T-1")], [supply("empty", 3.0), supply("fresh", 19.0, None)])
    told = tell(of, best_plan(of))
    empty = next(one for one in told["empties"] if one["code"] == "empty")
    assert empty["could"][0]["bottle"] == "T-1" and 20 <= empty["could"][0]["g"] < 3_000


def test_a_plan_is_stopped_by_who_watches() -> None:
    class Stop(Exception):
        pass

    def watch(done: int, total: int) -> None:
        assert 0 <= done <= total
        raise Stop

    of = day([bottle("T-1"), bottle("T-2")], [supply("S-1", 19.0)])
    for plan in (good_plan, best_plan):
        with pytest.raises(Stop):
            plan(of, watch)


@pytest.mark.parametrize(("many", "people"), list(product((1, 2), (1, 2))))
def test_two_bottles_are_filled_side_by_side_where_there_are_hoses_and_people(many: int, people: int) -> None:
    of = day(
        [bottle("T-1", chilled=False, held=0.5), bottle("T-2", chilled=False, held=0.5)],
        [supply("S-1", 19.0, 0), supply("S-2", 19.0, many - 1)], stations_free_s=(0,) * many, people=people,
    )  # fmt: skip
    plan = best_plan(of)
    starts = sorted(filled.draws[0].from_s for filled in plan.fills)
    if len(starts) == 2:
        assert (starts[0] == starts[1]) == (many == people == 2)


def in_the_freezer(code: str) -> Waiting:
    return replace(bottle(code), starts=(Start(258.15),), stands_in=0)


def test_a_bottle_that_stands_in_the_freezer_holds_its_room_until_it_is_filled() -> None:
    warm = replace(bottle("T-9"), starts=(Start(258.15, 0, 1_800),))
    with_room = day([in_the_freezer("T-0"), in_the_freezer("T-1"), warm], [supply("S-1", 19.0)], slots=(3,))
    without = replace(with_room, slots=(2,))

    def chilled_from(one: Day) -> int | None:
        rehearsal = Rehearsal(one)
        _, fills = rehearsal.follow([Choice(0, 0, (0,)), Choice(1, 0, (0,)), Choice(2, 0, (0,))])
        assert len(fills) == 3
        return fills[2].chill_from_s

    assert chilled_from(with_room) == 0
    # The first that leaves makes room: when its hose opens.
    assert chilled_from(without) == Rehearsal(without).follow([Choice(0, 0, (0,))])[1][0].draws[0].from_s
    rehearsal = Rehearsal(without)
    assert rehearsal.place(rehearsal.beginning(), Choice(2, 0, (0,))) is None  # no room at all before one leaves


def test_a_bottle_that_stands_in_a_freezer_is_chilled_on_without_another_room() -> None:
    one = replace(bottle("T-0"), starts=(Start(270.0), Start(258.15, 0, 1_800)), stands_in=0)
    _, fills = Rehearsal(day([one], [supply("S-1", 19.0)], slots=(1,))).follow([Choice(0, 1, (0,))])
    assert (fills[0].chill_from_s, fills[0].chill_until_s) == (0, 1_800)


def test_more_bottles_in_a_freezer_than_it_takes_are_refused() -> None:
    with pytest.raises(OutOfRange, match="than it takes"):
        day([in_the_freezer("T-0"), in_the_freezer("T-1")], [supply("S-1", 19.0)], slots=(1,))


def test_an_open_refill_goes_on_at_its_own_hose() -> None:
    one = replace(bottle("T-0"), hose=1)
    of = day([one], [supply("S-1", 19.0, 0), supply("S-2", 19.0, 1), supply("S-3", 19.0, None)], stations_free_s=(0, 0))
    rehearsal = Rehearsal(of)
    at = rehearsal.beginning()
    assert rehearsal.place(at, Choice(0, 1, (0,))) is None
    for source in (1, 2):
        placed = rehearsal.place(at, Choice(0, 1, (source,)))
        assert placed is not None and placed[1].draws[0].station == 1


@settings(max_examples=times(15), deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(days())
def test_each_fill_is_told_with_a_span_around_what_is_likely(of: Day) -> None:
    unsure = replace(of, bottles=tuple(replace(one, deviation=0.25, unsure_kg=0.05) for one in of.bottles))
    for fill in tell(unsure, best_plan(unsure, nodes=600))["fills"]:
        assert fill["start_g"] <= fill["low_g"] <= fill["final_g"] <= fill["high_g"] <= fill["target_g"]
        for draw in fill["draws"]:
            assert draw["quick_g"] >= draw["slow_g"] - 1
            assert draw["there_g"] >= draw["left_g"]


def test_a_surer_figure_makes_a_narrower_span() -> None:
    weak = day([bottle("T-0", chilled=False)], [supply("S-1", 12.0)])

    def width(deviation: float) -> int:
        one = replace(weak, bottles=(replace(weak.bottles[0], deviation=deviation),))
        fill = tell(one, best_plan(one))["fills"][0]
        return fill["high_g"] - fill["low_g"]

    assert 0 < width(0.0) < width(0.1) < width(0.25)


def test_what_an_empty_supply_bottle_could_still_give_names_how_cold_a_bottle_must_be() -> None:
    of = day([bottle("T-0")], [supply("S-1", 4.0), supply("S-2", 19.0)])
    told = tell(of, best_plan(of))
    empty = next(one for one in told["empties"] if one["code"] == "S-1")
    assert 258_150 < empty["below_mk"] < 293_150
    assert all(each["mk"] < empty["below_mk"] for each in empty["could"])


def test_a_sure_second_draw_makes_up_for_what_the_first_may_lack() -> None:
    one = replace(bottle("T-0"), deviation=0.25)
    of = day([one], [supply("S-1", 8.0), supply("S-2", 19.0)])
    rehearsal = Rehearsal(of)

    def missing(*sources: int) -> float:
        filled = rehearsal.follow([Choice(0, 1, sources)])[1][0]
        return filled.final_kg - span_of(rehearsal, filled).low_kg

    assert missing(0) > 0.2 > missing(0, 1)


def cold(code: str, promised: int) -> Waiting:
    return replace(in_the_freezer(code), promised_s=promised)


def test_a_promise_that_is_lost_gives_way_to_those_that_can_be_kept() -> None:
    lost = [cold(f"L-{number}", 60) for number in range(4)]
    kept = [cold(f"K-{number}", 1_000 * (number + 1)) for number in range(4)]
    of = day([*lost, *kept], [supply("S-1", 19.0), supply("S-2", 19.0)], slots=(8,), change_s=0)
    plan = good_plan(of)
    assert plan.score[0] == plan.bound.broken == 4


def test_of_two_late_bottles_none_waits_for_hours_to_spare_the_other_a_little() -> None:
    of = day([cold("B", -600), cold("A", -4 * HOUR)], [supply("S-1", 19.0)])
    plan = best_plan(of)
    assert plan.exact
    assert [of.bottles[filled.choice.bottle].code for filled in plan.fills] == ["A", "B"]
