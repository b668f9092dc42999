"""Begin an act: the one way in which anything is saved.

The act's key is the key of the form that carried it. It's the first thing written, so of two
arrivals of one form (a double click, a reload, a retry) one writes and the other is answered
with `AlreadyDone`, which names the first.
"""

from __future__ import annotations

import uuid
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

from django.db import IntegrityError, models, transaction

from shop.base import clock
from shop.base.errors import AlreadyDone, Stale
from shop.base.models import Act

if TYPE_CHECKING:
    # For the checker alone: who acts is whatever the settings name as the user.
    from shop.people.models import User


@contextmanager
def begin(
    *,
    key: uuid.UUID,
    person: User | None,
    code: str,
    subject: str,
    reason: str = "",
    changes: dict[str, Any] | None = None,
) -> Iterator[Act]:
    """Open one short transaction whose first statement inserts the act.

    Computing comes before it (no PDF, no thermodynamics inside). What a decision rests on is
    read inside it, after the act: on SQLite only the first write takes the lock.

    Raises AlreadyDone where the key was used before.
    """
    with transaction.atomic(durable=True):
        try:
            with transaction.atomic():
                act = Act.objects.create(
                    key=key, person=person, recorded_at=clock.now(), code=code, subject=subject, reason=reason,
                    changes=changes or {},
                )
        except IntegrityError:
            first = Act.objects.filter(key=key).first()
            if first is None:
                raise
            raise AlreadyDone(first) from None
        yield act


def changed(instance: models.Model, values: dict[str, Any], *, secret: frozenset[str] = frozenset()) -> dict[str, Any]:
    """Return what `values` would change as {field: [before, after]}; names of people stay out.

    Fields in `secret` (names, addresses) are listed as changed without their values, so that
    erasing a customer leaves nothing behind in the history.
    """
    out: dict[str, Any] = {}
    for field, after in values.items():
        before = getattr(instance, field)
        if before != after:
            out[field] = "changed" if field in secret else [_plain(before), _plain(after)]
    return out


def update_master(instance: models.Model, *, version: int, values: dict[str, Any]) -> None:
    """Write a master's new values if it still has the version that the form was drawn from.

    Raises Stale, with the values that stand now, where someone else saved meanwhile.
    """
    model: Any = type(instance)
    found = model._default_manager.filter(pk=instance.pk, version=version).update(version=version + 1, **values)
    if not found:
        current = model._default_manager.get(pk=instance.pk)
        theirs = {f: str(getattr(current, f)) for f, v in values.items() if getattr(current, f) != v}
        raise Stale(theirs=theirs, version=current.version)
    instance.refresh_from_db()


def _plain(value: Any) -> Any:
    if isinstance(value, models.Model):
        return value.pk
    return value if isinstance(value, int | float | str | bool | type(None)) else str(value)
