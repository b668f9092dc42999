"""Conditions that somebody may note on a bottle, and what each does.

A condition noted counts from the day it is noted, whatever the stamp says, until a row
of its own ends it. One that isn't listed here counts as damage: the list can't excuse
what a person saw.
"""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import Literal

Effect = Literal["damage", "clean first", "dry and purge", "illegible", "contents unknown"]

CONDITIONS: Mapping[str, tuple[str, Effect]] = MappingProxyType(
    {
        "dent": ("dent, gouge or cut", "damage"),
        "crack": ("crack", "damage"),
        "bulge": ("bulge", "damage"),
        "corrosion": ("corrosion", "damage"),
        "abrasion": ("worn or frayed wrapping", "damage"),
        "heat": ("overheated or in a fire", "damage"),
        "accident": ("in an accident", "damage"),
        "leak": ("leak", "damage"),
        "valve damaged": ("valve bent, damaged or not shutting", "damage"),
        "safety disc damaged": ("safety disc missing, damaged or tampered with", "damage"),
        "rings dull": ("rings dull in the hammer test", "damage"),
        "other": ("other damage", "damage"),
        "dirty outlet": ("oil, grease or dirt at valve or outlet", "clean first"),
        "without pressure": ("found open or without pressure", "dry and purge"),
        "stamp illegible": ("mark, serial or stamp illegible", "illegible"),
        "contents unknown": ("last contents unknown", "contents unknown"),
    }
)


def effect_of(code: str) -> Effect:
    """What a condition does; one that isn't listed counts as damage."""
    return CONDITIONS[code][1] if code in CONDITIONS else "damage"


def label_of(code: str) -> str:
    """A condition in words."""
    return CONDITIONS[code][0] if code in CONDITIONS else code


def makes_due_at_once(code: str) -> bool:
    """Whether it has to be tested and inspected before further use."""
    return effect_of(code) == "damage"
