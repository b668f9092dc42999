"""What is stamped or known of the vessel itself."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from django import forms

from bottles.forms.parts import RegisterForm, day, text
from bottles.models import Bottle
from bottles.services.registering import Particulars
from shop.base.fields import MassField, VolumeField, mass_shown_back
from shop.physics.units import in_own_unit

BASES = [basis for basis in Bottle.CAPACITY_BASES if basis[0] in ("stamped", "measured", "maker")]
OR_TICK = "Type the {}, or tick that it isn't legible."
YES_NO = {"yes": True, "no": False}  # anything else isn't known
GRADES = [("unknown", "not known"), ("yes", "race grade (with SO2)"), ("no", "plain nitrous")]


class ParticularsForm(RegisterForm):
    """The fields of a bottle; serial number and mark may be told to be illegible, all else may wait."""

    serial = text("Serial number", 60, required=True, error_messages={"required": OR_TICK.format("serial number")})
    serial_illegible = forms.BooleanField(label="The serial number isn't legible", required=False)
    mark = text(
        "Mark with pressure", 60, required=True, error_messages={"required": OR_TICK.format("mark")},
        help_text="As it's stamped: DOT-3AL1800, TC-3ALM124, UN ISO 7866 PH250.",
        widget=forms.TextInput(attrs={"autocomplete": "off", "autocapitalize": "characters", "spellcheck": "false"}),
    )
    mark_illegible = forms.BooleanField(label="The mark isn't legible", required=False)
    capacity = VolumeField(
        label="Water capacity", required=False, help_text="If it's stamped or measured: 6.8 L, 415 in3."
    )
    capacity_basis = forms.ChoiceField(label="How the capacity is known", choices=BASES, required=False, initial="stamped")
    size = MassField(
        label="Size (labelled)", required=False,
        help_text="The charge on its label: 10 lb. Without a stamped capacity it's inferred from this.",
    )
    use = forms.ChoiceField(label="Use", choices=Bottle.USES, initial="car")
    maker = text("Maker", 80)
    wall = forms.ChoiceField(
        label="Wall", choices=Bottle.WALLS, initial="unknown", required=False, help_text="Unknown: taken from its mark."
    )
    alloy = text("Alloy", 40, help_text="If it's stamped or known, such as 6061 or 6351.")
    dip_tube = forms.ChoiceField(label="Dip (siphon) tube", choices=Bottle.DIP_TUBES, initial="unknown", required=False)
    below_tube = VolumeField(
        label="Liquid below the dip tube's end (left behind)", required=False,
        help_text="60 mL, if it was measured or the maker says so. With the bottle upright it comes out as vapour alone.",
    )
    outlet = text("Outlet", 60, help_text="Thread or standard of the valve's outlet.")
    disc = text("Safety disc", 60, help_text="Its pressure as marked, such as 3000 psi.")
    permit = text("Permit", 60, help_text="Number of the special permit it's made or filled under.")
    permit_charge = MassField(label="Permit's largest charge", required=False)
    permit_until = day("Permit holds until", required=False)
    permit_lists = forms.ChoiceField(
        label="The permit lists nitrous oxide", choices=[("unknown", "not looked up"), ("yes", "yes"), ("no", "no")],
        initial="unknown", required=False,
    )
    own_limit = MassField(
        label="The shop's own limit", required=False, help_text="Never more than this goes in, whatever the rules allow."
    )
    last_held = forms.ChoiceField(label="What it last held", choices=Bottle.HELD, initial="", required=False)
    race_grade = forms.ChoiceField(label="Nitrous in it", choices=GRADES, initial="unknown", required=False)
    note = forms.CharField(
        label="Note", required=False, max_length=2000, widget=forms.Textarea(attrs={"rows": 3}),
        error_messages={"max_length": "That is longer than the 2,000 characters kept here. Write it shorter."},
    )

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        for name in ("serial", "mark"):
            if self.data.get(f"{name}_illegible"):
                self.fields[name].required = False

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        for name, word in (("serial", "serial number"), ("mark", "mark")):
            if cleaned.get(name) and cleaned.get(f"{name}_illegible"):
                self.add_error(name, forms.ValidationError(f"Either the {word} or the tick, not both.", code="both"))
        for name, word in (("capacity", "A capacity"), ("size", "A size")):
            if cleaned.get(name) and cleaned[name].stored == 0:
                self.add_error(name, forms.ValidationError(f"{word} of nothing can't be. Leave it empty.", code="nothing"))
        capacity = cleaned.get("capacity")
        if capacity and not 50 <= capacity.stored <= 1_000_000:
            self.add_error(
                "capacity",
                forms.ValidationError("A bottle's capacity lies between 50 mL and 1,000 L. Check its unit.", code="out of range"),
            )
        return cleaned

    def particulars(self) -> Particulars:
        """What was typed, as it's kept."""
        data = self.cleaned_data
        told = Particulars(
            **{name: data[name] for name in ("serial", "mark", "maker", "alloy", "outlet", "disc", "use", "permit", "note")},
            charge_g=self.stored("size"), charge_typed=self.typed("size"),
            wall=data["wall"] or "unknown", dip_tube=data["dip_tube"] or "unknown",
            below_tube_ml=self.stored("below_tube"), below_tube_typed=self.typed("below_tube"),
            permit_charge_g=self.stored("permit_charge"), permit_until=data["permit_until"],
            permit_lists_nitrous=YES_NO.get(data["permit_lists"]), own_limit_g=self.stored("own_limit"),
            last_held=data["last_held"], race_grade=YES_NO.get(data["race_grade"]),
        )
        if not self.stored("capacity"):
            return told
        return replace(
            told, capacity_ml=self.stored("capacity"), capacity_typed=self.typed("capacity"),
            capacity_basis=data["capacity_basis"] or "stamped",
        )


class ChangeForm(ParticularsForm):
    """Complete or correct what is written of a bottle."""


HELD = (
    "serial", "mark", "use", "maker", "wall", "alloy", "dip_tube", "outlet", "disc", "permit", "permit_until", "last_held",
    "note",
)  # fmt: skip
SAID = {True: "yes", False: "no", None: "unknown"}


def particulars_typed(bottle: Bottle, *, unit: str) -> dict[str, Any]:
    """What the fields hold for a bottle as it's written now, where a bare weight is in a unit."""
    held = {name: getattr(bottle, name) for name in HELD}
    measured = bottle.capacity_basis in dict(BASES)
    return held | {
        "serial_illegible": not bottle.serial,
        "mark_illegible": not bottle.mark,
        "capacity": bottle.capacity_typed if measured else "",
        "capacity_basis": bottle.capacity_basis if measured else "stamped",
        "below_tube": bottle.below_tube_typed,
        "size": mass_shown_back(bottle.charge_g, bottle.charge_typed, meant=unit),
        "permit_charge": in_own_unit(bottle.permit_charge_g, "g") if bottle.permit_charge_g else "",
        "own_limit": in_own_unit(bottle.own_limit_g, "g") if bottle.own_limit_g else "",
        "permit_lists": SAID[bottle.permit_lists_nitrous],
        "race_grade": SAID[bottle.race_grade],
        "version": bottle.version,
    }
