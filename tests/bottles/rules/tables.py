"""Case tables kept as csv, and how their columns are read."""

from __future__ import annotations

import csv
import datetime
from pathlib import Path

REFERENCE = Path(__file__).parents[2] / "reference"


def rows(name: str) -> list[dict[str, str]]:
    """The rows of a table; lines that begin with # are its head."""
    text = (REFERENCE / name).read_text("utf-8").splitlines()
    return list(csv.DictReader(line for line in text if not line.startswith("#")))


def day(text: str) -> datetime.date:
    return datetime.date.fromisoformat(text)


def yes_no(text: str) -> bool | None:
    return {"yes": True, "no": False, "": None}[text]
