"""Fill the invented shop in a test's own process, and write down what it then holds."""

from __future__ import annotations

import json
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import date
from typing import Any

from django.apps import apps
from django.db import models, transaction

from shop.base import jobs
from shop.base.models import Act, Job
from shop.demo.people import demo_people

APPS = ("base", "people", "cars", "bottles")
SECRET = {"password", "last_login"}


def fill(today: date, *, country: str = "US", months: float = 0.25, **wishes: Any) -> Job:
    """Found the invented shop and do its job to the end; returns the job."""
    job = ask(today, country=country, months=months, **wishes)
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert job.state == "done", job.error
    return job


def ask(today: date, *, country: str = "US", months: float = 0.25, **wishes: Any) -> Job:
    """Ask for the job and found the shop, as opening does."""
    job = jobs.ask("demo.fill", "demo", {"today": today.isoformat(), "months": months})
    demo_people(country=country, today=today, password=lambda: "plain-enough-7", **wishes)
    return job


def dump() -> str:
    """Return all rows as text, without keys of rows and without what is random by intent."""
    lines: list[str] = []
    ranks: dict[Any, dict[Any, int]] = {}
    for label in APPS:
        for model in sorted(apps.get_app_config(label).get_models(), key=lambda each: each.__name__):
            if model is Job:
                continue
            for row in model._default_manager.order_by("pk"):
                lines.append(f"{model.__name__} {json.dumps(_plain(row, ranks), sort_keys=True, default=str)}")
    return "\n".join(lines)


@contextmanager
def thrown_away() -> Iterator[None]:
    """Roll back whatever is written inside; acts may begin there as in a test."""
    block = transaction.atomic()
    block._from_testcase = True  # type: ignore[attr-defined]  # else an act, which is durable, refuses to begin
    with block:
        yield
        transaction.set_rollback(True)


def _plain(row: models.Model, ranks: dict[Any, dict[Any, int]]) -> dict[str, Any]:
    values: dict[str, Any] = {}
    for field in row._meta.concrete_fields:
        if field.name in SECRET or (field.primary_key and not field.is_relation):
            continue
        if isinstance(row, Act) and (
            field.name in ("changes", "subject")  # they name rows by their keys
            or (field.name == "key" and row.code.startswith(("person.", "shop.")))
        ):
            continue
        value = getattr(row, field.attname)
        if field.is_relation and value is not None:
            value = _ranks_of(field.related_model, ranks)[value]
        values[field.name] = value
    return values


def _ranks_of(model: Any, ranks: dict[Any, dict[Any, int]]) -> dict[Any, int]:
    """The how-manieth row of its table each is: keys differ between two databases, their order doesn't."""
    if model not in ranks:
        keys = model._default_manager.order_by("pk").values_list("pk", flat=True)
        ranks[model] = {key: number for number, key in enumerate(keys)}
    return ranks[model]
