"""The shop's Celery app with work for the tests: `celery -A tests.base.worker_app worker`."""

import time
import uuid
from typing import Any

import django

django.setup()  # Celery does this only after it has loaded its app

from shop.base.jobs import Running, job_kind
from shop.celery import app

__all__ = ["app"]

STEPS = 6


@job_kind("test.steps")
def steps(job: Running) -> dict[str, Any]:
    """Lay a mark at each step; a step done twice would leave two, as their codes differ."""
    from shop.base.models import Place

    for n in range(job.done, STEPS):
        time.sleep(job.args["pause"])
        with job.effect(done=n + 1, total=STEPS, note=f"step {n + 1}"):
            Place.objects.create(code=uuid.uuid4().hex[:20], name=f"{job.key} {n}", kind="shelf")
    return {"steps": STEPS}
