"""Opening a new shop at a terminal: questions, one after the other, asked again where the answer is wrong."""

import os
import pty
import re
import select
import signal
import subprocess
import time

import pytest

from tests.base.test_open import MANAGE, environment

pytestmark = [pytest.mark.workers, pytest.mark.slow]


class Terminal:
    """A person at a terminal: reads up to a question, types an answer."""

    def __init__(self, home, *argv: str) -> None:
        self.ours, theirs = pty.openpty()
        self.process = subprocess.Popen(
            [*MANAGE, "open", "--port", "0", *argv], env=environment(home), stdin=theirs, stdout=theirs, stderr=theirs,
            start_new_session=True,
        )  # fmt: skip
        os.close(theirs)
        self.seen = ""

    def expect(self, words: str) -> str:
        deadline = time.monotonic() + 60
        while not re.search(words, self.seen):
            ready, _, _ = select.select([self.ours], [], [], max(0.0, deadline - time.monotonic()))
            assert ready, f"waited for {words!r}; saw {self.seen!r}"
            self.seen += os.read(self.ours, 4096).decode()
        found = re.search(words, self.seen)
        assert found
        self.seen = self.seen[found.end() :]
        return found[0]

    def type(self, text: str) -> None:
        os.write(self.ours, f"{text}\n".encode())

    def close(self) -> None:
        if self.process.poll() is None:
            self.process.send_signal(signal.SIGINT)
            while self.process.poll() is None:  # a full terminal would stop what still speaks
                if select.select([self.ours], [], [], 0.1)[0]:
                    try:
                        os.read(self.ours, 4096)
                    except OSError:
                        break
        self.process.wait(timeout=40)
        os.close(self.ours)


@pytest.fixture
def terminal(tmp_path):
    terminal = Terminal(tmp_path / "shop", "--country", "ca", "--height-m", "-12")
    yield terminal
    terminal.close()


def test_what_no_flag_gives_is_asked_until_it_is_right(terminal):
    terminal.expect("Name of the shop.*: ")
    terminal.type("   ")
    terminal.expect("can't be empty")
    terminal.expect("Name of the shop.*: ")
    terminal.type("Ardenbeck Race Works")
    terminal.expect("Units.*: ")
    terminal.type("Metric")
    terminal.expect("Time zone.*: ")
    terminal.type("Nowhere")
    terminal.expect("must be the name of a time zone")
    terminal.expect("Time zone.*: ")
    terminal.type("America/Toronto")
    terminal.expect("first manager.*: ")
    terminal.type("Pat Manager")
    terminal.expect("Password.*: ")
    terminal.type("")
    terminal.expect(r"The shop is open at http://127\.0\.0\.1:\d+/")
    terminal.expect(r"manager \S+ \S+")
