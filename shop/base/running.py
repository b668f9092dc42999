"""What a handler holds while its job runs: the row, its lease, its word to the screen."""

from __future__ import annotations

import uuid
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import timedelta
from typing import Any

from django.conf import settings
from django.db import transaction
from django.db.models import QuerySet

from shop.base.clock import now
from shop.base.models import Job


class JobCancelled(Exception):
    """The person who watches asked to stop; what was done so far stays."""


class LeaseLost(Exception):
    """Another worker took this job over, because this one was silent for longer than its lease."""


class Running:
    """A job in the hands of one worker.

    `done` is how far the job had come when this worker took it: a handler that moves `done` in
    the same transaction as each effect starts there after a crash, and does nothing twice.

        for n in range(job.done, 6):
            with job.effect(done=n + 1, total=6):
                ...write...
    """

    def __init__(self, job: Job, lease: uuid.UUID) -> None:
        self.id: int = job.pk
        self.kind: str = job.kind
        self.key: str = job.key
        self.args: dict[str, Any] = job.args
        self.done: int = job.done
        self.asked_by_id: int | None = job.asked_by_id
        self._lease = lease
        self._finished = False

    def progress(self, done: int, total: int, note: str = "") -> None:
        """Tell the screen how far it is, and keep the lease; not in the middle of an effect."""
        self._hold(done=done, total=total, note=note[:200])

    def cancelled(self) -> bool:
        """Say whether someone asked to stop; a handler then raises JobCancelled at a tidy place."""
        return Job.objects.filter(pk=self.id, cancel_asked=True).exists()

    @contextmanager
    def effect(self, **progress: Any) -> Iterator[None]:
        """Open the short transaction in which the job may write; it holds only with the lease.

        Its first statement writes to the job's row, so a worker that took the job over waits
        for this transaction, or this one finds its lease gone and writes nothing.
        `done`, `total` and `note` move with the effect or not at all.

        Raises LeaseLost.
        """
        with transaction.atomic():
            self._hold(**progress)
            yield

    def finish(self, result: dict[str, Any]) -> None:
        """Close the job; called inside its last effect, the two happen together or not at all."""
        self._hold(
            state="done", result=result, finished_at=now(), lease=None, lease_until=None, error="", cancel_asked=False
        )
        self._finished = True

    @property
    def finished(self) -> bool:
        """Whether the row was closed by this worker."""
        return self._finished

    def act_key(self, step: str) -> uuid.UUID:
        """Return the key of the act for one step: the same in every attempt."""
        return uuid.uuid5(uuid.NAMESPACE_OID, f"tarebook job {self.kind} {self.key} {step}")

    def close(self, state: str, error: str = "") -> bool:
        """Write how the job ended, unless another worker has it; says whether it was written."""
        return bool(
            self._row().update(state=state, error=error, finished_at=now(), lease=None, lease_until=None)
        )

    def give_back(self, error: str) -> bool:
        """Queue it again after a fault that may pass; the sweeper rings for it."""
        return bool(self._row().update(state="queued", error=error, lease=None, lease_until=None))

    def _row(self) -> QuerySet[Job]:
        return Job.objects.filter(pk=self.id, state="running", lease=self._lease)

    def _hold(self, **values: Any) -> None:
        until = now() + timedelta(seconds=settings.JOB_LEASE_SECONDS)
        if not self._row().update(**({"lease_until": until} | values)):
            raise LeaseLost
