"""Which days the manager's balance covers."""

from __future__ import annotations

from datetime import date, datetime
from typing import Any

from django import forms

from bottles.forms.parts import day
from shop.base.fields import HappenedField


class DaysForm(forms.Form):
    """From a day to a day, perhaps as known at a moment."""

    first = day("From", required=False)
    last = day("To the end of", required=False)
    known_at = HappenedField(label="As known at (if not now)")

    def __init__(self, *args: Any, zone: Any, today: date, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["known_at"].zone = zone  # type: ignore[attr-defined]
        self.today = today
        self.use_required_attribute = False

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean() or {}
        first, last = cleaned.get("first"), cleaned.get("last")
        if first and last and last < first:
            self.add_error("last", forms.ValidationError("This day lies before the first one.", code="before the first"))
        for name in ("first", "last"):
            if cleaned.get(name) and not 1990 <= cleaned[name].year <= self.today.year + 1:
                self.add_error(name, forms.ValidationError("Check the year.", code="year"))
        return cleaned

    def span(self) -> tuple[date, date, datetime | None]:
        """The days to show: this month, where none were given or they can't be."""
        data = self.cleaned_data if self.is_valid() else {}
        last = data.get("last") or self.today
        first = data.get("first") or last.replace(day=1)
        return first, last, data.get("known_at")


class SinceForm(forms.Form):
    """Since when a bottle must have been weighed."""

    since = day("Weighed since", required=False)

    def day(self, otherwise: date) -> date:
        """The day that was asked for, else another."""
        if self.is_valid() and self.cleaned_data["since"] and 1990 <= self.cleaned_data["since"].year < 9000:
            return self.cleaned_data["since"]  # type: ignore[no-any-return]
        return otherwise
