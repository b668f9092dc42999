"""What is wrong with a bottle, what ended it, and the end of a bottle."""

from __future__ import annotations

from typing import Any

from django import forms

from bottles.forms.parts import RegisterForm, day, text
from bottles.rules.conditions import CONDITIONS

# One thing that is no damage: such a bottle goes through the shop's drying and purging steps.
CODES = [
    ("without pressure", "Found open or without pressure"),
    *((code, words[0].upper() + words[1:]) for code, (words, _) in CONDITIONS.items()),
]


class ConditionForm(RegisterForm):
    """Something seen on a bottle."""

    code = forms.ChoiceField(
        label="What is wrong", choices=[("", "choose what was seen"), *CODES],
        error_messages={"required": "Choose what was seen; “other damage” where nothing fits."},
    )
    note = forms.CharField(
        label="Where and how bad", required=False, max_length=1000, widget=forms.Textarea(attrs={"rows": 3}),
        error_messages={"max_length": "That is longer than the 1,000 characters kept here. Write it shorter."},
    )
    seen_on = day("Seen on")

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        if cleaned.get("code") == "other" and not (cleaned.get("note") or "").strip():
            self.add_error("note", forms.ValidationError("Say what was seen.", code="required"))
        return cleaned


class EndForm(RegisterForm):
    """What ended a condition."""

    how = text(
        "What ended it", 200, required=True, help_text="The repair and who did it, the test, the second look.",
        error_messages={"required": "Say what ended it: the repair and who did it, the test, the second look."},
    )


class CondemnForm(RegisterForm):
    """Condemn a bottle: for good."""

    note = text(
        "Why", 1000, required=True, help_text="Who condemned it, what was found, how it's marked.",
        error_messages={"required": "Say why, and who condemned it: this can't be taken back."},
    )
    seen_on = day("Condemned on")
    sure = forms.BooleanField(
        label="Condemned for good: no repair or test brings it back",
        error_messages={"required": "Tick this: a condemned bottle never comes back."},
    )


class RetireForm(RegisterForm):
    """Take a bottle out of the register for good."""

    reason = text(
        "Why, and where it went", 300, required=True,
        error_messages={"required": "Say why it leaves the register, and where it went."},
    )
    sure = forms.BooleanField(
        label="Nothing more will be recorded of it",
        error_messages={"required": "Tick this: a retired bottle takes no more entries."},
    )
