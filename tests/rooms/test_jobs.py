"""Work in the background is seen, stopped and explained."""

from __future__ import annotations

import uuid
from typing import Any

import pytest
from django.urls import reverse

from shop.base.models import Job
from tests.factories import BottleFactory, ScaleFactory, weighed

pytestmark = pytest.mark.django_db


def test_the_manager_checks_the_books_and_is_told_that_they_agree(shop: Any, manager: Any, client_of: Any, run_jobs: Any) -> None:
    client, form = client_of(manager), {"form_key": str(uuid.uuid4())}
    answer = client.post(reverse("rooms:check_books"), form)
    assert answer.status_code == 302
    assert client.post(reverse("rooms:check_books"), form).url == reverse("rooms:jobs")  # a second arrival
    assert Job.objects.filter(kind="ledger.check").count() == 1
    run_jobs()
    html = client.get(answer.url).content.decode()
    assert "The books agree" in html and "done" in html


def test_a_difference_in_the_books_is_named(shop: Any, manager: Any, client_of: Any, run_jobs: Any) -> None:
    from bottles.models import Account

    bottle = BottleFactory(code="T-0007")
    weighed(bottle, gross_g=7000, tare_g=6000, scale=ScaleFactory())
    Account.objects.create(kind="bottle", bottle=bottle, balance_g=5)  # as if something had written past the ledger
    client = client_of(manager)
    answer = client.post(reverse("rooms:check_books"), {"form_key": str(uuid.uuid4())})
    run_jobs()
    html = client.get(answer.url).content.decode()
    assert "differences" in html and "T-0007" in html


def test_how_far_work_is_shows_at_the_head_of_the_room_and_alone(shop: Any, front_desk: Any, client_of: Any) -> None:
    job = Job.objects.create(kind="demo.fill", key="demo", state="running", done=40, total=200, note="written up to 2025-03-01")
    client = client_of(front_desk)
    counter = client.get(reverse("rooms:counter")).content.decode()
    assert "40 of 200" in counter and "written up to 2025-03-01" in counter
    assert "Stop this" not in counter  # a manager's
    part = client.get(reverse("rooms:job", args=[job.pk]), headers={"HX-Request": "true"}).content.decode()
    assert "40 of 200" in part and "<html" not in part


def test_the_manager_stops_work(shop: Any, manager: Any, client_of: Any) -> None:
    job = Job.objects.create(kind="demo.fill", key="demo", state="running", done=40, total=200)
    answer = client_of(manager).post(reverse("rooms:job_cancel", args=[job.pk]))
    assert answer.status_code == 302
    job.refresh_from_db()
    assert job.cancel_asked
    assert "stopping after this one" in client_of(manager).get(answer.url).content.decode()


def test_what_is_done_again_and_again_is_one_row_with_its_count_and_buries_nothing(
    shop: Any, manager: Any, client_of: Any, django_assert_max_num_queries: Any
) -> None:
    def job(kind: str, number: int, state: str = "done", **more: Any) -> Job:
        return Job.objects.create(kind=kind, key=f"{kind} {number}", state=state, **more)

    plan = job("plan.make", 1, result={"bottles": 7})
    odd = job("ledger.check", 1, result={"count": 2, "differences": ["T-0007", "T-0008"]})
    job("ledger.check", 2, result={"count": 0, "differences": []})
    failed = [job("learning.fit", number, "failed", note="no disc left") for number in (1, 2)]
    learned = [job("learning.fit", 10 + number, result={"refills": number, "new": 0}) for number in range(60)]
    waits = job("learning.fit", 99, "queued")
    client = client_of(manager)
    answer = client.get(reverse("rooms:jobs"))
    rows = [(row["url"].rstrip("/").split("/")[-1], row["state"], row["many"]) for row in answer.context["rows"]]
    checked = Job.objects.get(key="ledger.check 2")
    assert rows == [
        (str(one.pk), state, many) for one, state, many in (
            (waits, "queued", 1), (learned[-1], "done", 60), (failed[1], "failed", 1), (failed[0], "failed", 1),
            (checked, "done", 1), (odd, "done", 1), (plan, "done", 1),
        )
    ]  # fmt: skip
    html = answer.content.decode()
    assert "59 refills tell how much condenses; no figure changed. · the latest of 60" in html
    assert html.count("the latest of") == 1 and "2 differences: T-0007; T-0008" in html
    with django_assert_max_num_queries(20):
        client.get(reverse("rooms:jobs"))
