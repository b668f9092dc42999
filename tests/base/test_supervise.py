"""Children are kept running, and leave nothing behind."""

import os
import sys
import time

import pytest

from shop.base.supervise import LONGEST_PAUSE, STEADY_AFTER, Child, Supervisor

pytestmark = pytest.mark.workers


@pytest.fixture
def supervisor():
    said: list[str] = []
    supervisor = Supervisor(said.append)
    supervisor.said = said  # type: ignore[attr-defined]
    yield supervisor
    supervisor.stop()


def child(program: str) -> Child:
    return Child("bell-ringer", [sys.executable, "-c", program], dict(os.environ))


def ended(one: Child) -> None:
    assert one.process is not None
    one.process.wait(timeout=20)


def alive(pid: int) -> bool:
    try:
        with open(f"/proc/{pid}/stat", encoding="ascii") as stat:
            return stat.read().rpartition(")")[2].split()[0] != "Z"
    except FileNotFoundError:
        return False


def test_a_child_that_stops_is_started_again_with_growing_pauses_and_said_so(supervisor):
    one = child("raise SystemExit(3)")
    supervisor.add(one)
    pauses, now = [], time.monotonic()
    for _ in range(8):
        ended(one)
        supervisor.look(now)
        pauses.append(one.due - now)
        supervisor.look(one.due - 0.01)  # not yet
        assert one.process is None
        now = one.due
        supervisor.look(now)
        assert one.process is not None
        one.started = now
    assert pauses == pytest.approx([1, 2, 4, 8, 16, 32, LONGEST_PAUSE, LONGEST_PAUSE])
    assert "bell-ringer" in supervisor.said[0]
    assert "exit code 3" in supervisor.said[0]
    assert len(supervisor.said) == 16  # each stop and each start


def test_a_child_that_ran_steadily_is_started_again_after_the_shortest_pause(supervisor):
    one = child("raise SystemExit(3)")
    supervisor.add(one)
    one.faults = 5
    ended(one)
    now = one.started + STEADY_AFTER + 1
    supervisor.look(now)
    assert one.due - now == 1


@pytest.mark.skipif(sys.platform != "linux", reason="reads /proc: run it on Linux")
def test_stopping_ends_the_childrens_children_too(supervisor, tmp_path):
    note = tmp_path / "pids"
    one = child(
        "import os, signal, subprocess, sys, time\n"
        "deaf = 'import signal, time; signal.signal(signal.SIGTERM, signal.SIG_IGN); time.sleep(600)'\n"
        "sub = subprocess.Popen([sys.executable, '-c', deaf])\n"
        f"open({str(note)!r} + '.tmp', 'w').write(f'{{os.getpid()}} {{sub.pid}}')\n"
        f"os.rename({str(note)!r} + '.tmp', {str(note)!r})\n"
        "time.sleep(600)\n"
    )
    supervisor.add(one)
    deadline = time.monotonic() + 20
    while not note.exists():
        assert time.monotonic() < deadline
        time.sleep(0.05)
    pids = [int(word) for word in note.read_text(encoding="ascii").split()]
    assert all(alive(pid) for pid in pids)
    supervisor.stop()
    deadline = time.monotonic() + 10
    while any(alive(pid) for pid in pids):
        assert time.monotonic() < deadline
        time.sleep(0.05)
