"""Where the nitrous of a refill came from and went: whatever the weighings say, it adds up."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.rules.refill_flows import Flow, Read, Source, flows
from tests.examples import times

BEFORE = Read(300, 24, 0, line_off=True)


def told(found: list[Flow]) -> dict[tuple[str, int | None], int]:
    return {(flow.kind, flow.draw): flow.grams for flow in found}


def test_what_came_in_arrived_from_the_supply_in_force() -> None:
    reads = [Read(1_300, 24, 0, line_off=False), Read(4_300, 24, 1, line_off=True)]
    sources = [Source(line_g=20, line_error_g=10, moved_on=True), Source(line_g=30, line_error_g=15)]
    assert told(flows(BEFORE, reads, sources)) == {
        ("arrived", 0): 1_000, ("line", 0): 20, ("arrived", 1): 3_000, ("line", 1): 30,
    }  # fmt: skip


def test_the_line_is_lost_when_it_is_taken_off_and_not_before() -> None:
    source = [Source(line_g=20, line_error_g=10)]
    assert ("line", 0) not in told(flows(BEFORE, [Read(4_300, 24, 0, line_off=False)], source))
    assert told(flows(BEFORE, [Read(4_300, 24, 0, line_off=True)], source))["line", 0] == 20


def test_less_than_before_beyond_the_uncertainty_was_let_out() -> None:
    # √(24² + 24²) = 33.9: 34 g less says nothing, 35 g less does.
    reads = [Read(4_000, 24, 0, line_off=False), Read(3_966, 24, 0, line_off=False)]
    assert told(flows(BEFORE, reads, [Source()])) == {("arrived", 0): 3_666}
    reads[1] = Read(3_965, 24, 0, line_off=False)
    assert told(flows(BEFORE, reads, [Source()])) == {("arrived", 0): 3_700, ("vented", None): 35}


def test_a_supply_on_a_scale_splits_into_arrived_line_and_missing() -> None:
    reads = [Read(4_300, 24, 0, line_off=True)]

    def lost(grams: int) -> dict[tuple[str, int | None], int]:
        return told(flows(BEFORE, reads, [Source(lost_g=grams, lost_error_g=30, line_g=20, line_error_g=10)]))

    assert lost(4_040) == {("arrived", 0): 4_000, ("line", 0): 40}
    # The line takes 20 + 10 g and what both scales leave open: √(34² + 30²) = 45.3, so 46 g.
    assert lost(4_500) == {("arrived", 0): 4_000, ("line", 0): 76, ("missing", 0): 424}
    assert lost(3_960) == {("arrived", 0): 3_960, ("found", 0): 40}
    assert lost(3_900) == {("arrived", 0): 3_900, ("found beyond", 0): 100}


@settings(max_examples=times(150), deadline=None)
@given(
    nets=st.lists(st.tuples(st.integers(0, 8_000), st.integers(1, 80), st.integers(0, 2), st.booleans()), max_size=8),
    lost=st.lists(st.none() | st.integers(0, 9_000), min_size=3, max_size=3),
)
def test_the_bottle_ends_with_what_its_last_weighing_says(
    nets: list[tuple[int, int, int, bool]], lost: list[int | None]
) -> None:
    reads = [Read(net, error, draw, line_off=off) for net, error, draw, off in sorted(nets, key=lambda one: one[2])]
    sources = [Source(lost_g=one, lost_error_g=40, line_g=25, line_error_g=13) for one in lost]
    found = flows(BEFORE, reads, sources)
    assert all(flow.grams > 0 and flow.error_g >= 0 for flow in found)
    into = sum(flow.grams for flow in found if flow.kind in ("arrived", "found", "found beyond"))
    out = sum(flow.grams for flow in found if flow.kind == "vented")
    last = reads[-1].net_g if reads else BEFORE.net_g
    # A supply bottle from which less came in than the ± took back counts as having given nothing: each
    # weighing can hide √(80² + 80²) = 113.1 g so.
    slack = 114 * len(reads)
    assert abs(BEFORE.net_g + into - out - last) <= slack
    for number, source in enumerate(sources):
        if source.lost_g is not None:
            left = sum(flow.grams for flow in found if flow.draw == number and flow.kind in ("arrived", "line", "missing"))
            assert left == source.lost_g
