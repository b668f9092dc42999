"""Codes of bottles: what the next free one is."""

from __future__ import annotations

import re

from django.db.models.functions import Length

from bottles.models import Bottle

PREFIXES = {"supply": ("S-", 2)}  # any other use: T-, four digits
USUAL = ("T-", 4)
CODE = re.compile(r"[A-Z0-9][A-Z0-9-]{0,18}[A-Z0-9]|[A-Z0-9]")


def next_code(use: str) -> str:
    """Return the next free code of a bottle for this use: one above the highest so far.

    Codes are never freed, so the highest is enough; a code typed in another way is passed by.
    """
    prefix, digits = PREFIXES.get(use, USUAL)
    plain = re.compile(re.escape(prefix) + r"(\d+)")
    highest = 0
    codes = Bottle.objects.filter(code__startswith=prefix).order_by(Length("code").desc(), "-code")
    for code in codes.values_list("code", flat=True).iterator(chunk_size=100):
        if match := plain.fullmatch(code):
            highest = int(match[1])
            break
    return f"{prefix}{highest + 1:0{digits}d}"


def as_code(text: str) -> str:
    """Return a typed code as it's kept: capitals, no spaces around it."""
    return text.strip().upper()


def is_code(text: str) -> bool:
    """Whether the text can be a bottle's code: letters, digits and dashes, as a label carries them."""
    return CODE.fullmatch(text) is not None
