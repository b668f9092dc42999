"""The bottles that come again and again: each a customer's or on one of the shop's cars."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from shop.demo import names
from shop.demo.counter import customer
from shop.demo.cylinders import Spec
from shop.demo.mishaps import LOAN_CAR, SHOP_CAR
from shop.demo.past import Past
from shop.demo.steps import Step

STAR_KEPT, STAR_BROKEN = "T-0324", "T-0325"
WAITS_OPEN = "T-0326"  # in an open refill at the end
_SIZES = ("10", "10", "12", "15", "5", "10", "20", "15")


@dataclass(frozen=True, slots=True)
class Regular:
    """A bottle, whose it is, and how many days its owner usually takes to empty it."""

    code: str
    owner: str
    days: float
    car: tuple[str, str] | None = None  # of the shop's own


def regulars() -> tuple[Regular, ...]:
    """Return all of them: most belong to customers, some hang on the shop's cars."""
    owners = [one.name for one in names.CUSTOMERS if one.consent]
    found = [Regular(f"T-{301 + n:04d}", owners[n % len(owners)], 30 + 9 * (n % 5)) for n in range(20)]
    found += [
        Regular("T-0321", "shop", 34, SHOP_CAR),
        Regular("T-0322", "shop", 48, SHOP_CAR),
        Regular("T-0323", "shop", 55, LOAN_CAR),
        Regular(STAR_KEPT, owners[3], 70),
        Regular(STAR_BROKEN, owners[9], 95),
        Regular(WAITS_OPEN, owners[15], 120),
    ]
    return tuple(found)


def spec_of(past: Past, regular: Regular, number: int) -> Spec:
    """Return what is written of a regular bottle: in date all through the history."""
    full = past.kit.interval_months
    star = regular.code in (STAR_KEPT, STAR_BROKEN) and past.kit.country != "ADR"
    steel = star or number % 6 == 5
    # Due in one to some thirty months; stamped before the history begins.
    ago = 30 if star else full - 1 - (number * 7) % min(full - 28, 32)
    return Spec(
        regular.code, size=_SIZES[number % len(_SIZES)], wall="steel" if steel else "aluminium", owner=regular.owner,
        maker=number % len(names.MAKERS), since_days=(past.days.today - past.days.first).days + 3,
        made_ago=ago + full, tests_ago=(ago,),
        star=star, visual_ago=27 + number % 8, labelled=number % 7 != 3, race_grade=True if number % 4 == 0 else None,
        dip="none" if number % 4 == 3 else "dip",
    )  # fmt: skip


def register_regulars(past: Past) -> Iterator[Step]:
    """Write them into the register; each still holds something from before."""
    for number, regular in enumerate(regulars()):
        if regular.owner != "shop":
            customer(past, regular.owner)
        spec = spec_of(past, regular, number)
        past.ago(spec.since_days, "09:00").later(9 * number)
        past.register(spec, net_g=spec.capacity_ml * past.rng.uniform(0.06, 0.3))
    yield from past.drain()
