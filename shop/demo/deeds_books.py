"""Steps of the scale and the books: weighings, deliveries, use, vents, strikes, reversals."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from bottles.models import Movement, Weighing
from bottles.services import delivering, moving, scales, weighing
from bottles.services.delivering import Ticket
from bottles.services.gaps import NeedsReason
from bottles.services.moving import OnScale
from shop.demo.doing import Doer, bottle_of, car_of, deed, instant, mass, place_of, scale_of
from shop.demo.names import SUPPLIER
from shop.demo.steps import Step


def answering(step: Step, do: Callable[[str], Any]) -> Any:
    """Do it without a reason, and with the step's answer where the books ask for one."""
    reason = step.values.get("reason", "")
    try:
        return do(reason)
    except NeedsReason:
        if reason or not step.values.get("if_asked"):
            raise
    return do(step.values["if_asked"])


@deed("scale.check")
def _check(doer: Doer, step: Step) -> object:
    told = step.values
    return scales.check_scale(**doer.common(step), scale=scale_of(step), known=mass(told["known"]), read=mass(told["read"]))


@deed("weigh")
def _weigh(doer: Doer, step: Step) -> Weighing:
    told = step.values
    bottle, scale = bottle_of(step), scale_of(step)
    return answering(step, lambda reason: weighing.weigh(
        **doer.common(step), bottle=bottle, scale=scale, gross=mass(told["gross"]), step=told["step"],
        reason=reason,
    ))  # fmt: skip


@deed("weigh.strike")
def _strike(doer: Doer, step: Step) -> object:
    wrong = Weighing.objects.filter(bottle=bottle_of(step), strike__isnull=True).order_by("-happened_at", "-id")[0]
    return weighing.strike(
        **doer.common(step), weighing=wrong, reason=step.values["reason"], right=mass(step.values["right"])
    )


@deed("deliver")
def _deliver(doer: Doer, step: Step) -> object:
    told = step.values
    ticket = Ticket(supplier=SUPPLIER, number=told["ticket"], net=mass(told["ticket_net"]), lot=told["lot"])
    return delivering.deliver(
        **doer.common(step), bottle=bottle_of(step), ticket=ticket, place=place_of(told["place"]),
        weighed=OnScale(scale_of(step), mass(told["gross"])),
    )


@deed("give_back")
def _give_back(doer: Doer, step: Step) -> object:
    told = step.values
    bottle, weighed = bottle_of(step), OnScale(scale_of(step), mass(told["gross"]))
    return answering(step, lambda reason: delivering.give_back(
        **doer.common(step), bottle=bottle, supplier=told["supplier"], weighed=weighed, reason=reason
    ))  # fmt: skip


@deed("use")
def _use(doer: Doer, step: Step) -> Movement:
    told = step.values
    car = car_of(told["car"])
    assert car is not None
    return moving.use(
        **doer.common(step), bottle=bottle_of(step), car=car, amount=mass(told["amount"]) if told["amount"] else None,
        weighed=OnScale(scale_of(step), mass(told["gross"])) if told["gross"] else None, note=told["note"],
    )


@deed("vent")
def _vent(doer: Doer, step: Step) -> Movement:
    told = step.values
    return moving.vent(
        **doer.common(step), bottle=bottle_of(step), reason=told["reason"], amount=mass(told["amount"]),
        happened_at=instant(told["happened_at"]),
    )


@deed("movement.reverse")
def _reverse(doer: Doer, step: Step) -> Movement:
    wrong = Movement.objects.get(act__key=doer.key_of(step.values["step"]))
    return moving.reverse_movement(**doer.common(step), movement=wrong, reason=step.values["reason"])
