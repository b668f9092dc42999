"""`manage.py open`: the whole shop from one command, with no outside service."""

from __future__ import annotations

import os
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from argparse import ArgumentParser
from collections.abc import Callable
from importlib import import_module
from typing import Any

from django.conf import settings
from django.core.exceptions import ValidationError
from django.core.management import BaseCommand, call_command
from django.db import DatabaseError, connection
from django.db.migrations.executor import MigrationExecutor

from shop.base import datafolder, founding, jobs
from shop.base.datafolder import CannotOpen
from shop.base.errors import Refusal
from shop.base.models import Job, Shop
from shop.base.permissions import ROLE_WORDS
from shop.base.supervise import Child, Supervisor

LOOPBACK = ("127.0.0.1", "localhost", "::1")


class Command(BaseCommand):
    help = "Open the shop: data folder, database, web server, background worker and clock. Ctrl-C stops all of it."

    def add_arguments(self, parser: ArgumentParser) -> None:
        parser.add_argument("--demo", action="store_true", help="the invented shop, filled while you look around")
        parser.add_argument("--host", default="127.0.0.1", help="address to listen at (default: this machine only)")
        parser.add_argument("--port", type=int, default=8000, help="port to listen at; 0 takes a free one")
        parser.add_argument("--address", default="", help="how other machines reach it: https://bottles.example")
        parser.add_argument("--plain-http", action="store_true", help="accept unprotected http on a closed network")
        for question in founding.QUESTIONS:
            parser.add_argument("--" + question.option.replace("_", "-"), help=question.words)

    def handle(self, *args: Any, **options: Any) -> None:
        try:
            self._open(options)
        except CannotOpen as error:
            self.stderr.write(str(error))
            sys.exit(2)
        except KeyboardInterrupt:
            self.stderr.write("Stopped.")
            sys.exit(130)

    def _say(self, sentence: str) -> None:
        self.stdout.write(sentence)
        self.stdout.flush()

    def _open(self, options: dict[str, Any]) -> None:
        datafolder.prepare()
        lock = datafolder.hold()
        try:
            if _embedded():
                datafolder.empty_bells(control=True)
            listening = _listen(options["host"], options["port"])
            with listening:
                env = self._environment(options, listening)
                _migrate()
                sign_ins = _found(options, self._say)
                datafolder.gather_static()
                self._serve(env, listening, options["host"], sign_ins)
        finally:
            os.close(lock)

    def _environment(self, options: dict[str, Any], listening: socket.socket) -> dict[str, str]:
        """What the children are told; where others can reach it, that it's fit to be reached."""
        env = os.environ | {
            "DJANGO_SETTINGS_MODULE": os.environ.get("DJANGO_SETTINGS_MODULE", "shop.settings"),
            "TAREBOOK_HOME": str(settings.TAREBOOK_HOME),
            "PYTHONPATH": os.pathsep.join(filter(None, [str(settings.BASE_DIR), os.environ.get("PYTHONPATH", "")])),
        }
        if options["address"]:
            env["TAREBOOK_ADDRESS"] = options["address"]
        if options["plain_http"]:
            env["TAREBOOK_PLAIN_HTTP"] = "yes"
        if options["host"] not in LOOPBACK:
            if not env.get("TAREBOOK_ADDRESS"):
                raise CannotOpen(
                    f"At {options['host']} other machines can reach the shop: say by which address with --address, "
                    "for instance --address https://bottles.example."
                )
            told = subprocess.run(
                [sys.executable, str(settings.BASE_DIR / "manage.py"), "check"],
                env=env, capture_output=True, text=True, timeout=120, check=False,
            )  # fmt: skip
            if told.returncode:
                raise CannotOpen(told.stderr.strip().rpartition("\n")[2].partition("ImproperlyConfigured: ")[2]
                                 or told.stderr)  # fmt: skip
        return env

    def _serve(
        self, env: dict[str, str], listening: socket.socket, host: str, sign_ins: list[tuple[str, str, str]]
    ) -> None:
        if _embedded() and connection.vendor == "sqlite":
            jobs.release_all()  # the lock is ours, so no worker of this database is alive
        jobs.sweep()  # what an earlier day left open goes on at once
        connection.close()

        supervisor = Supervisor(self._say)
        supervisor.listen()
        port = listening.getsockname()[1]
        address = f"http://{'[::1]' if ':' in host else '127.0.0.1'}:{port}/"
        celery = [sys.executable, "-m", "celery", "--quiet", "-A", "shop.celery"]
        try:
            supervisor.add(
                Child("web server", [sys.executable, "-m", "gunicorn", "-c", "python:shop.base.server",
                                     "--bind", f"fd://{listening.fileno()}", "shop.wsgi"],
                      env, fds=[listening.fileno()])
            )  # fmt: skip
            self._wait_for(address + "healthz", supervisor)
            if not supervisor.stopping:
                self._greet(env.get("TAREBOOK_ADDRESS") or address, sign_ins)
                supervisor.add(
                    Child("background worker", [*celery, "worker", "--loglevel", "WARNING", "--concurrency", "2",
                                                "--without-gossip", "--without-mingle", "--without-heartbeat"],
                          env, before_restart=_drop_torn_bells)
                )  # fmt: skip
                supervisor.add(Child("clock", [*celery, "beat", "--loglevel", "WARNING", "--pidfile", ""], env))
        finally:
            supervisor.run()
            self._say("The shop is closed.")

    def _wait_for(self, address: str, supervisor: Supervisor) -> None:
        while not supervisor.stopping:
            supervisor.look(time.monotonic())
            try:
                with urllib.request.urlopen(address, timeout=5):
                    return
            except (urllib.error.URLError, OSError):
                time.sleep(0.05)

    def _greet(self, address: str, sign_ins: list[tuple[str, str, str]]) -> None:
        self._say(f"The shop is open at {address} (Ctrl-C closes it).")
        if sign_ins:
            self._say("Sign in as (role name password; printed this once):")
            for sign_in in sign_ins:
                self._say(" ".join(sign_in))


def _embedded() -> bool:
    return bool(settings.BROKER_URL.startswith("filesystem:"))


def _drop_torn_bells() -> None:
    if _embedded():
        datafolder.empty_bells(control=False)


def _listen(host: str, port: int) -> socket.socket:
    """Take the port before anything else is done; it stays ours while the web server starts again."""
    listening = socket.socket(socket.AF_INET6 if ":" in host else socket.AF_INET)
    try:
        listening.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        listening.bind((host, port))
        listening.listen(128)
    except (OSError, OverflowError) as error:
        listening.close()
        reason = getattr(error, "strerror", None) or str(error)
        raise CannotOpen(
            f"The port {port} at {host} can't be taken ({reason}): stop what uses it, or choose another with --port."
        ) from error
    return listening


def _migrate() -> None:
    """Bring the database to this version, unless it comes from a newer one."""
    try:
        executor = MigrationExecutor(connection)
        loader = executor.loader
        ours = {app for app, _ in loader.disk_migrations or {}}
        foreign = sorted(
            f"{app} {name}"
            for app, name in loader.applied_migrations or {}
            if app in ours and (app, name) not in (loader.disk_migrations or {})
        )
    except DatabaseError as error:
        raise CannotOpen(f"The database can't be opened ({error}): look at DATABASE_URL or the data folder.") from error
    if foreign:
        raise CannotOpen(
            f"The database comes from a newer version of Tarebook ({foreign[0]}): open it with that version, "
            "or name another folder in TAREBOOK_HOME."
        )
    if executor.migration_plan(loader.graph.leaf_nodes()):
        call_command("migrate", interactive=False, verbosity=0)


def _found(options: dict[str, Any], say: Callable[[str], None]) -> list[tuple[str, str, str]]:
    """Make the shop where there is none yet; returns the sign-ins to print this once."""
    if Shop.objects.exists():
        if options["demo"] and not Job.objects.filter(kind="demo.fill").exists():
            say("This data folder holds a shop already, so the demo stays out of it.")
        return []
    # Named here, not imported at the head: this command stands at the very top of the house, but
    # its folder belongs to the lowest app.
    found_shop = import_module("shop.people.services").found_shop
    if not options["demo"]:
        new = founding.answers(options)
        try:
            _, manager = found_shop(**new)
        except (Refusal, ValidationError) as error:
            raise CannotOpen(getattr(error, "sentence", "") or "; ".join(getattr(error, "messages", []))) from error
        return [("manager", manager.sign_in_name, new["manager_password"])]
    wishes = founding.demo_wishes(options)
    # The job first: should this be cut off between the two, the next start finds no shop and goes on.
    jobs.ask("demo.fill", "demo")
    everyone: list[tuple[str, str, str]] = list(import_module("shop.demo.people").demo_people(**wishes))
    single = set(ROLE_WORDS.values())
    return [row for row in everyone if row[0] in single]  # one a role; whoever holds several is on the people page
