"""Read a date stamp as somebody read it off the metal.

>>> stamp = read_stamp("06/2021", year_first=False)
>>> stamp.year, stamp.month
(2021, 6)
>>> read_stamp("9 [A1/32] 06", year_first=False).facility
'A123'

Stamps give month and year, never a day. The United States and Canada stamp the month
first, ADR and UN marks the year first, and either may be cut to two digits. So:

- four digits are the year, wherever they stand
- two small numbers are taken the one way that is possible (``6/21`` can only be June
  2021: there is no month 21); where both ways are possible (``05/06``) the stamp is
  ambiguous and has to be typed with four digits, because guessing wrong moves a due
  date by years
- with a facility's number between them, month first, as 49 CFR 180.213(d) lays it out
- a year alone is kept as a year alone: only some rule sets accept it

After the date may stand a star, a plus and letters (S, E, UE, VE), which say how it was
tested.
"""

from __future__ import annotations

import datetime
import re
from dataclasses import dataclass

from shop.rules import month as months

# A two-digit year is taken to lie between these many years before and after the day
# asked. What falls after that day is then refused as a date in the future, in words,
# rather than put a century back without saying so.
_YEARS_BACK = 79
_EARLIEST_YEAR = 1900

_MARKS = re.compile(r"^(.*?)((?:[\s*+★☆✩✪⭐]|STAR|PLUS|UE|VE|(?<![A-Z])[SE](?![A-Z]))*)$")
_NAMES = {
    name: number
    for number, names in enumerate(
        (
            ("JAN", "JANUARY"),
            ("FEB", "FEBRUARY"),
            ("MAR", "MARCH"),
            ("APR", "APRIL"),
            ("MAY",),
            ("JUN", "JUNE"),
            ("JUL", "JULY"),
            ("AUG", "AUGUST"),
            ("SEP", "SEPT", "SEPTEMBER"),
            ("OCT", "OCTOBER"),
            ("NOV", "NOVEMBER"),
            ("DEC", "DECEMBER"),
        ),
        start=1,
    )
    for name in names
}
_SEPARATOR = r"[\s/.\-]+"
_BOXED = re.compile(r"(\d{1,4})[\s/.\-]*[\[(]([^\])]+)[\])][\s/.\-]*(\d{1,4})")
_INLINE = re.compile(rf"(\d{{1,4}}){_SEPARATOR}([A-Z]\d{{3}}|[A-Z]\d/\d{{2}}){_SEPARATOR}(\d{{1,4}})")
_TWO = re.compile(rf"(\d{{1,4}}){_SEPARATOR}(\d{{1,4}})")
_NAMED = re.compile(rf"([A-Z]{{3,9}})(?:{_SEPARATOR}|)(\d{{2}}|\d{{4}})")
_YEAR = re.compile(r"\d{4}")


class StampError(ValueError):
    """A stamp that can't be taken as a date; ``code`` says why, ``sentence`` what to do."""

    def __init__(self, code: str, sentence: str) -> None:
        self.code = code
        self.sentence = sentence
        super().__init__(code, sentence)

    def __str__(self) -> str:
        return self.sentence


@dataclass(frozen=True, slots=True)
class DateStamp:
    """A stamp as understood; ``month`` is None where only a year is stamped."""

    typed: str
    year: int
    month: int | None
    star: bool = False
    plus: bool = False
    letters: tuple[str, ...] = ()
    facility: str | None = None

    @property
    def at(self) -> months.Month:
        """Its month as a number; a year alone counts from its January, the earliest."""
        return months.from_ym(self.year, self.month if self.month is not None else 1)

    @property
    def text(self) -> str:
        """The date as a person reads it back."""
        if self.month is None:
            return str(self.year)
        return months.slashed(self.at)


def read_stamp(typed: str, *, year_first: bool, today: datetime.date | None = None) -> DateStamp:
    """The stamp typed, or a StampError that says why it can't be taken as a date.

    ``today`` is needed to know the century of a two-digit year; without it such a year
    is taken to be in this century. ``year_first`` is the rule set's order: it words the
    sentence of an ambiguous stamp, and is never used to guess.
    """
    text = re.sub(r"[\u2010-\u2015\u2212]", "-", typed).upper().strip()
    if not text:
        raise StampError("no stamp", "There is no stamp here. Type what is stamped, such as 06/2021.")
    if len(text) > 60 or not (match := _MARKS.match(text)):
        raise _not_a_stamp()
    body, suffix = match[1].strip(), match[2]
    year, month, facility = _date(body, year_first, today)
    if month is not None and not 1 <= month <= months.MONTHS_A_YEAR:
        raise StampError("no such month", f"There is no month {month}. Read the stamp again: month and year.")
    if year < _EARLIEST_YEAR:
        raise StampError("no such year", f"{year} can't be a bottle's year. Read the stamp again.")
    stamp = DateStamp(
        typed,
        year,
        month,
        star=bool(re.search(r"[*★☆✩✪⭐]|STAR", suffix)),
        plus="+" in suffix or "PLUS" in suffix,
        letters=tuple(re.findall(r"UE|VE|S(?!T)|(?<![UV])E", suffix.replace("PLUS", ""))),
        facility=facility,
    )
    if today is not None and _is_later(stamp, today):
        raise StampError(
            "stamp in the future",
            f"{stamp.text} is still to come. Read it again, with all four digits of the year.",
        )
    return stamp


def _is_later(stamp: DateStamp, today: datetime.date) -> bool:
    return stamp.at > months.of_date(today)


def _date(body: str, year_first: bool, today: datetime.date | None) -> tuple[int, int | None, str | None]:
    """Year, month and facility of a stamp without its suffix."""
    if match := _BOXED.fullmatch(body):
        return (*_month_then_year(match[1], match[3], today), _boxed(match[2]))
    if match := _INLINE.fullmatch(body):
        facility = _boxed(match[2]) if "/" in match[2] else match[2]
        return (*_month_then_year(match[1], match[3], today), facility)
    if match := _TWO.fullmatch(body):
        return (*_two_numbers(match[1], match[2], year_first, today), None)
    if (match := _NAMED.fullmatch(body)) and match[1] in _NAMES:
        return _full_year(match[2], today), _NAMES[match[1]], None
    if _YEAR.fullmatch(body):
        return int(body), None, None
    raise _not_a_stamp()


def _month_then_year(first: str, second: str, today: datetime.date | None) -> tuple[int, int | None]:
    if len(first) == 4:
        return int(first), int(second)
    return _full_year(second, today), int(first)


def _two_numbers(first: str, second: str, year_first: bool, today: datetime.date | None) -> tuple[int, int | None]:
    if 3 in (len(first), len(second)) or (len(first) == 4 and len(second) == 4):
        raise _not_a_stamp()
    if len(first) == 4:
        return int(first), int(second)
    if len(second) == 4:
        return int(second), int(first)
    # A year is never cut to one digit, so a single digit is the month.
    ways = set()
    if len(second) == 2 and 1 <= int(first) <= months.MONTHS_A_YEAR:
        ways.add((_full_year(second, today), int(first)))
    if len(first) == 2 and 1 <= int(second) <= months.MONTHS_A_YEAR:
        ways.add((_full_year(first, today), int(second)))
    if len(ways) > 1:
        order = "year and month" if year_first else "month and year"
        raise StampError(
            "ambiguous stamp",
            f"{first}/{second} can be read two ways. These rules stamp {order}, but other"
            " countries the other way: type the year with all four digits.",
        )
    if not ways:
        if len(first) == 1 and len(second) == 1:
            raise _not_a_stamp()
        raise StampError(
            "no such month",
            f"Neither {first} nor {second} can be a month. Read the stamp again.",
        )
    return ways.pop()


def _full_year(digits: str, today: datetime.date | None) -> int:
    if len(digits) == 4:
        return int(digits)
    if len(digits) != 2:
        raise _not_a_stamp()
    if today is None:
        return 2000 + int(digits)
    earliest = today.year - _YEARS_BACK
    return earliest + (int(digits) - earliest) % 100


def _boxed(inside: str) -> str:
    """A facility's number out of its square.

    It is read upper left, upper right, lower right, lower left (49 CFR 180.213(d), from
    memory), so a square of A1 over 32 is A123.
    """
    rows = [re.sub(r"\s", "", row) for row in re.split(r"[/|]", inside)]
    if len(rows) == 2 and len(rows[0]) == 2 and len(rows[1]) == 2:
        return rows[0] + rows[1][::-1]
    return re.sub(r"[^A-Z0-9]", "", inside)


def _not_a_stamp() -> StampError:
    return StampError(
        "not a stamp",
        "This isn't a month and a year. Type what is stamped, such as 06/2021 or 2021/06.",
    )
