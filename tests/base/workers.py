"""Real workers, started on the database of the test that runs."""

from __future__ import annotations

import os
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from urllib.parse import quote

from django.conf import settings
from django.db import connection

REDIS = ("127.0.0.1", 6379)


def redis_answers() -> bool:
    try:
        with socket.create_connection(REDIS, timeout=1):
            return True
    except OSError:
        return False


def database_url() -> str:
    """Return where another process finds the test database."""
    one = connection.settings_dict
    if connection.vendor == "sqlite":
        return f"sqlite:///{one['NAME']}"
    who = quote(one["USER"]) + (f":{quote(one['PASSWORD'])}" if one["PASSWORD"] else "")
    return f"postgres://{who}@{quote(one['HOST'], safe='')}:{one['PORT'] or 5432}/{one['NAME']}"


def environment(home: Path, broker: str, queue: str) -> dict[str, str]:
    return os.environ | {
        "DJANGO_SETTINGS_MODULE": "shop.settings",
        "DATABASE_URL": database_url(),
        "TAREBOOK_HOME": str(home),
        "TAREBOOK_BROKER_URL": broker,
        "TAREBOOK_QUEUE": queue,
        "TAREBOOK_JOB_LEASE_SECONDS": "2",
        "TAREBOOK_JOB_SWEEP_SECONDS": "1",
    }


def wait_for(truth: Callable[[], bool], what: str, seconds: float = 45) -> None:
    deadline = time.monotonic() + seconds
    while not truth():
        assert time.monotonic() < deadline, f"waited {seconds} s for {what}"
        time.sleep(0.05)


class Crew:
    """A worker and a clock, each in a process group of its own."""

    def __init__(self, env: dict[str, str], log: Path) -> None:
        self.env = env
        self.log = log
        self.started: list[subprocess.Popen[bytes]] = []

    def worker(self) -> subprocess.Popen[bytes]:
        return self._celery(
            "worker", "--concurrency", "1", "--without-gossip", "--without-mingle", "--without-heartbeat"
        )

    def clock(self) -> subprocess.Popen[bytes]:
        return self._celery("beat", "--pidfile", "")

    def ask(self, kind: str, key: str, args: str) -> None:
        """Ask for a job as a web server would: from another process, with the bell rung on commit."""
        program = (
            "import django; django.setup()\n"
            "import tests.base.worker_app\n"
            "from shop.base import jobs\n"
            f"jobs.ask({kind!r}, {key!r}, {args})\n"
        )
        subprocess.run(
            [sys.executable, "-c", program], env=self.env, cwd=settings.BASE_DIR, check=True, timeout=60
        )

    def kill(self, process: subprocess.Popen[bytes]) -> None:
        """End it and its children outright, as a power cut would."""
        os.killpg(process.pid, signal.SIGKILL)
        process.wait(timeout=20)

    def wait_for(self, truth: Callable[[], bool], what: str, seconds: float = 45) -> None:
        """Wait for something to become true, or for a worker to end by itself."""

        def true_or_broken() -> bool:
            ended = [process.args for process in self.started if process.poll() not in (None, -signal.SIGKILL)]
            assert not ended, f"ended by itself: {ended}"
            return truth()

        wait_for(true_or_broken, what, seconds)

    def go_home(self) -> None:
        for process in self.started:
            if process.poll() is None:
                self.kill(process)

    def _celery(self, *argv: str) -> subprocess.Popen[bytes]:
        with self.log.open("ab") as log:
            process = subprocess.Popen(
                [sys.executable, "-m", "celery", "-A", "tests.base.worker_app", *argv, "--loglevel", "INFO"],
                env=self.env, cwd=settings.BASE_DIR, stdout=log, stderr=log, stdin=subprocess.DEVNULL,
                start_new_session=True,
            )  # fmt: skip
        self.started.append(process)
        return process
