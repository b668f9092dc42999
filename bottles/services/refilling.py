"""Open a refill: look, weigh, judge, forecast, and the first supply bottle, in one submission.

Guarantees:

- the answer rests on what stands in the register inside the act: a bottle condemned, retired or
  opened by another desk meanwhile is refused there;
- a bottle is in one open refill at most;
- an item of the look that failed is noted on the bottle and refuses the fill: that act stands,
  so that the next person finds it;
- the forecast was computed by the server from what was submitted, before the act began.
"""

from __future__ import annotations

import uuid
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import datetime
from typing import Any

from django.db import IntegrityError
from django.db.models import Q

from bottles.models import Bottle, Condition, Delivery, Draw, Refill, RefillCheck, Scale, Standing, Supply, Tare
from bottles.physics.weighing import stop_reading
from bottles.rules.edition import LookItem
from bottles.rules.fitness import Judgement
from bottles.rules.look import LookResult, look_for, look_result
from bottles.rules.marks import read_mark
from bottles.rules.specifications import Wall
from bottles.selectors.edition import edition_in_force
from bottles.selectors.judging import rulebook
from bottles.selectors.scales import scale_checked, scale_uncertainty
from bottles.services.deciding import decide, keep_refusal
from bottles.services.forecasting import Answer, Asked, DangerSign, keep_forecast
from bottles.services.locking import lock
from bottles.services.plan_again import plan_again
from bottles.services.refusals import Retired
from bottles.services.weighing import tare_at, weigh_in
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act, Shop
from shop.people.models import User


class MustNotBeFilled(NotReady):
    """This bottle must not be filled now. Its page says why, and what to do."""

    code = "must not be filled"

    def __init__(self, sentence: str = "", *, given: dict[str, Any] | None = None) -> None:
        super().__init__(sentence)
        self.given = given or {}  # what the filler had seen, for the answer that is kept


class ScaleCheckDue(NotReady):
    """Put a known weight on this scale first: it's the day's first fill on it."""

    code = "scale check due"


@dataclass(frozen=True, slots=True)
class Opening:
    """What is submitted to open a refill."""

    asked: Asked
    answer: Answer  # computed from the same submission, before the act
    method: str
    look: Mapping[str, bool | None]
    pressure_kept: bool | None = None
    dried_and_purged: bool | None = None
    wet: bool = False
    happened_at: datetime | None = None
    reason: str = ""


@dataclass(frozen=True, slots=True)
class Opened:
    """The refill; or None and the codes of what the look found and noted."""

    refill: Refill | None
    noted: tuple[str, ...] = ()


def look_items(bottle: Bottle, shop: Shop) -> Any:
    """Return the items of the look for a bottle, by the day's rule set."""
    star = bottle.stamps.filter(star=True, strike__isnull=True).exists()
    return look_for(edition_in_force(shop, clock.today(shop)), star=star, wall=_wall(bottle))


def stop_at(tare: Tare, scale: Scale, *, target_g: int, hose_pull_g: int) -> int:
    """Return the gross at which to close the valve, as the scale will read it; the tare is that fitted now."""
    return stop_reading(
        tare.total_g, target_g, scale_pm_g=scale_uncertainty(scale), resolution_g=scale.resolution_g,
        style=scale.style, hose_pull_g=hose_pull_g,  # type: ignore[arg-type]
    )  # fmt: skip


def open_refill(*, key: uuid.UUID, person: User | None, opening: Opening) -> Opened:
    """Open a refill, or note what the look found; an answer that refuses is kept whatever follows.

    Raises MustNotBeFilled, ScaleCheckDue, DangerSign, Retired; NotReady where either bottle is
    taken meanwhile; Refusal where the look isn't finished or the weight is missing.
    """
    bottle, shop = opening.asked.bottle, opening.asked.shop
    items = look_items(bottle, shop)
    found = look_result(items, opening.look)
    if not found.done and not found.conditions:
        left = ", ".join(item.words for item in items if item.code in found.open_items)
        raise Refusal(f"The look isn't finished. Still open: {left}.", code="look not done", field="look")
    try:
        return _open(key, person, opening, items, found)
    except MustNotBeFilled as refused:
        keep_refusal(
            key=key, person=person, bottle=bottle, shop=shop, given=refused.given, look=_answers(opening.look)
        )
        raise


def _open(key: uuid.UUID, person: User | None, opening: Opening, items: Sequence[LookItem], found: LookResult) -> Opened:
    bottle, supply, shop = opening.asked.bottle, opening.asked.supply, opening.asked.shop
    with acts.begin(
        key=key, person=person, code="refill.refused" if found.conditions else "refill.opened", subject=f"bottle:{bottle.code}",
        reason=opening.reason.strip(), changes={"supply": supply.bottle.code, "method": opening.method},
    ) as act:  # fmt: skip
        locked = lock([bottle, supply.bottle])
        bottle, source = locked[bottle.pk], locked[supply.bottle_id]
        _refuse_taken(bottle, source, supply)
        if found.conditions:
            return _note(act, bottle, shop, opening, found)
        scale = _scale(supply, shop)
        if opening.answer.blocked:
            raise DangerSign(field="gauge")
        if opening.answer.readings.bottle_weight is None:
            raise Refusal("Weigh the bottle before filling it.", code="weight missing", field="bottle_weight")
        weighed = weigh_in(
            act=act, bottle=bottle, scale=scale, gross=opening.answer.readings.bottle_weight, wet=opening.wet, step="before",
            happened_at=opening.happened_at, reason=opening.reason,
        )  # fmt: skip
        book = rulebook(shop)
        facts = book.facts([bottle, source])
        given = given_by_look(opening, found, book.judge(facts[bottle.pk]))
        judgement, decision = decide(
            act=act, bottle=bottle, book=book, facts=replace(facts[bottle.pk], **given), look=_answers(opening.look)
        )
        limit_g = _refuse_unfit(judgement, given)
        refuse_source(source, book.judge(facts[source.pk]))
        target_g = min(limit_g, opening.answer.target_g)
        # A weighing entered late rests on the tare of then; the scale will be read with what is fitted now.
        fitted = weighed.tare if opening.happened_at is None else tare_at(bottle, clock.now())
        refill = Refill(
            bottle=bottle, decision=decision, station=supply.station, method=opening.method, limit_g=limit_g, target_g=target_g,
            stop_at_g=stop_at(fitted, scale, target_g=target_g, hose_pull_g=supply.station.hose_pull_g),
            opened_at=weighed.happened_at, act=act, person=person,
        )  # fmt: skip
        try:
            refill.save()  # nothing follows a failure: the whole act is rolled back
        except IntegrityError:
            raise NotReady(f"{bottle.code} is being filled already. Go on with that refill.", code="open refill") from None
        RefillCheck.objects.bulk_create(
            RefillCheck(act=act, refill=refill, item=item.code, passed=bool(opening.look[item.code]))
            for item in items
            if opening.look.get(item.code) is not None
        )
        draw_on(act=act, refill=refill, asked=opening.asked, answer=opening.answer, reason=opening.reason,
                happened_at=refill.opened_at)  # fmt: skip
        plan_again(act, bottle.code)
    return Opened(refill)


def draw_on(
    *, act: Act, refill: Refill, asked: Asked, answer: Answer | None, reason: str, happened_at: datetime
) -> Draw:  # fmt: skip
    """Let a refill draw on a supply bottle from now on, within an act's transaction.

    Its weight, where it stands on a scale, is written down and settles its books first.
    """
    supply = asked.supply
    gross = answer.readings.supply_weight if answer else None
    if gross is not None and supply.station.supply_scale is not None:
        weigh_in(
            act=act, bottle=supply.bottle, scale=supply.station.supply_scale, gross=gross, wet=False, step="before",
            happened_at=happened_at, reason=reason,
        )  # fmt: skip
    forecast = keep_forecast(act=act, asked=asked, answer=answer) if answer else None
    lot = Delivery.objects.filter(bottle=supply.bottle).order_by("-happened_at", "-id").values_list("lot", flat=True).first()
    return Draw.objects.create(
        act=act, refill=refill, source=supply.bottle, forecast=forecast, lot=lot or "", happened_at=happened_at
    )


def refuse_source(source: Bottle, judgement: Judgement) -> None:
    """Raise NotReady where a supply bottle may not be emptied into another, with the first reason."""
    if judgement.may_be_emptied != "yes":
        why = [reason for reason in judgement.reasons if "emptying" in reason.about and reason.severity != "explains"]
        words = f" {why[0].sentence} {why[0].next_step}" if why else ""
        raise NotReady(f"{source.code} may not be emptied into another bottle.{words}", code="may not be emptied", field="supply")


def given_by_look(opening: Opening, found: LookResult, judgement: Judgement) -> dict[str, Any]:
    """Return the facts that the filler saw just now."""
    given: dict[str, Any] = {"look_done": found.done, "star_check_done": found.star_checks_done}
    missing = judgement.not_judged
    if opening.pressure_kept is not None:
        given["pressure_kept"] = opening.pressure_kept
        given["dried_and_purged"] = opening.dried_and_purged
    if "contents" in missing and opening.look.get("contents"):
        given["contents"] = "nitrous oxide"
    return given


def _note(act: Act, bottle: Bottle, shop: Shop, opening: Opening, found: LookResult) -> Opened:
    """Write what the look found on the bottle, and the refusal that follows."""
    for code in found.conditions:
        if not Condition.objects.filter(bottle=bottle, code=code, end__isnull=True).exists():
            Condition.objects.create(
                act=act, bottle=bottle, code=code, note="Found by the look before filling.", seen_on=clock.today(shop)
            )
    book = rulebook(shop)
    facts = replace(book.facts([bottle])[bottle.pk], look_done=False)
    decide(act=act, bottle=bottle, book=book, facts=facts, look=_answers(opening.look))
    return Opened(None, found.conditions)


def _refuse_taken(bottle: Bottle, source: Bottle, supply: Supply) -> None:
    if bottle.retired_at is not None or source.retired_at is not None:
        raise Retired
    if bottle.pk == source.pk:
        raise NotReady("A bottle isn't filled from itself. Choose a supply bottle.", code="same bottle", field="supply")
    hanging = Supply.objects.filter(Q(pk=supply.pk, station__active=True) | Q(bottle=bottle))
    connected = dict(hanging.values_list("pk", "bottle_id"))
    if supply.pk not in connected or connected[supply.pk] == bottle.pk:
        raise NotReady(
            f"{source.code} was taken off its station meanwhile. Choose a supply bottle that is connected.", code="taken off",
            field="supply",
        )  # fmt: skip
    if Refill.objects.filter(bottle=bottle, closed_at__isnull=True).exists():
        raise NotReady(f"{bottle.code} is being filled already. Go on with that refill.", code="open refill")
    if bottle.pk in connected.values():
        raise NotReady(f"{bottle.code} hangs on a station as a supply bottle. Take it off there first.", code="on a station")
    if not Standing.objects.filter(bottle=bottle, is_in=True).exists():
        raise NotReady(f"{bottle.code} isn't in the shop. Check it in first.", code="not in")


def _scale(supply: Supply, shop: Shop) -> Scale:
    scale = supply.station.scale
    if scale is None:
        raise NotReady(
            f"{supply.station} has no scale, and nitrous is filled by weight. A manager can give it one.", code="no scale"
        )
    if not scale_checked(scale, shop).passed_today:
        raise ScaleCheckDue(field="check_known")
    return scale


def _refuse_unfit(judgement: Judgement, given: dict[str, Any]) -> int:
    limit = judgement.limit.grams
    if judgement.may_be_filled == "yes" and limit is not None:
        return limit
    stops = ("refuses", "unknown", "first")
    why = [reason for reason in judgement.reasons if "filling" in reason.about and reason.severity in stops]
    words = " ".join(f"{reason.sentence} {reason.next_step}" for reason in why[:3])
    raise MustNotBeFilled(f"{words or 'It has no fill limit.'} No refill was opened; this answer is kept.", given=given)


def _answers(look: Mapping[str, bool | None]) -> dict[str, bool]:
    return {code: answer for code, answer in look.items() if answer is not None}


def _wall(bottle: Bottle) -> Wall | None:
    if bottle.wall != "unknown":
        return bottle.wall  # type: ignore[return-value]
    mark = read_mark(bottle.mark) if bottle.mark else None
    return mark.specification.wall if mark and mark.specification else None
