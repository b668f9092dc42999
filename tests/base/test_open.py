"""`manage.py open`, as a person runs it: from outside, in a folder of its own."""

import os
import re
import signal
import socket
import sqlite3
import stat
import subprocess
import sys
import time
import urllib.request
from pathlib import Path

import pytest
from django.conf import settings

from tests.base.workers import wait_for

pytestmark = [pytest.mark.workers, pytest.mark.slow]

FLAGS = [
    "--shop-name", "Ardenbeck Race Works", "--country", "US", "--units", "us", "--time-zone", "America/Chicago",
    "--height-m", "180", "--manager", "Pat Manager",
]  # fmt: skip
MANAGE = [sys.executable, str(settings.BASE_DIR / "manage.py")]


class Opened:
    """A shop that was opened from outside."""

    def __init__(self, home: Path, *argv: str) -> None:
        self.log = home.parent / f"log-{time.monotonic_ns()}"
        with self.log.open("wb") as log:
            self.process = subprocess.Popen(
                [*MANAGE, "open", "--port", "0", *argv], env=environment(home), stdout=log, stderr=log,
                stdin=subprocess.DEVNULL, start_new_session=True,
            )  # fmt: skip

    def said(self) -> str:
        return self.log.read_text(encoding="utf-8")

    @property
    def address(self) -> str:
        found = re.search(r"http://127\.0\.0\.1:\d+/", self.said())
        return found[0] if found else ""

    def until_open(self) -> "Opened":
        wait_for(lambda: self.process.poll() is not None or bool(self.address), "the shop to open", 60)
        assert self.process.poll() is None, self.said()
        return self

    def close(self) -> int:
        if self.process.poll() is None:
            self.process.send_signal(signal.SIGINT)
        return self.process.wait(timeout=40)


def environment(home: Path) -> dict[str, str]:
    ours = {k: v for k, v in os.environ.items() if k not in ("DATABASE_URL", "DJANGO_SETTINGS_MODULE")}
    return {k: v for k, v in ours.items() if not k.startswith("TAREBOOK_")} | {"TAREBOOK_HOME": str(home)}


@pytest.fixture
def home(tmp_path):
    return tmp_path / "shop"


@pytest.fixture
def open_shop(home):
    opened = []

    def start(*argv: str) -> Opened:
        opened.append(Opened(home, *argv))
        return opened[-1]

    yield start
    for one in opened:
        one.close()
        print(one.said())


def refused(home: Path, *argv: str, **more: str) -> str:
    """Run `open`, which must end by itself with code 2; returns its one sentence."""
    told = subprocess.run(
        [*MANAGE, "open", *argv], env=environment(home) | more, capture_output=True, text=True, timeout=60,
        stdin=subprocess.DEVNULL, check=False,
    )  # fmt: skip
    assert told.returncode == 2, told.stderr
    assert "Traceback" not in told.stderr
    assert len(told.stderr.strip().splitlines()) == 1, told.stderr
    assert told.stdout == ""
    return told.stderr


def children(pid: int) -> list[int]:
    """Return the processes that descend from one (Linux)."""
    out = []
    for task in Path(f"/proc/{pid}/task").glob("*/children"):
        for child in map(int, task.read_text(encoding="ascii").split()):
            out += [child, *children(child)]
    return out


def running(pid: int) -> bool:
    try:
        return Path(f"/proc/{pid}/stat").read_text(encoding="ascii").rpartition(")")[2].split()[0] != "Z"
    except FileNotFoundError:
        return False


def get(address: str) -> int:
    with urllib.request.urlopen(address, timeout=20) as answer:
        return answer.status


def test_a_new_shop_opens_keeps_everything_and_closes_without_a_trace(home, open_shop):
    first = open_shop(*FLAGS).until_open()
    assert get(first.address + "healthz") == 200
    printed = re.findall(r"^manager (\S+) (\S+)$", first.said(), re.MULTILINE)
    assert len(printed) == 1
    assert stat.S_IMODE(home.stat().st_mode) == 0o700
    assert stat.S_IMODE((home / "secret").stat().st_mode) == 0o600
    secret = (home / "secret").read_text(encoding="ascii")
    wait_for(lambda: len(children(first.process.pid)) >= 6, "server, worker, clock and their children")
    family = children(first.process.pid)
    assert first.close() == 0
    assert not [pid for pid in family if running(pid)]

    second = open_shop().until_open()  # asks nothing
    assert get(second.address + "healthz") == 200
    assert "manager" not in second.said()
    assert (home / "secret").read_text(encoding="ascii") == secret
    assert second.close() == 0


def test_a_child_killed_outright_is_started_again_and_said_so(home, open_shop):
    shop = open_shop(*FLAGS).until_open()
    wait_for(lambda: len(children(shop.process.pid)) >= 6, "all children")
    family = children(shop.process.pid)
    server = next(pid for pid in family if b"gunicorn" in Path(f"/proc/{pid}/cmdline").read_bytes())
    os.kill(server, signal.SIGKILL)
    wait_for(lambda: "web server was started again" in shop.said(), "the web server")
    assert get(shop.address + "healthz") == 200
    assert "signal SIGKILL" in shop.said()


def test_a_second_open_on_the_same_folder_says_so(home, open_shop):
    open_shop(*FLAGS).until_open()
    assert "open already" in refused(home, "--port", "0")


def test_a_port_in_use_is_named(home):
    with socket.socket() as other:
        other.bind(("127.0.0.1", 0))
        other.listen()
        port = other.getsockname()[1]
        assert str(port) in refused(home, "--port", str(port), *FLAGS)
    assert "99999" in refused(home, "--port", "99999", *FLAGS)


def test_a_data_folder_that_cannot_be_written_is_named(tmp_path):
    (tmp_path / "file").write_text("not a folder", encoding="ascii")
    home = tmp_path / "file" / "shop"
    assert str(home) in refused(home, *FLAGS)


def test_a_database_from_a_newer_version_is_left_alone(home, open_shop):
    open_shop(*FLAGS).until_open().close()
    with sqlite3.connect(home / "tarebook.sqlite3") as database:
        database.execute(
            "INSERT INTO django_migrations (app, name, applied) VALUES ('base', '9999_later', '2030-01-01')"
        )
    database.close()
    assert "9999_later" in refused(home, "--port", "0")


def test_a_new_shop_with_nobody_to_ask_names_the_flags_it_lacks(home):
    told = refused(home, "--port", "0", "--country", "US", "--units", "us")
    for flag in ("--shop-name", "--time-zone", "--height-m", "--manager"):
        assert flag in told
    assert "--country" not in told


@pytest.mark.parametrize(
    ("flag", "value"),
    [("--country", "XX"), ("--units", "stone"), ("--time-zone", "Mars/Base"), ("--height-m", "9000"),
     ("--height-m", "high"), ("--shop-name", "  "), ("--manager", "x" * 121)],
)  # fmt: skip
def test_a_wrong_flag_is_named_and_nothing_is_founded(home, flag, value):
    given = dict(zip(FLAGS[::2], FLAGS[1::2], strict=True)) | {flag: value}
    argv = [word for pair in given.items() for word in pair]
    assert flag in refused(home, "--port", "0", *argv)
    with sqlite3.connect(home / "tarebook.sqlite3") as database:
        assert database.execute("SELECT count(*) FROM base_shop").fetchone() == (0,)
    database.close()


def test_reachable_from_elsewhere_it_must_be_told_how(home):
    assert "--address" in refused(home, "--host", "0.0.0.0", "--port", "0", *FLAGS)
    told = refused(home, "--host", "0.0.0.0", "--port", "0", "--address", "http://bottles.example", *FLAGS)
    assert "http" in told


def test_looking_and_checking_make_no_data_folder(home):
    for argv in (["check"], ["help"], ["makemigrations", "--check", "--dry-run"]):
        subprocess.run([*MANAGE, *argv], env=environment(home), capture_output=True, timeout=60, check=False)
    assert not home.exists()
