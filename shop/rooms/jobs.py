"""Work in the background: how far it is, what came of it, and stopping it."""

from __future__ import annotations

import uuid
from typing import Any

from django.core.exceptions import PermissionDenied
from django.db.models import Count, Max, QuerySet
from django.http import HttpRequest, HttpResponse, HttpResponseRedirect
from django.shortcuts import get_object_or_404, render
from django.urls import reverse
from django.views.decorators.http import require_POST, require_safe

from shop.base import acts, clock, jobs
from shop.base.composed import composed
from shop.base.models import Job, Shop
from shop.base.permissions import DESK, EVERYONE, MANAGERS, allow
from shop.people.acting import ActForm, ActView
from shop.people.models import User, full_name

KINDS = {"demo.fill": "Writing the demo's past", "ledger.check": "Checking the books", "learning.fit": "Learning from the refills",
         "plan.make": "Making the day's fill plan"}  # fmt: skip
RUNNING = ("queued", "running")
LATEST = 40
FOUND_SOMETHING = {"kind": "ledger.check", "result__count__gt": 0}


@allow(MANAGERS, room="office")
def job_list(request: HttpRequest) -> HttpResponse:
    """The latest work, and the way to check the books at once."""
    shop = Shop.objects.get()
    found, many = latest_work()
    rows = [
        {
            "url": reverse("rooms:job", args=[job.pk]),
            "what": what(job),
            "kind": {"done": "yes", "failed": "no", "cancelled": "unknown"}.get(job.state, "open"),
            "state": job.state,
            "when": f"{job.asked_at.astimezone(clock.zone(shop)):%Y-%m-%d %H:%M}",
            "person": full_name(job.asked_by),
            "result": result_words(job),
            "many": many.get(job.pk, 1),
        }
        for job in found
    ]
    return render(request, "rooms/jobs.html", {"rows": rows})


def latest_work() -> tuple[list[Job], dict[int, int]]:
    """The latest work, and for how many of its kind a piece stands.

    What is done again and again would bury the rest: the last of each kind stands for all that went
    well. What is going on, failed, was stopped or found something stays by itself.
    """
    every = Job.objects.select_related("asked_by").order_by("-id")
    alone = [*every.exclude(state="done")[:LATEST], *every.filter(state="done", **FOUND_SOMETHING)[:LATEST]]
    done = Job.objects.filter(state="done").exclude(pk__in=[job.pk for job in alone])
    many = {one["last"]: one["many"] for one in done.order_by().values("kind").annotate(last=Max("pk"), many=Count("pk"))}
    found = sorted([*alone, *every.filter(pk__in=many)], key=lambda job: job.pk, reverse=True)
    return found[:LATEST], many


@allow(EVERYONE, room="office")
@require_safe
def job(request: HttpRequest, pk: int) -> HttpResponse:
    """One piece of work; the part alone where the page asks how far it is."""
    found = get_object_or_404(Job, pk=pk)
    template = "parts/_progress.html" if request.headers.get("HX-Request") else "rooms/job.html"
    return render(request, template, progress(request, found))


@allow(EVERYONE, room="office")
@require_POST
def cancel(request: HttpRequest, pk: int) -> HttpResponse:
    """Ask work to stop after what it's at; what it did stays. A manager may, and whoever asked for it."""
    found = get_object_or_404(Job, pk=pk)
    if not may_stop(request, found):
        raise PermissionDenied
    jobs.cancel(found)
    seen_on_plan = found.kind == "plan.make" and bool(DESK & request.user.roles)  # type: ignore[union-attr]
    return HttpResponseRedirect(reverse("bottles:plan") if seen_on_plan else reverse("rooms:job", args=[found.pk]))


class CheckBooks(ActView):
    """Check the books now, not only at night."""

    roles = MANAGERS
    room = "office"
    form_class = ActForm
    heading = "Check the books now"
    submit = "Check the books"
    said = ""

    def context(self) -> dict[str, Any]:
        return {
            "intro": "Each account is compared with its movements, all together with nothing. It's done every night too.",
            "back_url": reverse("rooms:jobs"),
        }

    def act(self, form: ActForm, person: User, key: uuid.UUID) -> str:
        with acts.begin(key=key, person=person, code="books.check asked", subject="shop"):
            asked = jobs.ask("ledger.check", str(key), person=person)
        return reverse("rooms:job", args=[asked.pk])

    def first_page(self, act: Any) -> str:
        return reverse("rooms:jobs")


def progress(request: HttpRequest, found: Job) -> dict[str, Any]:
    """What `_progress.html` takes."""
    return {
        "job": found,
        "what": what(found),
        "running": found.state in RUNNING,
        "job_url": reverse("rooms:job", args=[found.pk]),
        "cancel_url": reverse("rooms:job_cancel", args=[found.pk]) if may_stop(request, found) else "",
        "result": found.note if found.state in RUNNING else result_words(found),
    }


def may_stop(request: HttpRequest, found: Job) -> bool:
    """Whether who looks may stop a piece of work: a manager, or who asked for it."""
    person: User = request.user  # type: ignore[assignment]
    return bool(MANAGERS & person.roles) or (found.asked_by_id is not None and found.asked_by_id == person.pk)


def going_on(request: HttpRequest) -> dict[str, Any] | None:
    """The first piece of long work that a person waits for, for the head of a room; or None."""
    found = next(iter(_going_on()), None)
    return progress(request, found) if found else None


@composed
def _going_on() -> QuerySet[Job]:
    return Job.objects.filter(kind="demo.fill", state__in=RUNNING).order_by("id")[:1]


def what(found: Job) -> str:
    """Name a job in words."""
    return KINDS.get(found.kind, found.kind)


def result_words(found: Job) -> str:
    """Say what came of a job."""
    if found.kind == "ledger.check" and found.state == "done":
        result = found.result or {}
        differences = result.get("differences", [])
        if not result.get("count"):
            return "The books agree: each account with its movements, all accounts with nothing."
        return f"{result['count']} differences: " + "; ".join(differences)
    if found.kind == "learning.fit" and found.state == "done" and found.result:
        refills, new = found.result["refills"], found.result["new"]
        told = f"{refills} {'refill tells' if refills == 1 else 'refills tell'} how much condenses"
        laid = "no figure changed" if not new else "1 figure is new" if new == 1 else f"{new} figures are new"
        return f"{told}; {laid}."
    if found.kind == "plan.make" and found.state == "done":
        result = found.result or {}
        return "A later plan answers for it." if result.get("superseded") else f"The plan is made, for {result['bottles']} bottles."
    return found.note
