"""Work in the background: the job's row is the truth, the broker only rings the bell.

- A service asks for work by name, in its own transaction; the broker is rung on commit. A broker
  that is away fails nothing: the sweeper rings again for whatever is open.
- A worker takes a job by writing a lease into its row. Who holds no lease writes nothing, so two
  bells, a lost bell or a worker killed amid its work still have exactly one effect.
- A lease that ran out (its worker is gone) lets another worker take the job, five times at most.
"""

from __future__ import annotations

import logging
import uuid
from collections.abc import Callable
from datetime import timedelta
from functools import cache
from typing import TYPE_CHECKING, Any

from django.conf import settings
from django.db import InterfaceError, OperationalError, transaction
from django.db.models import F, Q
from django.utils.module_loading import autodiscover_modules

from shop.base.clock import now, today, zone
from shop.base.errors import Refusal
from shop.base.models import Job, Shop
from shop.base.running import JobCancelled, LeaseLost, Running

if TYPE_CHECKING:
    from shop.people.models import User

__all__ = [
    "JobCancelled", "LeaseLost", "Running", "ask", "ask_again", "ask_due", "cancel", "job_kind", "perform",
    "release_all", "ring", "sweep",
]  # fmt: skip

Handler = Callable[[Running], dict[str, Any] | None]

MOST_TRIES = 5
log = logging.getLogger(__name__)
_handlers: dict[str, Handler] = {}
_daily: dict[str, int] = {}


def job_kind(kind: str, *, daily_from_hour: int | None = None) -> Callable[[Handler], Handler]:
    """Register the handler of a kind of job; with an hour, one such job is asked for each shop day."""

    def register(handler: Handler) -> Handler:
        known = _handlers.get(kind)
        if known is not None and known.__module__ != handler.__module__:
            raise ValueError(f"two handlers for the job kind {kind!r}")
        _handlers[kind] = handler
        if daily_from_hour is not None:
            _daily[kind] = daily_from_hour
        return handler

    return register


def ask(
    kind: str, key: str, args: dict[str, Any] | None = None, person: User | None = None
) -> Job:
    """Put a job's row into the caller's transaction; asked twice for one key, it's the same job."""
    if kind not in _kinds():
        raise LookupError(f"no handler for the job kind {kind!r}")
    job, new = Job.objects.get_or_create(kind=kind, key=key, defaults={"args": args or {}, "asked_by": person})
    if new:
        transaction.on_commit(lambda: ring(job.pk), robust=True)
    return job


def ask_again(job: Job) -> bool:
    """Queue a failed or cancelled job once more; it goes on from where it stopped."""
    found = Job.objects.filter(pk=job.pk, state__in=["failed", "cancelled"]).update(
        state="queued", tries=0, error="", note="", cancel_asked=False, finished_at=None
    )
    if found:
        transaction.on_commit(lambda: ring(job.pk), robust=True)
    return bool(found)


def cancel(job: Job) -> bool:
    """Ask a job to stop; one that nobody has begun stops at once."""
    waiting = Job.objects.filter(pk=job.pk, state="queued").update(
        state="cancelled", cancel_asked=True, finished_at=now()
    )
    return bool(waiting or Job.objects.filter(pk=job.pk, state="running").update(cancel_asked=True))


def ring(job_id: int) -> bool:
    """Tell the workers that a job waits; says whether the broker took it."""
    from shop.celery import app

    try:
        app.send_task("base.run_job", [job_id], retry=False, ignore_result=True)
    except Exception as error:  # any broker, any fault: the row stays queued and the sweeper rings again
        log.warning("The broker can't be reached (%s); job %s waits.", error, job_id)
        return False
    return True


def perform(job_id: int) -> None:
    """Do a job, if it's there to be taken; what a worker runs, and a test in its own process."""
    job = _take(job_id)
    if job is None or job.lease is None:
        return
    running = Running(job, job.lease)
    try:
        handler = _kinds().get(job.kind)
        if handler is None:
            raise Refusal("This version of the program has no such work.", code="unknown job kind")
        result = handler(running)
        if not running.finished:
            with running.effect():
                running.finish(result or {})
    except JobCancelled:
        running.close("cancelled")
    except LeaseLost:
        log.warning("Job %s (%s) was taken over by another worker.", job_id, job.kind)
    except (OperationalError, InterfaceError) as error:  # a database that is busy or away: it may pass
        log.warning("Job %s (%s) waits for the database: %s", job_id, job.kind, error)
        running.give_back(str(error))
    except Refusal as refusal:
        running.close("failed", refusal.sentence)
    except Exception as error:
        log.exception("Job %s (%s) failed.", job_id, job.kind)
        running.close("failed", f"{type(error).__name__}: {error}")


def sweep() -> list[int]:
    """Ring again for every open job that nobody holds; returns them."""
    waiting = list(Job.objects.filter(_free()).order_by("id").values_list("id", flat=True)[:100])
    for job_id in waiting:
        if not ring(job_id):
            break
    return waiting


def release_all() -> int:
    """Take every lease away: for the moment of opening, when no worker of this database can be alive."""
    return Job.objects.filter(state="running").update(state="queued", tries=0, lease=None, lease_until=None)


def ask_due() -> list[Job]:
    """Ask for what is due each day and wasn't asked for yet; a missed hour is made good at the next call.

    The job's key is the shop's day, so calling twice, or from two machines, asks once.
    """
    _kinds()
    shop = Shop.objects.first()
    if shop is None:
        return []
    day, hour = today(shop).isoformat(), now().astimezone(zone(shop)).hour
    return [ask(kind, day) for kind, from_hour in sorted(_daily.items()) if hour >= from_hour]


@cache
def _kinds() -> dict[str, Handler]:
    autodiscover_modules("tasks")  # handlers register themselves when their module loads
    return _handlers


def _free() -> Q:
    return Q(state="queued") | Q(state="running", lease_until__lt=now())


def _take(job_id: int) -> Job | None:
    """Write a lease of our own into a free job's row; none if another worker was first."""
    lease = uuid.uuid4()
    with transaction.atomic():
        free = Job.objects.filter(_free(), pk=job_id)
        if free.filter(cancel_asked=True).update(state="cancelled", finished_at=now(), lease=None, lease_until=None):
            return None
        if free.filter(tries__gte=MOST_TRIES).update(
            state="failed", finished_at=now(), lease=None, lease_until=None,
            error="It was begun several times and never came to its end; the log says what stopped it.",
        ):  # fmt: skip
            return None
        until = now() + timedelta(seconds=settings.JOB_LEASE_SECONDS)
        if not free.update(state="running", lease=lease, lease_until=until, tries=F("tries") + 1):
            return None
        return Job.objects.get(pk=job_id)
