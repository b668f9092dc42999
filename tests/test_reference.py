"""Every printed value that a test leans on says where it comes from."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest

FOLDER = Path(__file__).parent / "reference"
OURS = {"released_rule_sets.csv"}  # hashes of our own files


@pytest.mark.parametrize("path", sorted(FOLDER.glob("*.csv")), ids=lambda path: path.name)
def test_every_row_names_its_source(path: Path) -> None:
    lines = [line for line in path.read_text(encoding="utf-8").splitlines() if line and not line.startswith("#")]
    rows = list(csv.DictReader(lines))
    assert rows
    if path.name not in OURS:
        assert [row for row in rows if not (row.get("source") or "").strip()] == []
