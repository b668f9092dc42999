"""Forms of the scale: weigh, strike, and what a weighing is told with."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from django import forms

from bottles.forms.parts import text
from bottles.models import Scale, Weighing
from bottles.selectors.scales import Checked, checked_scales
from bottles.services.moving import OnScale
from shop.base.fields import HappenedField, MassField
from shop.people.acting import ActForm

WET_HINT = (
    "Ice, frost and water weigh too: the figure then is the most that can be inside, its ± is wider, "
    "and it can't prove a full fill. Wipe the bottle dry and weigh again where it matters."
)
GROSS_HINT = "As the scale says it: 24-6, 24 lb 6, 11.06 kg. A bare number is taken in the scale's own unit."
STEPS = [step for step in Weighing.STEPS if step[0] in ("arrival", "stored", "dispatch", "stocktake")]


class ScaleField(forms.ModelChoiceField):
    """One of the scales in use."""

    def __init__(self, **kwargs: Any) -> None:
        kwargs.setdefault("label", "Scale")
        kwargs.setdefault("empty_label", "choose a scale")
        kwargs.setdefault("error_messages", {"required": "Say which scale it stood on."})
        super().__init__(queryset=Scale.objects.filter(active=True).order_by("name"), **kwargs)


class OnScaleForm(ActForm):
    """A form with a scale and its reading; a bare number is read in that scale's own unit."""

    optional = False

    scale = ScaleField()
    gross = MassField(
        label="The scale says",
        help_text=GROSS_HINT,
        error_messages={"required": "Type what the scale says, with everything of the tare list on the bottle."},
    )
    wet = forms.BooleanField(label="Wet or frosted", required=False, help_text=WET_HINT)

    def __init__(self, *args: Any, scales: Sequence[Checked] | None = None, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        checked = {one.scale.pk: one for one in (checked_scales(self.shop) if scales is None else scales)}
        if len(checked) == 1:
            self.fields["scale"].initial = next(iter(checked))
        self.fields["scale"].label_from_instance = lambda scale: _told(checked.get(scale.pk), scale)  # type: ignore[attr-defined]
        for name in ("scale", "gross") if self.optional else ():
            self.fields[name].required = False
        chosen = str(self.data.get("scale", ""))
        for scale in (one.scale for one in checked.values() if str(one.scale.pk) == chosen):
            self.fields["gross"].read_off(scale.style)  # type: ignore[attr-defined]

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        if cleaned.get("gross") is not None and cleaned.get("scale") is None and "scale" not in self.errors:
            self.add_error("scale", forms.ValidationError("Say which scale it stood on.", code="no scale"))
        return cleaned

    def weighed(self) -> OnScale | None:
        """What the scale says, or None where nothing was typed."""
        data = self.cleaned_data
        if data.get("gross") is None or data.get("scale") is None:
            return None
        return OnScale(scale=data["scale"], gross=data["gross"], wet=data["wet"])


def _told(checked: Checked | None, scale: Scale) -> str:
    """A scale's name, with what its last check says where that isn't a pass of today."""
    if checked is None or checked.passed_today:
        return scale.name
    return f"{scale.name} ({'failed its check' if checked.failed else 'not checked today'})"


class WeighForm(OnScaleForm):
    """What a scale says of a bottle."""

    step = forms.ChoiceField(label="When", choices=STEPS, initial="stored")
    reason = text(
        "Reason, if the books say otherwise", 200,
        help_text="Only asked where scale and books differ beyond their ± and the bottle never left the shop.",
    )  # fmt: skip
    happened_at = HappenedField(help_text="A weighing older than the latest one is kept and moves nothing in the books.")

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        if not self.is_bound:  # where something is to be put right that takes the focus
            self.fields["gross"].widget.attrs["autofocus"] = True


class StrikeWeighingForm(ActForm):
    """Why a weighing is struck, and what the scale really said."""

    reason = text(
        "What was wrong", 200, required=True,
        error_messages={"required": "Say why: mistyped, another bottle on the scale, something left on it."},
    )  # fmt: skip
    right = MassField(
        label="What the scale really said", required=False,
        help_text="With it a second weighing takes the place of the first, at the same time on the same scale. "
        "A bare number is taken in that scale's own unit.",
    )  # fmt: skip

    def __init__(self, *args: Any, scale: Scale, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["right"].read_off(scale.style)  # type: ignore[attr-defined]
