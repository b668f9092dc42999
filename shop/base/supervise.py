"""Keep a few child processes running, and stop them and their children together."""

from __future__ import annotations

import ctypes
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from contextlib import suppress
from dataclasses import dataclass, field
from types import FrameType

LONGEST_PAUSE = 60.0
STEADY_AFTER = 60.0  # seconds alive after which an earlier fault is forgotten
PATIENCE = 10.0  # seconds that children have to end tidily

_PR_SET_PDEATHSIG = 1


@dataclass
class Child:
    """One program to keep running: how it's called in words, and how it's started."""

    name: str
    argv: Sequence[str]
    env: dict[str, str]
    fds: Sequence[int] = ()
    before_restart: Callable[[], None] = lambda: None
    process: subprocess.Popen[bytes] | None = None
    faults: int = 0
    started: float = 0.0
    due: float = field(default=0.0)

    def start(self) -> None:
        """Start it in a process group of its own, so that a Ctrl-C reaches only us."""
        self.process = subprocess.Popen(
            self.argv,
            env=self.env,
            pass_fds=self.fds,
            stdin=subprocess.DEVNULL,
            start_new_session=True,
            preexec_fn=_end_with_parent if sys.platform == "linux" else None,
        )
        self.started = time.monotonic()

    def signal(self, number: int) -> None:
        """Send a signal to the program alone; it tells its own children."""
        if self.process is not None and self.process.poll() is None:
            self.process.send_signal(number)

    def sweep_up(self) -> None:
        """Kill whatever is left of its process group."""
        if self.process is not None:
            with suppress(ProcessLookupError, PermissionError):
                os.killpg(self.process.pid, signal.SIGKILL)


class Supervisor:
    """Starts children, starts again what stops, says so, and ends all of them when told to."""

    def __init__(self, say: Callable[[str], None]) -> None:
        self.say = say
        self.children: list[Child] = []
        self.stopping = False

    def listen(self) -> None:
        """Stop on Ctrl-C, on a polite kill and when the terminal goes away."""
        for number in (signal.SIGINT, signal.SIGTERM, signal.SIGHUP):
            signal.signal(number, self._told_to_stop)

    def add(self, child: Child) -> None:
        """Start a child and keep it."""
        child.start()
        self.children.append(child)

    def run(self) -> None:
        """Watch until told to stop, then stop everything."""
        try:
            while not self.stopping:
                self.look(time.monotonic())
                time.sleep(0.1)
        finally:
            self.stop()

    def look(self, now: float) -> None:
        """Notice who stopped, and start again whose pause is over."""
        for child in self.children:
            if child.process is not None:
                code = child.process.poll()
                if code is None:
                    continue
                child.sweep_up()
                child.process = None
                child.faults = 1 if now - child.started > STEADY_AFTER else child.faults + 1
                pause = min(LONGEST_PAUSE, 2.0 ** (child.faults - 1))
                child.due = now + pause
                self.say(f"The {child.name} stopped ({_ending(code)}); it is started again in {pause:.0f} s.")
            elif now >= child.due:
                child.before_restart()
                child.start()
                self.say(f"The {child.name} was started again.")

    def stop(self) -> None:
        """End every child tidily, then whatever is left of them."""
        for child in self.children:
            child.signal(signal.SIGTERM)
        deadline = time.monotonic() + PATIENCE
        for child in self.children:
            if child.process is not None:
                with suppress(subprocess.TimeoutExpired):
                    child.process.wait(timeout=max(0.0, deadline - time.monotonic()))
        for child in self.children:
            child.sweep_up()
            if child.process is not None:
                child.process.wait()

    def _told_to_stop(self, number: int, frame: FrameType | None) -> None:
        self.stopping = True


def _ending(code: int) -> str:
    return f"signal {signal.Signals(-code).name}" if code < 0 else f"exit code {code}"


def _end_with_parent() -> None:
    """Ask Linux to end this child should its parent be killed outright."""
    ctypes.CDLL(None).prctl(_PR_SET_PDEATHSIG, signal.SIGTERM)
