"""One step of the invented past: what is recorded, when, by whom, as plain data.

Steps are made without a database and done one after the other; a step's name is the seed of its
act's key, so a step that was done is known again and never done twice.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from datetime import datetime
from typing import Any


@dataclass(frozen=True, slots=True)
class Step:
    """What to record: the verb names the service, the values are what a form would carry."""

    name: str
    verb: str
    at: datetime
    by: str  # sign-in name
    values: Mapping[str, Any] = field(default_factory=dict)

    def line(self) -> str:
        """The step as one line of text, the same for the same step."""
        plain = [self.name, self.verb, self.at.isoformat(), self.by, dict(self.values)]
        return json.dumps(plain, sort_keys=True, default=str, ensure_ascii=False)


def text_of(steps: Iterable[Step]) -> str:
    """Return all steps as text, to compare two plans byte by byte."""
    return "\n".join(step.line() for step in steps)
