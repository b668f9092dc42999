"""The day's fill plan: what it was asked for, and what was worked out each time.

Always: a question is never changed, a new one is a new row; a result can be recomputed. The plan is
made anew as refills are logged, so a question has several results and the latest holds.
"""

from __future__ import annotations

from django.db import models

from shop.base.facts import Fact
from shop.base.models import Job


class DayPlan(Fact):
    """What a day is planned with: people, minutes a fill, freezer, hours, the shop's *good enough*."""

    day = models.DateField()
    inputs = models.JSONField()

    class Meta:
        indexes = [models.Index(fields=["day", "-id"], name="day_plan_latest")]

    def __str__(self) -> str:
        return f"plan for {self.day}"


class DayPlanResult(models.Model):
    """One working out of a day's plan."""

    plan = models.ForeignKey(DayPlan, on_delete=models.PROTECT, related_name="results")
    job = models.ForeignKey(Job, null=True, on_delete=models.PROTECT, related_name="+")
    after_act = models.PositiveBigIntegerField()  # key of the latest act that it knows of
    made_at = models.DateTimeField()
    result = models.JSONField()

    class Meta:
        indexes = [models.Index(fields=["plan", "-id"], name="day_plan_result_latest")]

    def __str__(self) -> str:
        return f"{self.plan}, made {self.made_at}"
