"""Whose a bottle is, from a day on."""

from __future__ import annotations

import uuid
from dataclasses import dataclass
from datetime import date

from bottles.models import Bottle, Ownership
from bottles.services.cleaning import clean
from bottles.services.refusals import locked
from bottles.services.standing import restate
from shop.base import acts, clock
from shop.base.errors import NotReady, Refusal
from shop.base.models import Act
from shop.people.models import Customer, User


@dataclass(frozen=True, slots=True)
class Owner:
    """The shop, a customer or the supplier."""

    kind: str
    customer: Customer | None = None
    supplier: str = ""


def change_owner(*, key: uuid.UUID, person: User | None, bottle: Bottle, owner: Owner, since: date) -> Ownership:
    """Write whose the bottle is from a day on; what was true before stays written.

    Raises Retired; NotReady where it's theirs already; Refusal for a day still to come.
    """
    with acts.begin(
        key=key, person=person, code="bottle.owner changed", subject=f"bottle:{bottle.code}",
        changes={"kind": owner.kind, "customer": owner.customer.pk if owner.customer else None, "since": str(since)},
    ) as act:
        locked(bottle)
        last = Ownership.objects.filter(bottle=bottle).order_by("-since", "-id").first()
        if last and (last.kind, last.customer_id, last.supplier) == _told(owner):
            raise NotReady("That is its owner already. Nothing was changed.", code="same owner")
        kept = write_owner(act=act, bottle=bottle, owner=owner, since=since)
        restate(bottle)
    return kept


def write_owner(*, act: Act, bottle: Bottle, owner: Owner, since: date) -> Ownership:
    """Insert an ownership within an act's transaction."""
    if since > clock.today():
        raise Refusal("That day is still to come. Give the day from which it's theirs.", code="in the future", field="since")
    if owner.kind == "customer":
        if owner.customer is None:
            raise Refusal("Say which customer's it is.", code="no customer", field="customer")
        if Customer.objects.filter(pk=owner.customer.pk, erased_at__isnull=False).exists():
            raise NotReady("This customer was erased from the book.", code="erased", field="customer")
    if owner.kind == "supplier" and not owner.supplier.strip():
        raise Refusal("Say which supplier's it is.", code="no supplier", field="supplier")
    kind, customer_id, supplier = _told(owner)
    kept = Ownership(act=act, bottle=bottle, kind=kind, customer_id=customer_id, supplier=supplier, since=since)
    clean(kept)
    kept.save()
    return kept


def _told(owner: Owner) -> tuple[str, int | None, str]:
    """What of an owner counts for its kind: a customer only for a customer's, a name only for a supplier's."""
    return (
        owner.kind,
        owner.customer.pk if owner.kind == "customer" and owner.customer else None,
        owner.supplier.strip() if owner.kind == "supplier" else "",
    )
