"""What changes with the country: marks, units, the order of a stamp, where the shop stands."""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction

from shop.base.models import Shop
from shop.physics.unit_table import LB_G
from shop.rules import month as months
from shop.rules.month import Month

_PSI_PA = 6894.757293168


@dataclass(frozen=True, slots=True)
class Kit:
    """The marks, units and intervals that the invented bottles of one country carry."""

    country: str
    time_zone: str
    units: str
    height_m: int
    year_first: bool
    aluminium: str
    steel: str
    composite: str
    star_steel: str  # of a specification that knows a star, where there is one
    foreign: str
    unknown: str
    throwaway: str
    weak: str  # too low a pressure for nitrous oxide
    low_row: str  # a low-pressure specification that isn't on the row
    interval_months: int  # of an aluminium or steel bottle without a star
    composite_months: int

    @property
    def metric(self) -> bool:
        """Whether the shop writes kg, bar and °C."""
        return self.units == "metric"

    def stamp(self, month: Month) -> str:
        """Write a month as it's stamped here, all four digits of the year."""
        year, number = months.ym(month)
        return f"{year}/{number:02d}" if self.year_first else f"{number:02d}/{year}"

    def mass(self, grams: int) -> str:
        """Write a weight of a list: to 10 g or to a hundredth of a pound."""
        if self.metric:
            return f"{grams / 1000:.2f} kg"
        return f"{float(Fraction(grams) / LB_G):.2f} lb"

    def label(self, pounds: str, kilograms: str) -> str:
        """Write a labelled size."""
        return f"{kilograms} kg" if self.metric else f"{pounds} lb"

    def temperature(self, kelvin: float) -> str:
        """Write a temperature as a thermometer shows it."""
        celsius = kelvin - 273.15
        return f"{celsius:.0f} °C" if self.metric else f"{celsius * 1.8 + 32:.0f} °F"

    def gauge(self, pascal: float, ambient_pa: float) -> str:
        """Write an absolute pressure as a gauge shows it: to 5 psi or half a bar."""
        over = pascal - ambient_pa
        if self.metric:
            return f"{round(over / 0.5e5) * 0.5:.1f} bar"
        return f"{round(over / _PSI_PA / 5) * 5} psi"


_KITS = {
    "US": Kit(
        country="US", time_zone="America/Chicago", units="us", height_m=240, year_first=False,
        aluminium="DOT-3AL1800", steel="DOT-3AA1800", composite="UN ISO 11119-2 PH250 USA", star_steel="DOT-3AA2015",
        foreign="pi EN 1975 PH250", unknown="KZ-77 R200", throwaway="DOT-39 NRC", weak="DOT-3AA1500",
        low_row="DOT-4BA240", interval_months=60, composite_months=60,
    ),
    "CA": Kit(
        country="CA", time_zone="America/Winnipeg", units="metric", height_m=240, year_first=False,
        aluminium="TC-3ALM124", steel="TC-3AAM124", composite="TC-SU 7541", star_steel="TC-3AAM139",
        foreign="unmarked", unknown="KZ-77 R200", throwaway="TC-39M", weak="TC-3ALM100",
        low_row="TC-4BAM17", interval_months=60, composite_months=60,
    ),
    "ADR": Kit(
        country="ADR", time_zone="Europe/Brussels", units="metric", height_m=120, year_first=True,
        aluminium="pi ISO 7866 PH250", steel="pi ISO 9809-1 PH250", composite="pi EN 12245 PH250",
        star_steel="pi ISO 9809-2 PH250", foreign="unmarked", unknown="KZ-77 R200", throwaway="DOT-39",
        weak="pi ISO 7866 PH150", low_row="TC-39M", interval_months=120, composite_months=60,
    ),
}  # fmt: skip


def kit_for(country: str) -> Kit:
    """Return the kit of a country; raises KeyError where the demo has none for it."""
    return _KITS[country]


def kit_of(shop: Shop) -> Kit:
    """Return the kit of a shop: its country's, with the units, the zone and the height that it was given."""
    return replace(kit_for(shop.country), units=shop.units, time_zone=shop.time_zone, height_m=shop.height_m)


def countries() -> tuple[str, ...]:
    """Return the countries that the demo can stand in."""
    return tuple(_KITS)
