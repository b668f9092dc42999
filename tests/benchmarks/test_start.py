"""A second start with its data there, until the first page answers, beside Django's own check."""

from __future__ import annotations

import contextlib
import subprocess
import time
import urllib.request
from pathlib import Path

import pytest

from tests.base.test_open import FLAGS, MANAGE, Opened, environment
from tests.benchmarks.conftest import Told
from tests.benchmarks.measuring import Measured

pytestmark = [pytest.mark.benchmark, pytest.mark.workers, pytest.mark.slow]


ROUNDS = 2


def test_a_second_start_costs_few_bare_checks(tmp_path: Path, tell: Told) -> None:
    home = tmp_path / "shop"
    assert Opened(home, *FLAGS).until_open().close() == 0
    measured = Measured({"check": [], "start": []})
    for _ in range(ROUNDS):
        began = time.perf_counter()
        subprocess.run([*MANAGE, "check"], env=environment(home), check=True, capture_output=True, timeout=60)
        measured.rounds["check"].append(time.perf_counter() - began)
        began = time.perf_counter()
        shop = Opened(home)
        try:
            while not (shop.address and answers(shop.address)):
                assert shop.process.poll() is None, shop.said()
                time.sleep(0.02)
            measured.rounds["start"].append(time.perf_counter() - began)
        finally:
            shop.close()
    tell("second start, to its first page", measured, "start", beside="check", goal=5)


def answers(address: str) -> bool:
    with contextlib.suppress(OSError), urllib.request.urlopen(f"{address}sign-in", timeout=20) as page:
        return page.status == 200
    return False
