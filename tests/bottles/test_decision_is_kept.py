"""What was answered is kept with its inputs and the edition of the rules: judged again from them, it is the same."""

from __future__ import annotations

import dataclasses
import hashlib
from datetime import date, timedelta
from importlib import resources
from typing import Any

import pytest
from django.urls import reverse

from bottles.models import Decision, Refill, Weighing
from bottles.rules.edition_files import edition_by_code
from bottles.rules.facts import Condition, Facts, Permit
from bottles.rules.fitness import Judgement, judge
from bottles.rules.marks import read_mark
from bottles.rules.stamps import DateStamp
from bottles.selectors.edition import policy_of
from bottles.services.refilling import MustNotBeFilled, open_refill
from shop.base import clock
from tests import factories
from tests.bottles.of_refill import Works, key

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def works(shop: Any, front_desk: Any) -> Works:
    found = Works(shop, front_desk)
    factories.StampFactory(bottle=found.bottle, kind="visual", year=2025, month=8, typed="08/2025")
    return found


def judged_again(kept: Decision) -> Judgement:
    """The judgement of a decision's own inputs, by the edition and the policy that it names."""
    edition = edition_by_code(kept.edition)
    assert edition is not None
    told: dict[str, Any] = {name: value for name, value in kept.inputs.items() if name != "look"}

    def stamp(held: dict[str, Any]) -> DateStamp:
        return DateStamp(**held | {"letters": tuple(held["letters"])})

    told["mark"] = read_mark(told["mark"]) if told["mark"] else None
    told["made"] = stamp(told["made"]) if told["made"] else None
    told["tests"] = None if told["tests"] is None else tuple(stamp(held) for held in told["tests"])
    if told["conditions"] is not None:
        told["conditions"] = tuple(Condition(code, date.fromisoformat(on) if on else None) for code, on in told["conditions"])
    if told["permit"] is not None:
        until = told["permit"]["expires"]
        told["permit"] = Permit(**told["permit"] | {"expires": date.fromisoformat(until) if until else None})
    assert set(told) == {field.name for field in dataclasses.fields(Facts)}
    return judge(Facts(**told), edition, policy_of(kept.policy), kept.on)


def check(kept: Decision) -> None:
    again = judged_again(kept)
    assert (again.may_be_filled, again.may_be_emptied) == (kept.may_fill, kept.may_empty)
    assert (again.limit.grams, again.limit.binds or "") == (kept.limit_g, kept.binds)
    assert [reason.as_dict() for reason in again.reasons] == kept.reasons


def test_the_answer_is_kept_with_day_edition_policy_and_inputs(works: Works) -> None:
    policy = factories.PolicyFactory(
        effective_from=clock.today(works.shop), values={"own_limit_per_mille": 950, "visual_interval_months": 60}
    )
    kept = works.open().decision
    shipped = resources.files("bottles.rules").joinpath("editions", f"{kept.edition.lower()}.json").read_bytes()
    assert kept.edition_sha256 == hashlib.sha256(shipped).hexdigest()
    assert (kept.on, kept.policy_id, kept.may_fill, kept.binds) == (clock.today(works.shop), policy.pk, "yes", "shop")
    assert kept.inputs["net_g"] == 300  # as weighed at this very opening
    assert kept.inputs["look_done"] is True and all(kept.inputs["look"].values())
    check(kept)


def test_a_star_that_was_ticked_beside_its_stamp_is_kept_with_it(works: Works) -> None:
    steel = works.bottle_to_fill("T-0413", mark="DOT-3AA2015", wall="steel")
    today = clock.today(works.shop)
    factories.StampFactory(
        bottle=steel, year=today.year, month=today.month, typed=f"{today.month:02}/{today.year}", star=True
    )
    opening = works.opening(steel)
    kept = works.open(steel, look=dict.fromkeys(opening.look, True)).decision
    assert [held["star"] for held in kept.inputs["tests"]].count(True) == 1
    check(kept)


def test_what_changes_later_changes_nothing_of_what_was_answered(works: Works) -> None:
    kept = works.open().decision
    before = Decision.objects.values().get()
    factories.PolicyFactory(values={"own_limit_per_mille": 500}, effective_from=clock.today(works.shop))
    factories.ConditionFactory(bottle=works.bottle, code="crack")
    works.bottle.capacity_ml = 3_400
    works.bottle.save()
    with clock.pretend(clock.now() + timedelta(days=4_000)):
        assert Decision.objects.values().get() == before
        check(Decision.objects.get(pk=kept.pk))


def test_what_the_look_stopped_is_kept_too(works: Works) -> None:
    opening = works.opening()
    look = dict(opening.look) | {next(iter(opening.look)): False}
    found = open_refill(key=key(), person=works.person, opening=dataclasses.replace(opening, look=look))
    assert found.refill is None and found.noted
    kept = Decision.objects.get()
    assert kept.may_fill in ("no", "only after")
    assert list(kept.inputs["look"].values()).count(False) == 1
    check(kept)


def test_what_the_rules_refused_is_kept_once_however_often_the_form_arrives(works: Works) -> None:
    factories.ConditionFactory(bottle=works.bottle, code="dent")
    form = key()
    for _ in range(2):
        with pytest.raises(MustNotBeFilled):
            open_refill(key=form, person=works.person, opening=works.opening())
    kept = Decision.objects.get()
    assert kept.may_fill == "no" and kept.act.code == "refill.refused"
    assert "condition" in {reason["code"] for reason in kept.reasons}
    assert kept.inputs["look_done"] is True
    assert not Refill.objects.exists() and not Weighing.objects.filter(step="before").exists()


def test_a_refill_outlives_the_sign_out_of_whoever_opened_it(
    works: Works, front_desk: Any, technician: Any, client_of: Any
) -> None:
    refill = works.open()
    desk = client_of(front_desk)
    page = reverse("bottles:refill", args=[refill.pk])
    assert desk.get(page).status_code == 200
    desk.post(reverse("people:sign_out"))
    assert desk.get(page).status_code == 302
    other = client_of(technician)
    assert works.bottle.code in other.get("/counter").content.decode()
    typed = {"form_key": str(key()), "gross": "11.01 kg", "line": "off", "ended_by": "limit"}
    assert other.post(page, typed).status_code == 302
    closed = Refill.objects.get()
    assert (closed.ended_by, closed.person, closed.decision.act.person) == ("limit", front_desk, front_desk)
    assert closed.weighings.latest("id").act.person == technician
