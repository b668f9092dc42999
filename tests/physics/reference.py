"""Published figures kept beside the tests, each row with its source."""

from __future__ import annotations

import csv
from pathlib import Path

FOLDER = Path(__file__).resolve().parent.parent / "reference"


def rows(name):
    with (FOLDER / name).open(encoding="utf-8", newline="") as file:
        found = list(csv.DictReader(file))
    assert found
    assert all(row["source"] for row in found)
    return found
