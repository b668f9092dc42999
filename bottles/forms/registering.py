"""Register a bottle in a minute; all else may be completed later."""

from __future__ import annotations

from typing import Any

from django import forms

from bottles.forms.owners import OwnerFields
from bottles.forms.particulars import ParticularsForm
from bottles.forms.parts import StampField, text
from bottles.forms.stamps import HINT
from bottles.forms.tares import TareFields
from bottles.selectors.codes import as_code, is_code, next_code
from bottles.services.registering import FirstFacts
from bottles.services.stamps import SeenStamp

MORE = (
    "capacity_basis", "maker", "wall", "alloy", "dip_tube", "below_tube", "outlet", "disc", "disc_stamp", "made_stamp",
    "visual_stamp", "end_stamp", "last_held", "race_grade", "own_limit", "permit", "permit_lists", "permit_charge", "permit_until",
)  # fmt: skip
STAMPS = ("test", "made", "visual", "disc", "end")


class NewBottleForm(ParticularsForm, TareFields, OwnerFields):
    """Serial number, mark, last test, size or capacity, tare; then whose it is and its use."""

    code = text("Code", 20)
    test_stamp = StampField(label="Last test", help_text=HINT)
    made_stamp = StampField(label="Made")
    visual_stamp = StampField(label="Last visual inspection")
    disc_stamp = StampField(label="Safety disc's date")
    end_stamp = StampField(label="End of service life", to_come=True)

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        if not self.is_bound:
            self.fields["serial"].widget.attrs["autofocus"] = True
        supply = next_code("supply")
        self.fields["code"].help_text = f"Empty: the next free one, {next_code('car')}, or {supply} for a supply bottle."

    def more_fields(self) -> list[Any]:
        """What stands below the first lines of the page."""
        return [self[name] for name in MORE]

    @property
    def has_more(self) -> bool:
        """Whether any of that was filled in, or has to be put right."""
        return any(name in self.errors or self[name].value() not in (None, "", self[name].initial) for name in (*MORE, "note"))

    def clean_code(self) -> str:
        code = as_code(self.cleaned_data["code"])
        if code and not is_code(code):
            raise forms.ValidationError("A code is letters, digits and dashes, as a label carries them.", code="not a code")
        return code

    def first_facts(self) -> FirstFacts:
        """Owner, tare and stamps as typed."""
        data = self.cleaned_data
        stamps = [SeenStamp(kind, data[f"{kind}_stamp"]) for kind in STAMPS if data.get(f"{kind}_stamp")]
        return FirstFacts(owner=self.new_owner(), tare=self.new_tare(), stamps=stamps)
