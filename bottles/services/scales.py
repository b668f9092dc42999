"""Scales: entered by a manager, checked by whoever fills, with a known weight."""

from __future__ import annotations

import uuid
from dataclasses import dataclass
from datetime import date, datetime

from bottles.models import Scale, ScaleCheck
from shop.base import acts, clock
from shop.base.errors import Refusal
from shop.people.models import User
from shop.physics.units import Entry


@dataclass(frozen=True, slots=True)
class ScaleData:
    """What is known of a scale, figures as they were typed."""

    code: str
    name: str
    resolution: Entry
    error: Entry
    capacity: Entry
    style: str
    calibrated_on: date | None = None
    calibration_due: date | None = None
    active: bool = True

    def values(self) -> dict[str, object]:
        """The scale's fields."""
        return {
            "code": self.code.strip().upper(),
            "name": self.name.strip(),
            "resolution_g": self.resolution.stored,
            "resolution_typed": self.resolution.typed,
            "error_g": self.error.stored,
            "error_typed": self.error.typed,
            "capacity_g": self.capacity.stored,
            "capacity_typed": self.capacity.typed,
            "style": self.style,
            "calibrated_on": self.calibrated_on,
            "calibration_due": self.calibration_due,
            "active": self.active,
        }


def add_scale(*, key: uuid.UUID, person: User | None, data: ScaleData) -> Scale:
    """Enter a scale. Raises Refusal for figures that can't be a scale's, or a code in use."""
    _refuse_nonsense(data)
    with acts.begin(key=key, person=person, code="scale.added", subject=f"scale:{data.code.strip().upper()}"):
        _refuse_taken(data, None)
        scale = Scale(**data.values())
        scale.full_clean(exclude=["calibrated_on", "calibration_due"])
        scale.save()
    return scale


def change_scale(*, key: uuid.UUID, person: User | None, scale: Scale, version: int, data: ScaleData) -> Scale:
    """Change what is known of a scale; weighings keep the ± that they were made with.

    Raises Stale where someone else changed it meanwhile; Refusal as `add_scale`.
    """
    _refuse_nonsense(data)
    values = data.values()
    with acts.begin(
        key=key, person=person, code="scale.changed", subject=f"scale:{scale.code}", changes=acts.changed(scale, values)
    ):
        _refuse_taken(data, scale)
        acts.update_master(scale, version=version, values=values)
    return scale


def check_scale(
    *,
    key: uuid.UUID,
    person: User | None,
    scale: Scale,
    known: Entry,
    read: Entry,
    happened_at: datetime | None = None,
) -> ScaleCheck:
    """Record what a scale said of a known weight: it passes within its error and one step.

    Raises Refusal for a weight that is no check: nothing, or more than the scale's capacity.
    """
    if not 0 < known.stored <= scale.capacity_g:
        raise Refusal(
            f"A check needs a weight that the scale can take: above zero, up to {scale.capacity_typed}.",
            code="no known weight", field="known",
        )
    passed = abs(read.stored - known.stored) <= scale.error_g + scale.resolution_g
    with acts.begin(
        key=key, person=person, code="scale.checked", subject=f"scale:{scale.code}", changes={"passed": passed}
    ) as act:
        return ScaleCheck.objects.create(
            act=act, scale=scale, known_g=known.stored, known_typed=known.typed, read_g=read.stored, read_typed=read.typed,
            passed=passed, happened_at=happened_at or clock.now(),
        )


def _refuse_nonsense(data: ScaleData) -> None:
    if data.resolution.stored == 0:
        raise Refusal("A scale tells at least one gram apart. Type its smallest step.", code="no resolution", field="resolution")
    if data.capacity.stored < 10 * data.resolution.stored:
        raise Refusal(
            "The scale's capacity must be at least ten of its steps. Check both and their units.", code="capacity", field="capacity"
        )
    if data.error.stored > data.capacity.stored // 10:
        raise Refusal(
            "An error of more than a tenth of the capacity isn't a scale to fill by. Check it and its unit.", code="error",
            field="error",
        )
    if data.calibrated_on and data.calibrated_on > clock.today():
        raise Refusal("The calibration is still to come.", code="in the future", field="calibrated_on")
    if data.calibrated_on and data.calibration_due and data.calibration_due <= data.calibrated_on:
        raise Refusal("It's due after it was calibrated. Check both days.", code="due before", field="calibration_due")


def _refuse_taken(data: ScaleData, scale: Scale | None) -> None:
    taken = Scale.objects.filter(code=data.code.strip().upper())
    if scale is not None:
        taken = taken.exclude(pk=scale.pk)
    if taken.exists():
        raise Refusal("Another scale has this code.", code="code taken", field="code")
