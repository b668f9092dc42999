"""A job's row is the truth: what happens around it, in this process."""

import uuid
from datetime import UTC, datetime, timedelta

import pytest
import time_machine
from django.db import OperationalError, transaction
from django.utils import timezone

from shop.base import jobs
from shop.base.errors import Refusal
from shop.base.models import Job, Place
from shop.base.running import Running


@pytest.fixture
def kind(monkeypatch):
    """Register a handler for the length of one test; returns the name of its kind."""

    def register(handler, **options):
        name = f"test.{uuid.uuid4().hex[:8]}"
        jobs.job_kind(name, **options)(handler)
        added.append(name)
        return name

    added: list[str] = []
    yield register
    for name in added:
        jobs._handlers.pop(name)
        jobs._daily.pop(name, None)


@pytest.fixture
def bells(monkeypatch):
    rung: list[int] = []
    monkeypatch.setattr(jobs, "ring", lambda job_id: rung.append(job_id) or True)
    return rung


def mark(name: str) -> None:
    Place.objects.create(code=uuid.uuid4().hex[:20], name=name, kind="shelf")


def asked(kind: str, **values) -> Job:
    return Job.objects.create(kind=kind, key="k", **values)


@pytest.mark.django_db
def test_a_job_keeps_its_result_and_is_done_once(kind):
    calls = []
    job = asked(kind(lambda running: calls.append(running.args) or {"sum": 3}), args={"a": 1})
    jobs.perform(job.pk)
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.state, job.result, job.lease, calls) == ("done", {"sum": 3}, None, [{"a": 1}])
    assert job.finished_at is not None


@pytest.mark.django_db(transaction=True)
def test_the_bell_rings_only_when_the_asking_is_committed(kind, bells):
    name = kind(lambda running: None)
    with transaction.atomic():
        job = jobs.ask(name, "k")
        assert bells == []
    assert bells == [job.pk]
    with pytest.raises(ZeroDivisionError), transaction.atomic():
        jobs.ask(name, "other")
        raise ZeroDivisionError
    assert bells == [job.pk]
    assert Job.objects.count() == 1


@pytest.mark.django_db(transaction=True)
def test_asking_twice_for_one_key_is_one_job_and_one_bell(kind, bells):
    name = kind(lambda running: None)
    assert jobs.ask(name, "k", {"a": 1}) == jobs.ask(name, "k", {"a": 2})
    assert len(bells) == 1
    assert Job.objects.get().args == {"a": 1}


@pytest.mark.django_db
def test_nobody_can_ask_for_work_that_nobody_does():
    with pytest.raises(LookupError):
        jobs.ask("no such kind", "k")


@pytest.mark.django_db(transaction=True)
def test_a_broker_that_is_away_fails_nothing(kind, monkeypatch):
    from shop.celery import app

    def away(*args, **kwargs):
        raise OSError("connection refused")

    monkeypatch.setattr(app, "send_task", away)
    job = jobs.ask(kind(lambda running: None), "k")
    job.refresh_from_db()
    assert job.state == "queued"


@pytest.mark.django_db
def test_a_refusal_is_kept_as_its_sentence(kind):
    def refuse(running):
        raise Refusal("The scale is away.")

    job = asked(kind(refuse))
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.state, job.error) == ("failed", "The scale is away.")


@pytest.mark.django_db
def test_a_fault_is_kept_and_can_be_asked_again(kind):
    faults = [ValueError("odd")]

    def once(running):
        if faults:
            raise faults.pop()
        return {"fine": True}

    job = asked(kind(once))
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.state, job.error) == ("failed", "ValueError: odd")
    assert jobs.ask_again(job)
    assert not jobs.ask_again(job)  # it's queued now
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.state, job.error, job.result) == ("done", "", {"fine": True})


@pytest.mark.django_db
def test_a_busy_database_sends_the_job_back_to_the_queue(kind):
    def busy(running):
        raise OperationalError("database is locked")

    job = asked(kind(busy))
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.state, job.lease, job.tries) == ("queued", None, 1)


@pytest.mark.django_db
def test_an_effect_and_its_progress_happen_together_or_not_at_all(kind):
    def half(running):
        with running.effect(done=1, total=2, note="first"):
            mark("first")
        with running.effect(done=2, total=2):
            mark("second")
            raise ValueError

    job = asked(kind(half))
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.done, job.total, job.note) == (1, 2, "first")
    assert [p.name for p in Place.objects.all()] == ["first"]


@pytest.mark.django_db
def test_a_worker_that_lost_its_lease_writes_nothing(kind):
    """The slow worker wakes up after another has taken and done its job."""

    def slow(running: Running):
        if not taken:
            taken.append(True)
            Job.objects.filter(pk=running.id).update(lease_until=timezone.now() - timedelta(seconds=1))
            jobs.perform(running.id)  # the other worker
        with running.effect(done=1):
            mark("effect")
        return {"by": len(taken)}

    taken: list[bool] = []
    job = asked(kind(slow))
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert job.state == "done"
    assert job.tries == 2
    assert Place.objects.filter(name="effect").count() == 1


@pytest.mark.django_db
def test_finishing_inside_the_last_effect_closes_the_job_with_it(kind):
    def handler(running: Running):
        with running.effect():
            mark("effect")
            running.finish({"marks": 1})

    job = asked(kind(handler))
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.state, job.result) == ("done", {"marks": 1})


@pytest.mark.django_db
def test_a_held_job_is_taken_only_when_its_lease_ran_out(kind):
    name = kind(lambda running: {"done": running.done})
    later = timezone.now() + timedelta(seconds=30)
    job = asked(name, state="running", lease=uuid.uuid4(), lease_until=later, tries=1, done=4)
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert job.state == "running"
    with time_machine.travel(later + timedelta(seconds=1)):
        jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.state, job.result, job.tries) == ("done", {"done": 4}, 2)


@pytest.mark.django_db
def test_a_job_that_kills_its_worker_again_and_again_is_given_up(kind):
    name = kind(lambda running: pytest.fail("it must not be begun again"))
    job = asked(
        name, state="running", lease=uuid.uuid4(), lease_until=timezone.now() - timedelta(1), tries=jobs.MOST_TRIES
    )
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert job.state == "failed"
    assert job.error


@pytest.mark.django_db
def test_a_waiting_job_is_cancelled_at_once_and_a_running_one_at_a_tidy_place(kind):
    def stoppable(running: Running):
        for n in range(10):
            with running.effect(done=n + 1, total=10):
                mark("effect")
            if n == 2:
                assert jobs.cancel(Job.objects.get(pk=running.id))
            if running.cancelled():
                raise jobs.JobCancelled

    name = kind(stoppable)
    waiting = Job.objects.create(kind=name, key="waiting")
    assert jobs.cancel(waiting)
    assert not jobs.cancel(waiting)
    job = asked(name)
    jobs.perform(job.pk)
    for each in (waiting, job):
        each.refresh_from_db()
    assert (waiting.state, waiting.tries) == ("cancelled", 0)
    assert (job.state, job.done) == ("cancelled", 3)
    assert Place.objects.count() == 3


@pytest.mark.django_db
def test_the_sweeper_rings_for_what_nobody_holds(bells):
    past, future = timezone.now() - timedelta(seconds=1), timezone.now() + timedelta(seconds=60)
    rows = {
        key: Job.objects.create(kind="x", key=key, state=state, lease_until=until).pk
        for key, state, until in [
            ("queued", "queued", None),
            ("lapsed", "running", past),
            ("held", "running", future),
            ("done", "done", None),
            ("failed", "failed", None),
        ]
    }
    assert jobs.sweep() == [rows["queued"], rows["lapsed"]] == bells


@pytest.mark.django_db
def test_opening_takes_back_the_leases_of_workers_that_are_gone():
    job = asked("x", state="running", lease=uuid.uuid4(), lease_until=timezone.now() + timedelta(60), tries=4, done=2)
    assert jobs.release_all() == 1
    job.refresh_from_db()
    assert (job.state, job.lease, job.tries, job.done) == ("queued", None, 0, 2)


@pytest.mark.django_db
def test_daily_work_is_asked_once_a_shop_day_whenever_the_clock_looks(kind, bells, shop):
    name = kind(lambda running: None, daily_from_hour=3)

    def keys():
        return sorted(Job.objects.filter(kind=name).values_list("key", flat=True))

    # America/Chicago is UTC−6 in January: 08:59 UTC is 02:59 there.
    for instant, expected in [
        (datetime(2026, 1, 10, 8, 59, tzinfo=UTC), []),
        (datetime(2026, 1, 10, 9, 0, tzinfo=UTC), ["2026-01-10"]),
        (datetime(2026, 1, 10, 9, 5, tzinfo=UTC), ["2026-01-10"]),
        (datetime(2026, 1, 11, 4, 0, tzinfo=UTC), ["2026-01-10"]),  # still the tenth in the shop
        (datetime(2026, 1, 13, 2, 0, tzinfo=UTC), ["2026-01-10", "2026-01-12"]),  # two days off, then late
    ]:
        with time_machine.travel(instant, tick=False):
            jobs.ask_due()
        assert keys() == expected


@pytest.mark.django_db
def test_each_attempt_uses_the_same_key_for_the_act_of_a_step():
    job = Job(pk=7, kind="a", key="b")
    first, second = Running(job, uuid.uuid4()), Running(job, uuid.uuid4())
    assert first.act_key("post") == second.act_key("post")
    assert first.act_key("post") != first.act_key("other")


def test_two_handlers_for_one_kind_are_refused(kind):
    name = kind(lambda running: None)

    def other(running):
        return None

    other.__module__ = "elsewhere"
    with pytest.raises(ValueError, match="two handlers"):
        jobs.job_kind(name)(other)
