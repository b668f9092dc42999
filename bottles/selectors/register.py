"""Read the register: one bottle with what is told of it, and lists of bottles."""

from __future__ import annotations

from django.db.models import Exists, OuterRef, Q, QuerySet

from bottles.models import Bottle, Condition, Custody, Ownership, Stamp, Standing, Tare
from shop.base.composed import composed
from shop.base.models import Place

STATES = [
    ("in", "in the shop"),
    ("waits", "waits for something"),
    ("out", "out"),
    ("stopped", "something is wrong with it"),
    ("unweighed", "never weighed"),
    ("incomplete", "to complete"),
    ("retired", "retired"),
]


def standing_of(bottle: Bottle) -> Standing:
    """The bottle's standing with all that its page shows; empty where nothing was told yet."""
    found: Standing = next(iter(_standing(bottle.pk)), None) or Standing(bottle=bottle)
    return found


def stamps_of(bottle: Bottle) -> list[Stamp]:
    """Every stamp ever read off it by kind, the latest first, struck ones among them."""
    order = [kind for kind, _ in Stamp.KINDS]
    return sorted(_stamps(bottle.pk), key=lambda stamp: order.index(stamp.kind))


@composed
def _standing(bottle: int) -> QuerySet[Standing]:
    return Standing.objects.filter(bottle=bottle).select_related(
        "ownership__customer", "custody__place", "custody__car", "tare", "weighing__scale"
    )


@composed
def _stamps(bottle: int) -> QuerySet[Stamp]:
    return Stamp.objects.filter(bottle=bottle).select_related("strike__act").order_by("-year", "-month", "-id")


@composed
def _conditions(bottle: int) -> QuerySet[Condition]:
    return Condition.objects.filter(bottle=bottle).select_related("end").order_by("end", "-seen_on", "-id")


def tares_of(bottle: Bottle) -> QuerySet[Tare]:
    """Its tares with their parts, the latest first."""
    return Tare.objects.filter(bottle=bottle).prefetch_related("parts").order_by("-since", "-id")


def conditions_of(bottle: Bottle) -> list[Condition]:
    """What was noted on it, open ones first, then the latest."""
    return _conditions(bottle.pk)


def owners_of(bottle: Bottle) -> QuerySet[Ownership]:
    """Whose it was, the latest first."""
    return Ownership.objects.filter(bottle=bottle).select_related("customer").order_by("-since", "-id")


def bottles_matching(
    *, text: str = "", owner: str = "", use: str = "", state: str = "", place: Place | None = None
) -> QuerySet[Bottle]:
    """The register in order of code, narrowed; retired ones only where they are asked for."""
    found = Bottle.objects.order_by("code")
    if text:
        found = found.filter(
            Q(code__icontains=text)
            | Q(serial__icontains=text)
            | Q(mark__icontains=text)
            | Q(maker__icontains=text)
            | Q(standing__ownership__customer__name__icontains=text)
            | Q(standing__custody__car__number__iexact=text)
        )
    if owner:
        found = found.filter(standing__ownership__kind=owner)
    if use:
        found = found.filter(use=use)
    if place:
        found = found.filter(standing__is_in=True, standing__custody__place=place)
    return _in_state(found.filter(retired_at__isnull=state != "retired"), state)


def with_open_condition(found: QuerySet[Bottle]) -> QuerySet[Bottle]:
    """The same, each told whether something is wrong with it, and whether it's condemned."""
    return found.annotate(is_stopped=Exists(_wrong()), is_condemned=Exists(_wrong().filter(code="condemned")))


def _wrong() -> QuerySet[Condition]:
    return Condition.objects.filter(bottle=OuterRef("pk"), end__isnull=True)


def _in_state(found: QuerySet[Bottle], state: str) -> QuerySet[Bottle]:
    if state == "in":
        return found.filter(standing__is_in=True)
    if state == "waits":
        return found.filter(standing__waits=True)
    if state == "out":
        return found.filter(standing__is_in=False)
    if state == "unweighed":
        return found.filter(standing__weighing__isnull=True)
    if state == "stopped":
        return found.filter(Exists(_wrong()))
    if state == "incomplete":
        tested = Stamp.objects.filter(bottle=OuterRef("pk"), kind="test", strike__isnull=True)
        return found.filter(
            Q(serial="") | Q(mark="") | Q(capacity_ml__isnull=True) | Q(standing__tare__isnull=True) | ~Exists(tested)
        )
    return found


def where_words(custody: Custody | None) -> str:
    """Where it is and with whom, in words."""
    if custody is None:
        return "never checked in"
    if custody.is_in:
        return str(custody.place)
    if custody.car:
        return f"on {custody.car}"
    with_whom = f", {custody.with_whom}" if custody.with_whom else ""
    return f"{custody.get_kind_display()}{with_whom}"


def owner_words(ownership: Ownership | None) -> str:
    """Whose it is, in words."""
    if ownership is None:
        return "owner not known"
    if ownership.kind == "customer":
        return str(ownership.customer)
    return ownership.supplier if ownership.kind == "supplier" else "the shop"
