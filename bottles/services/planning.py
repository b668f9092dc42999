"""The day's fill plan: asked for, worked out, and kept.

Guarantees: a question and its first answer stand in one act, or the work is asked for in it; a plan
that is being made leaves the last one visible; working out writes nothing but its result.
"""

from __future__ import annotations

import uuid
from collections.abc import Mapping
from typing import Any

from bottles.models import DayPlan, DayPlanResult
from bottles.rules.planning.heuristic import Watch
from bottles.rules.planning.told import work_out
from bottles.services.plan_again import ask_to_make
from bottles.services.plan_day import Gathered, gather
from shop.base import acts, clock
from shop.base.models import Shop
from shop.people.models import User

AT_ONCE = 8  # bottles that a page works out itself: more take a job


def ask_for_plan(*, key: uuid.UUID, person: User, shop: Shop, inputs: Mapping[str, Any]) -> DayPlan:
    """Plan today; a small day is worked out before the act, a large one in the background."""
    gathered = gather(shop, inputs)
    small = len(gathered.day.bottles) <= AT_ONCE
    told = made(shop, inputs, gathered) if small else None
    today = clock.today(shop)
    with acts.begin(key=key, person=person, code="plan.asked", subject="plan", changes={"day": today.isoformat()}) as act:
        plan = DayPlan.objects.create(act=act, day=today, inputs=dict(inputs))
        if told is None:
            ask_to_make(plan, act)
        else:
            keep(plan, gathered, told, {"why": "asked", "bottle": ""})
    return plan


def made(
    shop: Shop, inputs: Mapping[str, Any], gathered: Gathered, watch: Watch | None = None, *, patient: bool = False
) -> dict[str, Any]:
    """Work a day out: the plan with all that is said beside it."""
    return work_out(gathered.day, watch, patient=patient) | gathered.beside(shop, inputs)


def keep(
    plan: DayPlan, gathered: Gathered, told: dict[str, Any], cause: dict[str, str], job_id: int | None = None
) -> DayPlanResult:
    """Insert a result within a transaction."""
    return DayPlanResult.objects.create(
        plan=plan, job_id=job_id, after_act=gathered.after_act, made_at=gathered.now, result=told | {"cause": cause}
    )
