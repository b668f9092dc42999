"""Fields and habits that several forms of the register share."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from django import forms

from bottles.rules.stamps import DateStamp, StampError, read_stamp
from bottles.selectors.judging import rulebook
from shop.people.acting import ActForm
from shop.rules.reason import Reason


def text(label: str, longest: int, *, required: bool = False, **kwargs: Any) -> forms.CharField:
    """A line of text that says in a sentence how long it may be."""
    kwargs.setdefault("widget", forms.TextInput(attrs={"autocomplete": "off"}))
    errors = {"max_length": f"That is longer than the {longest} characters kept here. Write it shorter."}
    errors |= kwargs.pop("error_messages", {})
    return forms.CharField(label=label, max_length=longest, required=required, error_messages=errors, **kwargs)


def day(label: str, *, required: bool = True, **kwargs: Any) -> forms.DateField:
    """A day, with what a browser offers for it."""
    return forms.DateField(
        label=label,
        required=required,
        widget=forms.DateInput(attrs={"type": "date"}, format="%Y-%m-%d"),
        error_messages={"required": "Give a day.", "invalid": "This isn't a day. Write it as 2026-03-31."},
        **kwargs,
    )


class StampField(forms.CharField):
    """A date as it's stamped; cleans to a DateStamp or None."""

    def __init__(self, *, to_come: bool = False, **kwargs: Any) -> None:
        kwargs.setdefault("required", False)
        kwargs.setdefault("widget", forms.TextInput(attrs={"autocomplete": "off", "data-short": True}))
        super().__init__(**kwargs)
        self.to_come = to_come  # an end of life may still be to come
        self.year_first = False
        self.today: Any = None

    def clean(self, value: Any) -> DateStamp | None:
        typed = super().clean(str(value or "")[:100])  # what is longer is no stamp, and stays typed in the form
        if not typed:
            return None
        try:
            return read_stamp(typed, year_first=self.year_first, today=None if self.to_come else self.today)
        except StampError as error:
            raise forms.ValidationError(error.sentence, code=error.code) from None


class RegisterForm(ActForm):
    """A form of the register: its stamps are read in the country's way, its warnings ticked one by one."""

    confirmed = forms.MultipleChoiceField(
        label="Unusual, but right", required=False, widget=forms.MultipleHiddenInput, choices=()
    )

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        book = rulebook(self.shop)
        for field in self.fields.values():
            if isinstance(field, StampField):
                field.year_first = book.edition.year_first
                field.today = book.on
        self.to_confirm: list[Reason] = []
        # What was ticked is compared with the warnings by the service, once they are known.
        self.fields["confirmed"].valid_value = lambda code: True  # type: ignore[attr-defined]

    def ask(self, reasons: Sequence[Reason]) -> None:
        """Show the warnings, each with a tick of its own."""
        self.to_confirm = list(reasons)
        asked: forms.MultipleChoiceField = self.fields.pop("confirmed")  # type: ignore[assignment]
        asked.widget = forms.CheckboxSelectMultiple()
        asked.required = True  # only said on the page: what was posted has been read already
        asked.choices = [(reason.code, " ".join(filter(None, (reason.sentence, reason.next_step)))) for reason in reasons]
        self.fields["confirmed"] = asked  # the last one, beside the button
        self._bound_fields_cache.pop("confirmed", None)  # type: ignore[attr-defined]
