"""The likely course for a page: it ends at the likely mass, and agrees with the detailed one at its ends."""

from __future__ import annotations

import numpy as np
import pytest

from bottles.physics.condensation import between
from bottles.physics.hose import effective_area
from bottles.physics.likely_course import likely_course
from bottles.physics.transfer import Transfer
from bottles.physics.transient import transient
from tests.physics.courses import ABOVE, CASES, LIMIT, QUICK, SLOW, bottle, supply


@pytest.mark.parametrize("figure", [0.0, 0.3, 0.5, 1.0])
@pytest.mark.parametrize("name", CASES)
def test_the_likely_course_ends_at_the_likely_mass(name, figure):
    transfer = Transfer(*CASES[name])
    ends = between(transfer.cautious_free_kg(), transfer.mixed_free_kg(), figure)
    room = ABOVE - transfer.receiver.net_kg
    course = likely_course(transfer, ABOVE, figure, effective_area())
    assert course.moved_kg[-1] == pytest.approx(min(ends, room), rel=1e-9)
    assert (course.stopped_by == "fill limit") == (room <= ends)
    assert np.all(np.diff(course.seconds) > 0.0)
    assert np.all(course.receiver_pa >= 0.0)
    if course.stopped_by == "pressures equal":
        assert course.receiver_pa[-1] == pytest.approx(course.source_pa[-1], rel=1e-3)


@pytest.mark.parametrize("name", ["chilled", "level", "through the critical point", "liquid runs out"])
@pytest.mark.parametrize(("figure", "setting"), [(0.0, SLOW), (1.0, QUICK)])
def test_the_likely_course_takes_as_long_as_the_detailed_one_at_its_ends(name, figure, setting):
    transfer = Transfer(*CASES[name])
    likely, detailed = likely_course(transfer, LIMIT, figure, effective_area()), transient(transfer, LIMIT, setting)
    assert likely.seconds_to_90 == pytest.approx(detailed.seconds_to_90, rel=0.03)


def test_a_course_becomes_words_and_numbers():
    told = transient(Transfer(supply(), bottle(-20)), LIMIT, SLOW).as_dict()
    assert told["minutes_to_limit"] == pytest.approx(told["seconds"][-1] / 60.0)
    assert told["moved_kg"][-1] == pytest.approx(LIMIT - bottle(-20).net_kg)
    assert told["receiver_liquid_c"][-1] < told["receiver_c"][-1]
    likely = likely_course(Transfer(supply(), bottle(-10)), LIMIT, 0.5, effective_area()).as_dict()
    assert likely["receiver_liquid_c"] is None
    assert likely["source_bar"][0] == pytest.approx(50.53, rel=1e-3)


@pytest.mark.parametrize("limit", [1.0, LIMIT])
def test_where_nothing_moves_a_course_is_one_moment(limit):
    transfer = Transfer(supply(19.0, 10.0), bottle(25.0, net=3.0))
    for course in (transient(transfer, limit), likely_course(transfer, limit, 0.5, effective_area())):
        assert course.moved_kg.tolist() == [0.0]
        assert course.stopped_by == ("fill limit" if limit == 1.0 else "no pressure difference")
        assert course.seconds_to_90 is None


@pytest.mark.parametrize("name", ["chilled", "vapour alone"])
def test_a_course_says_between_which_times_it_lies(name):
    transfer = Transfer(*CASES[name])
    for course in (transient(transfer, LIMIT), likely_course(transfer, LIMIT, 0.5, effective_area())):
        shortest, longest = course.seconds_to_90_between
        assert shortest <= course.seconds_to_90 / 1.29
        assert longest >= course.seconds_to_90 / 0.91
        # Boiling in equilibrium and not boiling at all lie further apart than openings scatter.
        assert (longest > 1.2 * course.seconds_to_90) == (name == "chilled")
