"""The ledger itself: append only, reversed once, checked every night."""

from __future__ import annotations

import pytest
from django.db import DatabaseError, IntegrityError, connection, transaction

from bottles.models import Account, Custody, Line, Movement, Standing, Weighing, WeighingStrike
from bottles.selectors.ledger import balance_differences, standing_differences
from bottles.services import moving, weighing
from bottles.services.posting import Move, account_of, own_account, post
from shop.base import clock, jobs
from shop.base.errors import Refusal
from shop.base.facts import FactChanged
from shop.base.models import Job
from tests.bottles import books as b

pytestmark = pytest.mark.django_db


@pytest.fixture(autouse=True)
def today(shop):
    with clock.pretend(b.after(24 * 30)):
        yield


@pytest.fixture
def weighed(today):
    bottle = b.bottle()
    b.weigh(bottle, b.scale(), 4_000, b.after(0))
    return bottle


@pytest.mark.parametrize("model", [Movement, Line, Weighing, WeighingStrike, Custody])
@pytest.mark.parametrize("verb", ["UPDATE", "DELETE"])
def test_the_database_refuses_to_change_a_fact(weighed, model, verb):
    if model is WeighingStrike:
        weighing.strike(key=b.key(), person=None, weighing=Weighing.objects.get(), reason="mistyped")
    table = model._meta.db_table
    statement = f'UPDATE "{table}" SET act_id = act_id' if verb == "UPDATE" else f'DELETE FROM "{table}"'
    with pytest.raises(DatabaseError, match="fact"), transaction.atomic(), connection.cursor() as cursor:
        cursor.execute(statement)
    assert model.objects.exists()


def test_the_model_refuses_too_and_so_does_a_bulk_change(weighed):
    row = Weighing.objects.get()
    row.net_g = 1
    with pytest.raises(FactChanged):
        row.save()
    with pytest.raises(FactChanged):
        row.delete()
    with pytest.raises(DatabaseError), transaction.atomic():
        Weighing.objects.update(net_g=1)
    row.refresh_from_db()
    assert row.net_g == 4_000


def test_no_bottle_is_below_nothing_by_constraint(weighed):
    with pytest.raises(IntegrityError), transaction.atomic():
        Account.objects.filter(bottle=weighed).update(balance_g=-1)


def test_a_line_moves_something_and_elsewhere(weighed):
    account, movement = account_of(weighed), Movement.objects.first()
    for source, target, grams in ((account, account, 5), (account, own_account("line"), 0)):
        with pytest.raises(IntegrityError), transaction.atomic():
            Line.objects.create(
                act=b.act(), movement=movement, source=source, target=target, grams=grams, origin="entered"
            )


def test_nothing_moved_leaves_no_movement(weighed):
    moves = [Move(account_of(weighed), own_account("line"), 0, "entered")]
    assert post(act=b.act(), kind="vent", happened_at=b.after(1), moves=moves) is None


def test_a_movement_is_reversed_once_at_the_time_of_what_it_reverses_and_a_reversal_never(weighed):
    used = moving.vent(
        key=b.key(), person=None, bottle=weighed, amount=b.grams(500), reason="yard", happened_at=b.after(2)
    )
    done = moving.reverse_movement(key=b.key(), person=None, movement=used, reason="wrong bottle")
    assert (done.happened_at, done.note, b.holds(weighed), b.balance("vented")) == (b.after(2), "wrong bottle", 4_000, 0)
    for movement, code in ((used, "already reversed"), (done, "reversal of a reversal")):
        with pytest.raises(Refusal) as refused:
            moving.reverse_movement(key=b.key(), person=None, movement=movement, reason="again")
        assert refused.value.code == code
    b.check_books()


def test_what_a_weighing_caused_is_struck_with_it_not_reversed_alone(weighed):
    with pytest.raises(Refusal) as refused:
        moving.reverse_movement(key=b.key(), person=None, movement=Movement.objects.get(), reason="no")
    assert refused.value.code == "strike the weighing"


@pytest.mark.parametrize("reason", ["", "   "])
def test_striking_reversing_and_venting_need_a_reason(weighed, reason):
    made = moving.vent(key=b.key(), person=None, bottle=weighed, amount=b.grams(5), reason="yard", happened_at=b.after(2))
    for does in (
        lambda: weighing.strike(key=b.key(), person=None, weighing=Weighing.objects.get(), reason=reason),
        lambda: moving.reverse_movement(key=b.key(), person=None, movement=made, reason=reason),
        lambda: moving.vent(key=b.key(), person=None, bottle=weighed, amount=b.grams(5), reason=reason),
    ):
        with pytest.raises(Refusal) as refused:
            does()
        assert (refused.value.code, refused.value.field) == ("no reason", "reason")


def test_a_weighing_is_struck_once_and_what_it_moved_is_reversed(weighed):
    row = Weighing.objects.get()
    weighing.strike(key=b.key(), person=None, weighing=row, reason="another bottle")
    assert (b.holds(weighed), b.balance("customer")) == (0, 0)
    assert Standing.objects.get(bottle=weighed).weighing is None
    with pytest.raises(Refusal) as refused:
        weighing.strike(key=b.key(), person=None, weighing=row, reason="again")
    assert refused.value.code == "struck already"


def test_after_striking_the_latest_the_weighing_before_it_speaks(weighed):
    scale = Weighing.objects.get().scale
    b.go_out(weighed, b.after(1))
    b.come_in(weighed, b.after(8))
    wrong = b.weigh(weighed, scale, 400, b.after(20))
    b.weigh(weighed, scale, 3_000, b.after(10))  # late: a statement only
    assert b.holds(weighed) == 400
    weighing.strike(key=b.key(), person=None, weighing=wrong, reason="a nought too few")
    assert (b.holds(weighed), b.balance("customer")) == (3_000, -3_000)
    b.check_books()


def test_striking_an_older_one_keeps_what_the_latest_said(weighed):
    scale = Weighing.objects.get().scale
    b.go_out(weighed, b.after(1))
    b.come_in(weighed, b.after(8))
    wrong = b.weigh(weighed, scale, 400, b.after(10))
    b.go_out(weighed, b.after(11))
    b.come_in(weighed, b.after(18))
    b.weigh(weighed, scale, 3_400, b.after(20))
    weighing.strike(key=b.key(), person=None, weighing=wrong, reason="a nought too few")
    assert (b.holds(weighed), b.balance("customer"), b.balance("unaccounted")) == (3_400, -3_400, 0)
    assert not weighed.conditions.filter(end__isnull=True).exists()  # it wasn't filled elsewhere after all
    b.check_books()


def test_striking_the_first_lets_the_next_open_the_books(weighed):
    first = Weighing.objects.get()
    b.weigh(weighed, first.scale, 3_000, b.after(5), reason="unknown")
    assert b.balance("unaccounted") == 1_000
    weighing.strike(key=b.key(), person=None, weighing=first, reason="another bottle")
    assert (b.holds(weighed), b.balance("customer"), b.balance("unaccounted")) == (3_000, -3_000, 0)
    assert Movement.objects.filter(kind="opening", reversal__isnull=True).count() == 1


def test_the_nightly_check_finds_nothing_where_nothing_is_wrong(weighed, run_jobs):
    with transaction.atomic():
        jobs.ask("ledger.check", "2026-03-03")
    run_jobs()
    job = Job.objects.get(kind="ledger.check")
    assert (job.state, job.result) == ("done", {"differences": [], "count": 0})


def test_the_nightly_check_names_what_differs(weighed, run_jobs):
    Account.objects.filter(bottle=weighed).update(balance_g=4_001)
    Standing.objects.filter(bottle=weighed).update(weighing=None, is_in=False)
    with transaction.atomic():
        jobs.ask("ledger.check", "2026-03-03")
    run_jobs()
    told = Job.objects.get(kind="ledger.check").result
    assert told["count"] == 3
    assert [weighed.code in line for line in told["differences"]] == [True, False, True]
    assert "1 g" in told["differences"][1]


def test_the_check_asks_as_much_for_many_bottles_as_for_one(weighed, django_assert_num_queries):
    scale = Weighing.objects.get().scale
    for number in range(10, 16):
        b.weigh(b.bottle(f"T-{number:04}"), scale, 1_000, b.after(1))
    with django_assert_num_queries(3):
        assert balance_differences() + standing_differences() == []
