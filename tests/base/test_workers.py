"""The same jobs through real workers: on message files, and on Redis."""

import uuid

import pytest

from shop.base.models import Job, Place
from tests.base import worker_app
from tests.base.workers import Crew, environment, redis_answers

pytestmark = [pytest.mark.workers, pytest.mark.django_db(transaction=True)]

PAUSE = 0.2


@pytest.fixture(params=["filesystem", "redis"])
def crew(request, tmp_path, transactional_db):
    queue = f"test-{uuid.uuid4().hex[:8]}"
    if request.param == "redis":
        if not redis_answers():
            pytest.skip("needs Redis at 127.0.0.1:6379: apt install redis-server")
        env = environment(tmp_path, "redis://127.0.0.1:6379/0", queue)
    else:
        (tmp_path / "bells" / "control").mkdir(parents=True)
        env = environment(tmp_path, "filesystem://localhost/", queue)
    crew = Crew(env, tmp_path / "log")
    yield crew
    crew.go_home()
    if request.param == "redis":
        import redis

        with redis.Redis() as server:
            server.delete(queue, f"_kombu.binding.{queue}")
    print(crew.log.read_text(encoding="utf-8"))


def state(key: str) -> str:
    return Job.objects.get(key=key).state


def marks(key: str) -> list[str]:
    return sorted(Place.objects.filter(name__startswith=f"{key} ").values_list("name", flat=True))


def each_once(key: str) -> list[str]:
    return [f"{key} {n}" for n in range(worker_app.STEPS)]


def test_a_bell_reaches_the_worker_without_the_clock(crew):
    crew.worker()
    crew.ask("test.steps", "bell", "{'pause': 0}")
    crew.wait_for(lambda: state("bell") == "done", "the job to be done")
    job = Job.objects.get()
    assert (job.result, job.done, job.tries) == ({"steps": worker_app.STEPS}, worker_app.STEPS, 1)
    assert marks("bell") == each_once("bell")


def test_a_lost_bell_is_rung_again_by_the_clock(crew):
    job = Job.objects.create(kind="test.steps", key="lost", args={"pause": 0})  # and nobody rings
    crew.worker()
    crew.clock()
    crew.wait_for(lambda: state("lost") == "done", "the sweeper")
    job.refresh_from_db()
    assert marks("lost") == each_once("lost")


def test_workers_killed_amid_their_work_leave_each_effect_exactly_once(crew):
    for key in ("a", "b"):
        Job.objects.create(kind="test.steps", key=key, args={"pause": PAUSE})
    crew.clock()
    for goal in (2, 5):
        worker = crew.worker()
        crew.wait_for(lambda goal=goal: Place.objects.count() >= goal, f"{goal} effects")
        crew.kill(worker)
    crew.worker()
    crew.wait_for(lambda: state("a") == state("b") == "done", "both jobs to be done", 60)
    assert marks("a") == each_once("a")
    assert marks("b") == each_once("b")
    assert Job.objects.filter(tries__gt=1).exists()
