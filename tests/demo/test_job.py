"""The job that fills the invented shop: cut off and gone on with, cancelled, kept out of a real shop."""

from collections import Counter
from datetime import date
from itertools import islice

import pytest

from shop.base import jobs
from shop.base.models import Act, Job
from shop.demo import doing, tasks
from shop.demo.world import plan
from shop.people.services import found_shop
from tests.demo.filled import ask, dump, fill, thrown_away

pytestmark = pytest.mark.django_db
DAY = date(2026, 12, 1)


class Killed(BaseException):
    """What no handler catches, like a kill that can't be caught."""


def _counts_here(step):
    """Leave out the bottles that only show a state, for the sake of time."""
    return not any(str(step.values.get(name)).startswith("T-02") for name in ("bottle", "code"))


def test_killed_several_times_it_ends_as_if_nothing_had_been(monkeypatch):
    monkeypatch.setattr(tasks, "plan", lambda **told: filter(_counts_here, plan(**told)))
    with thrown_away():
        fill(DAY)
        unbroken = dump()
    job = ask(DAY)
    kinds = dict(doing._deeds)
    for verb, after in (("custody.in", 2), ("bottle.register", 12), ("refill.weigh", 5)):
        left = iter(range(after))

        def until(doer, step, do=None, left=left):
            if next(left, None) is None:
                raise Killed
            return do(doer, step)

        with monkeypatch.context() as patch:
            patch.setitem(doing._deeds, verb, lambda doer, step, do=kinds[verb], until=until: until(doer, step, do=do))
            with pytest.raises(Killed):
                jobs.perform(job.pk)
        assert Job.objects.get(pk=job.pk).state == "running"
        jobs.release_all()
    jobs.perform(job.pk)
    assert Job.objects.get(pk=job.pk).state == "done"
    assert dump() == unbroken


def test_the_screen_is_told_and_may_cancel(monkeypatch):
    monkeypatch.setattr(tasks, "WORD_EVERY", 0.0)
    plain = tasks.do_all

    def cancelled_meanwhile(steps, **rest):
        for number, step in enumerate(plain(islice(steps, 30), **rest)):
            if number == 20:
                jobs.cancel(Job.objects.get(kind="demo.fill"))
            yield step

    monkeypatch.setattr(tasks, "do_all", cancelled_meanwhile)
    job = ask(DAY)
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert job.state == "cancelled"
    assert 0 < job.done <= 20 < job.total
    assert job.note
    # What was done stays, and asked again it goes on from there.
    monkeypatch.setattr(tasks, "do_all", lambda steps, **rest: plain(islice(steps, 30), **rest))
    assert jobs.ask_again(job)
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert (job.state, job.done) == ("done", 30)
    assert max(Counter(Act.objects.values_list("key", flat=True)).values()) == 1


def test_it_waits_until_the_shop_is_founded():
    job = jobs.ask("demo.fill", "demo")
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert job.state == "queued"


def test_a_real_shop_stays_as_it_is():
    found_shop(
        name="Somebody's own", country="US", units="us", time_zone="America/Chicago", height_m=0, manager_name="Owner",
        manager_password="plain-enough-7",
    )
    acts = Act.objects.count()
    job = jobs.ask("demo.fill", "demo")
    jobs.perform(job.pk)
    job.refresh_from_db()
    assert job.state == "failed"
    assert Act.objects.count() == acts
