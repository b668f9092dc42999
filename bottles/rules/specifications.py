"""The list of specifications a bottle may be stamped with, as data with citations.

What a country's rules say of each is in its rule set (``edition.py``); this list only
says what the mark itself tells: how the bottle is made, which unit its number is in,
whether it may ever be refilled.
"""

from __future__ import annotations

import functools
import json
from collections.abc import Mapping
from dataclasses import dataclass
from importlib import resources
from types import MappingProxyType
from typing import Literal, cast

from shop.rules.origin import ORIGINS, Origin

Wall = Literal["steel", "aluminium", "composite"]


@dataclass(frozen=True, slots=True)
class Specification:
    """One specification: how such a bottle is made and what its mark's number means."""

    code: str
    title: str
    wall: Wall | None
    pressure_unit: Literal["psi", "bar"]
    refillable: bool
    permit: bool
    citation: str
    basis: Origin
    note: str


@functools.cache
def specifications() -> Mapping[str, Specification]:
    """All known specifications by their code."""
    text = resources.files("bottles.rules").joinpath("editions", "specifications.json").read_text("utf-8")
    listed: dict[str, Specification] = {}
    for row in json.loads(text)["specifications"]:
        code = row["code"]
        if code in listed:
            raise ValueError(f"specifications.json: {code} stands there twice")
        if row["basis"] not in ORIGINS or row["pressure_unit"] not in ("psi", "bar"):
            raise ValueError(f"specifications.json: {code} has an unknown basis or unit")
        if row["wall"] not in ("steel", "aluminium", "composite", None):
            raise ValueError(f"specifications.json: {code} has an unknown wall")
        listed[code] = Specification(
            code=code,
            title=row["title"],
            wall=cast("Wall | None", row["wall"]),
            pressure_unit=row["pressure_unit"],
            refillable=row["refillable"],
            permit=row["permit"],
            citation=row["citation"],
            basis=row["basis"],
            note=row["note"],
        )
    return MappingProxyType(listed)
