"""The three bells that Celery carries; what they do is in shop.base.jobs."""

from __future__ import annotations

from celery import shared_task

from shop.base import jobs


@shared_task(name="base.run_job")
def run_job(job_id: int) -> None:
    """Do one job."""
    jobs.perform(job_id)


@shared_task(name="base.sweep")
def sweep() -> None:
    """Ring again for what is open and held by nobody."""
    jobs.sweep()


@shared_task(name="base.ask_due")
def ask_due() -> None:
    """Ask for the daily work that is due."""
    jobs.ask_due()
