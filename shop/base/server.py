"""Gunicorn's settings: `gunicorn -c python:shop.base.server shop.wsgi`.

The app is loaded once and forked, so that workers share its memory. CoolProp takes seconds to
load: the first workers answer without it while the parent loads it, with the table of saturation
and every page, then the parent puts workers that share all that in their place, each old one
finishing what it has in hand.
"""

from __future__ import annotations

import os
import signal
import threading
from contextlib import suppress
from typing import Any

preload_app = True
control_socket_disable = True
worker_class = "gthread"
workers = int(os.environ.get("TAREBOOK_WEB_WORKERS", "2"))
threads = 4
timeout = 60
graceful_timeout = 8
keepalive = 5
loglevel = "warning"
proc_name = "tarebook"
worker_tmp_dir = "/dev/shm" if os.path.isdir("/dev/shm") else None


def when_ready(server: Any) -> None:
    """Begin to load the fluid while the first workers already answer."""
    threading.Thread(target=_warm, args=(server,), name="warm", daemon=True).start()


def post_fork(server: Any, worker: Any) -> None:
    """A connection must not be shared between processes."""
    from django.db import connections

    connections.close_all()


def _warm(server: Any) -> None:
    while len(server.WORKERS) < server.num_workers:
        threading.Event().wait(0.2)
    threading.Event().wait(1.0)  # let the first page out before two cores are busy
    from django.urls import get_resolver

    from shop.physics.fluid import load
    from shop.physics.saturation_table import saturation_table

    load()
    saturation_table()
    get_resolver().url_patterns  # noqa: B018 reading them imports the pages
    for pid in list(server.WORKERS):
        with suppress(ProcessLookupError):
            os.kill(pid, signal.SIGTERM)
