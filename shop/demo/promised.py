"""What a day is planned from: bottles that came yesterday, weighed, each promised for a time today."""

from __future__ import annotations

from collections.abc import Iterator

from shop.demo.counter import customer
from shop.demo.cylinders import Spec
from shop.demo.past import Past
from shop.demo.steps import Step

# code, size, owner, share of its limit that is left in it, place, promised
_WAIT = (
    ("T-0261", "10", "Nils Fagerholt", 0.06, "FREEZER", "11:00"),
    ("T-0262", "10", "Lindiwe Mokwayo", 0.31, "FREEZER", "12:30"),
    ("T-0263", "15", "Priya Venkatamma", 0.12, "RACK-A", "15:00"),
    ("T-0264", "5", "Mateo Quintarosa", 0.09, "RACK-A", "16:00"),
    ("T-0265", "12", "Oyelaran Adebisko", 0.22, "RACK-A", ""),
)


def for_today(past: Past) -> Iterator[Step]:
    """Give the bottles that wait to be filled today."""
    interval = past.kit.interval_months
    for number, (code, size, owner, left, place, promised) in enumerate(_WAIT):
        customer(past, owner)
        spec = Spec(code, size=size, owner=owner, since_days=260 + 20 * number, made_ago=interval - 9 - number, visual_ago=20,
                    maker=number % 3, dip="none" if number == 3 else "dip")  # fmt: skip
        past.ago(spec.since_days, "09:10").register(spec, net_g=left * 0.66 * spec.capacity_ml)
        past.ago(1, "17:05").later(9 * number).check_in(
            code, brought_by=owner, wanted="fill", promised=past.days.at(past.days.today, promised) if promised else None
        )
        past.later(3).weigh(code)
        past.later(2).move(code, place)
        yield from past.drain()
