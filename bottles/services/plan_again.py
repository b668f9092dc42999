"""Today's plan as work: asked for, asked for anew after what changes it, and given up for later work.

Guarantees: an act that changes what a plan rests on asks within its own transaction; where today
isn't planned that costs one query.
"""

from __future__ import annotations

from datetime import timedelta

from bottles.models import DayPlan
from shop.base import clock, jobs
from shop.base.models import Act, Job

KIND = "plan.make"


def ask_to_make(plan: DayPlan, act: Act, bottle: str = "") -> Job:
    """Ask within an act's transaction that a plan is worked out, and keep why."""
    args = {"plan": plan.pk, "day": plan.day.isoformat(), "why": act.code, "bottle": bottle}
    return jobs.ask(KIND, f"{plan.pk} after {act.pk}", args, act.person)


def plan_again(act: Act, bottle: str = "") -> None:
    """Ask within an act's transaction that today's plan is made anew; one query where there is none."""
    recent = act.recorded_at.date() - timedelta(days=1)  # the shop's day may be a day off the clock's
    plan = DayPlan.objects.filter(day__gte=recent).order_by("-id").first()
    if plan is not None and plan.day == clock.today():
        ask_to_make(plan, act, bottle)


def superseded(job_id: int, plan: DayPlan) -> bool:
    """Whether later work will answer for this one: of a newer question, or after a later refill."""
    if DayPlan.objects.filter(day=plan.day, pk__gt=plan.pk).exists():
        return True
    return Job.objects.filter(kind=KIND, state="queued", pk__gt=job_id, args__plan=plan.pk).exists()
