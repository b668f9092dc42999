"""`manage.py open --demo`: people at once, the past as a job that goes on after a closing."""

import re
import sqlite3
from contextlib import closing

import pytest

from tests.base.test_open import get, home, open_shop  # noqa: F401  (fixtures)
from tests.base.workers import wait_for

pytestmark = [pytest.mark.workers, pytest.mark.slow, pytest.mark.timeout(400)]


def filling(home):  # noqa: F811
    """Return state and progress of the job that fills the demo."""
    with closing(sqlite3.connect(home / "tarebook.sqlite3", timeout=20)) as database:
        return database.execute("SELECT state, done, error FROM base_job WHERE kind = 'demo.fill'").fetchone()


def test_the_demo_opens_at_once_fills_as_a_job_and_goes_on_after_a_closing(home, open_shop):  # noqa: F811
    first = open_shop("--demo").until_open()
    assert get(first.address + "healthz") == 200
    wait_for(lambda: "manager" in first.said() and filling(home)[1] >= 50, "fifty steps of the demo", 90)
    for role in ("front desk", "technician", "manager"):
        assert len(re.findall(rf"^{role} (\S+) (\S+)$", first.said(), re.MULTILINE)) == 1
    assert first.close() == 0
    state, done, error = filling(home)
    assert (state, error) in [("running", ""), ("queued", ""), ("done", "")]

    second = open_shop("--demo").until_open()
    wait_for(lambda: filling(home)[0] == "done" or filling(home)[1] > done, "the demo to go on", 90)
    assert filling(home)[2] == ""
    assert "front desk" not in second.said()
