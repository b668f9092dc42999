"""What has to be known before a shop opens for the first time: from flags, or asked at the terminal."""

from __future__ import annotations

import getpass
import os
import secrets
import sys
import zoneinfo
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from shop.base.datafolder import CannotOpen

COUNTRIES = {"US": "United States (49 CFR)", "CA": "Canada (TDG)", "ADR": "Europe (ADR)"}
UNITS = {"us": "lb, psi, °F", "metric": "kg, bar, °C"}
LOWEST_M, HIGHEST_M = -430, 5500


@dataclass(frozen=True)
class Question:
    """One thing to know: its flag, its words, and how an answer is read."""

    option: str
    words: str
    read: Callable[[str], Any]


def _name(text: str) -> str:
    if not text.strip():
        raise ValueError("can't be empty")
    if len(text.strip()) > 120:
        raise ValueError("is longer than 120 characters")
    return text.strip()


def _one_of(choices: dict[str, str], turn: Callable[[str], str]) -> Callable[[str], str]:
    def read(text: str) -> str:
        if turn(text.strip()) not in choices:
            raise ValueError("must be one of " + ", ".join(choices))
        return turn(text.strip())

    return read


def _zone(text: str) -> str:
    if text.strip() not in zoneinfo.available_timezones():
        raise ValueError("must be the name of a time zone, for instance America/Chicago or Europe/Warsaw")
    return text.strip()


def _height(text: str) -> int:
    try:
        height = int(text.strip())
    except ValueError:
        raise ValueError("must be a whole number of metres") from None
    if not LOWEST_M <= height <= HIGHEST_M:
        raise ValueError(f"must lie between {LOWEST_M} and {HIGHEST_M} metres")
    return height


QUESTIONS = (
    Question("shop_name", "Name of the shop", _name),
    Question("country", "Country of rules: " + "; ".join(f"{k} = {v}" for k, v in COUNTRIES.items()),
             _one_of(COUNTRIES, str.upper)),
    Question("units", "Units: " + "; ".join(f"{k} = {v}" for k, v in UNITS.items()), _one_of(UNITS, str.lower)),
    Question("time_zone", "Time zone, for instance America/Chicago", _zone),
    Question("height_m", "Height above sea in metres", _height),
    Question("manager", "Name of the first manager, who signs in by it", _name),
)  # fmt: skip


def answers(options: dict[str, Any]) -> dict[str, Any]:
    """Return what `found_shop` takes; asks at the terminal for what no flag gives.

    Raises CannotOpen where an answer is wrong, or missing with nobody to ask.
    """
    found: dict[str, Any] = {}
    missing = [q for q in QUESTIONS if options.get(q.option) is None]
    if missing and not sys.stdin.isatty():
        flags = ", ".join(_flag(q) for q in missing)
        raise CannotOpen(
            f"This shop is new and nobody is at the terminal to ask: give {flags}, or use --demo for the invented shop."
        )
    for question in QUESTIONS:
        found[question.option] = _ask(question) if question in missing else _read(question, options)
    return {
        "name": found["shop_name"],
        "country": found["country"],
        "units": found["units"],
        "time_zone": found["time_zone"],
        "height_m": found["height_m"],
        "manager_name": found["manager"],
        "manager_password": _password(asked=bool(missing)),
    }


def demo_wishes(options: dict[str, Any]) -> dict[str, Any]:
    """Return what flags say about the invented shop; its name and its people are given.

    Raises CannotOpen.
    """
    given = [question for question in QUESTIONS if options.get(question.option) is not None]
    for question in given:
        if question.option in ("shop_name", "manager"):
            raise CannotOpen(f"{_flag(question)} is for a shop of your own: leave it out, or leave --demo out.")
    return {question.option: _read(question, options) for question in given}


def new_password() -> str:
    """Return a password that can be read out and typed."""
    letters = "abcdefghjkmnpqrstuvwxyz23456789"  # none that look alike
    return "-".join("".join(secrets.choice(letters) for _ in range(4)) for _ in range(3))


def _password(*, asked: bool) -> str:
    given = os.environ.get("TAREBOOK_MANAGER_PASSWORD", "")
    if not given and asked:
        given = getpass.getpass("Password of the manager (nothing: one is made and printed): ")
    if given and len(given) < 8:
        raise CannotOpen("The manager's password must have at least 8 characters.")
    return given or new_password()


def _read(question: Question, options: dict[str, Any]) -> Any:
    try:
        return question.read(options[question.option])
    except ValueError as error:
        raise CannotOpen(f"{_flag(question)} {error}.") from error


def _ask(question: Question) -> Any:
    while True:
        try:
            return question.read(input(f"{question.words}: "))
        except ValueError as error:
            print(f"That {error}.")
        except EOFError as error:
            raise CannotOpen("Nothing was opened: the questions were not answered.") from error


def _flag(question: Question) -> str:
    return "--" + question.option.replace("_", "-")
