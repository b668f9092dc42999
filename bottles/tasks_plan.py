"""The day's fill plan as work in the background."""

from __future__ import annotations

import time
from typing import Any

from bottles.models import DayPlan
from bottles.services import planning
from bottles.services.plan_again import KIND, superseded
from bottles.services.plan_day import gather
from shop.base.jobs import JobCancelled, Running, job_kind
from shop.base.models import Shop

_TOLD_EVERY = 0.4  # seconds: often enough for whoever watches, seldom enough for the database


@job_kind(KIND)
def make_plan(job: Running) -> dict[str, Any]:
    """Work out a day's plan by what stands in the register now, and keep it."""
    plan, shop = DayPlan.objects.get(pk=job.args["plan"]), Shop.objects.get()
    if superseded(job.id, plan):
        return {"superseded": True}
    told_at = 0.0

    def watch(done: int, total: int) -> None:
        nonlocal told_at
        if time.monotonic() - told_at < _TOLD_EVERY:
            return
        told_at = time.monotonic()
        if job.cancelled():
            raise JobCancelled
        job.progress(done, total, "ways looked at")

    gathered = gather(shop, plan.inputs)
    watch(0, 1)
    told = planning.made(shop, plan.inputs, gathered, watch, patient=True)
    with job.effect():
        cause = {"why": job.args["why"], "bottle": job.args["bottle"]}
        kept = planning.keep(plan, gathered, told, cause, job.id)
        job.finish({"result": kept.pk, "bottles": told["count"]})
    return {}
