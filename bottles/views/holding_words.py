"""What a bottle holds, in words: "9.5 of 10.0 lb" first, then percent, books and pressure beside it."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime

from bottles.models import Account, Bottle
from bottles.physics.contents import split_of
from bottles.physics.filling import percent_of_limit
from bottles.selectors.contents import Holding
from bottles.views.refill_words import RefillWords
from shop.base import clock
from shop.base.models import Shop
from shop.physics.errors import PhysicsError
from shop.physics.weights import format_mass

# Where a pressure to expect is of use: a cold store to a car in the sun.
USUAL_MK = {
    "metric": [268_150, 278_150, 288_150, 293_150, 298_150, 303_150],  # −5 to 30 °C
    "us": [266_483, 277_594, 288_706, 294_261, 299_817, 305_372],  # 20 to 90 °F
}

OWN_WORDS = {
    "supplier": "the supplier",
    "returned": "the supplier, returned",
    "line": "the line, lost",
    "vented": "the open air, vented",
    "unaccounted": "unaccounted for",
    "scale": "between the scales",
}


@dataclass(frozen=True, slots=True)
class Told:
    """The contents as a page tells them."""

    figure: str  # "9.5 of 10.0 lb", or "unknown"
    known: bool
    plus_minus: str
    percent: str
    origin: str
    when: str
    books: str
    beside: str  # how scale and books differ


def tell(holding: Holding, limit_g: int | None, words: RefillWords, shop: Shop) -> Told:
    """Put contents into words."""
    books = words.mass(holding.books_g)
    if holding.grams is None:
        return Told("unknown", False, "", "", "", "It was never weighed: unknown, not empty.", "", "")
    figure = words.mass(holding.grams)
    if limit_g:
        number = figure if words.units.mass == "lb oz" else figure.rsplit(" ", 1)[0]
        figure = f"{number} of {words.mass(limit_g)}"
    percent = f"{percent_of_limit(holding.grams, limit_g)} % of its limit" if limit_g else ""
    if holding.weighing is None:
        when = "by the delivery's ticket and what moved since; not weighed here yet"
    else:
        when = f"weighed {at(holding.weighing.happened_at, shop)} on {holding.weighing.scale.name}"
        when += ", wet or frosted" if holding.weighing.wet else ""
        when += ", and moved since by the books" if holding.moved_since else ""
    beside = ""
    if holding.weighing is not None:
        if holding.over_g:
            word = "over" if holding.over_g > 0 else "short"
            beside = f"the scale says {words.small(abs(holding.over_g))} {word}, within the ±"
        else:
            beside = "as the scale"
    # Rounded up, as wherever a figure is told with its ±.
    spread = words.mass(holding.grams, plus_minus_g=holding.error_g).split("±")[1] if holding.error_g else ""
    return Told(figure, True, spread, percent, holding.origin, when, books, beside)


def at(instant: datetime, shop: Shop) -> str:
    """An instant in the shop's time."""
    return instant.astimezone(clock.zone(shop)).strftime("%Y-%m-%d %H:%M")


def expected_pressure(grams: int, bottle: Bottle, millikelvin: int, words: RefillWords) -> str:
    """The pressure that so much nitrous shows at a temperature, and what it then is; empty where it can't be told."""
    if not bottle.capacity_ml:
        return ""
    try:
        split = split_of(max(0, grams) / 1000, bottle.capacity_ml / 1e6, millikelvin / 1000)
    except PhysicsError:
        return "beyond what any bottle may show: full of liquid"
    if split.pressure_pa <= words.ambient_pa:
        return "no pressure"
    phase = "liquid and vapour" if split.liquid_kg and split.vapour_kg else ("full of liquid" if split.liquid_kg else "vapour only")
    return f"{words.pressure(split.pressure_pa)} ({phase})"


def pressure_rows(holding: Holding, bottle: Bottle, words: RefillWords) -> list[list[str]]:
    """A short table of pressures to expect."""
    if holding.grams is None or not bottle.capacity_ml:
        return []
    return [
        [words.temperature(mk), expected_pressure(holding.grams, bottle, mk, words)] for mk in USUAL_MK[words.units.name]
    ]


def signed(grams: int, words: RefillWords) -> str:
    """A difference with its sign."""
    return ("+" if grams > 0 else "") + format_mass(grams, words.units.mass)


def account_words(account: Account) -> str:
    """An account as a line of the books names it, after "from" or "to"."""
    return OWN_WORDS.get(account.kind) or str(account)
