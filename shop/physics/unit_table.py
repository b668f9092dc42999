"""The units that are known: their exact factors, how people write them, what can be meant.

Data for units.py, which alone converts. Each factor is a fraction, exact by definition;
they are checked against NIST SP 811 by the tests.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

G_N = Fraction("9.80665")  # standard gravity, m/s2, exact
LB_G = Fraction("453.59237")  # avoirdupois pound in grams, exact
IN_UM = Fraction(25_400)  # inch in micrometres, exact
# psi = lb × g_n / in²: grams to kilograms and micrometres to metres make the 10⁹.
PSI_PA = LB_G * G_N * 10**9 / IN_UM**2
IN3_ML = Fraction("16.387064")  # cubic inch in millilitres, exact: 2.54³
GAL_ML = 231 * IN3_ML  # US gallon, exact


@dataclass(frozen=True, slots=True)
class Unit:
    """One unit: how many stored units it is worth, and where its zero lies."""

    kind: str
    factor: Fraction  # stored units in one of these
    zero: Fraction = Fraction(0)  # what the stored number is at zero of this unit
    gauge: bool = False
    decimals: int = 0  # enough for any stored number to survive being shown and typed


def _pressure(factor: Fraction, decimals: int, *, gauge: bool) -> Unit:
    return Unit("pressure", factor, gauge=gauge, decimals=decimals)


_ICE_MK = Fraction(273_150)
# Zero °F is 459.67 R, and a rankine is 5/9 K.
_ZERO_F_MK = Fraction("459.67") * 1000 * 5 / 9

UNITS: dict[str, Unit] = {
    "g": Unit("mass", Fraction(1)),
    "kg": Unit("mass", Fraction(1000), decimals=3),
    "lb": Unit("mass", LB_G, decimals=4),
    "oz": Unit("mass", LB_G / 16, decimals=3),
    "lb oz": Unit("mass", LB_G / 16, decimals=3),  # counted in ounces
    "psi": _pressure(PSI_PA, 5, gauge=True),
    "psia": _pressure(PSI_PA, 5, gauge=False),
    "bar": _pressure(Fraction(10**5), 6, gauge=True),
    "bara": _pressure(Fraction(10**5), 6, gauge=False),
    "kPa": _pressure(Fraction(1000), 4, gauge=True),
    "kPa abs": _pressure(Fraction(1000), 4, gauge=False),
    "MPa": _pressure(Fraction(10**6), 7, gauge=True),
    "MPa abs": _pressure(Fraction(10**6), 7, gauge=False),
    "°C": Unit("temperature", Fraction(1000), _ICE_MK, decimals=3),
    "°F": Unit("temperature", Fraction(5000, 9), _ZERO_F_MK, decimals=4),
    "K": Unit("temperature", Fraction(1000), decimals=3),
    "mL": Unit("volume", Fraction(1)),
    "L": Unit("volume", Fraction(1000), decimals=3),
    "cm3": Unit("volume", Fraction(1)),
    "in3": Unit("volume", IN3_ML, decimals=2),
    "gal": Unit("volume", GAL_ML, decimals=4),
    "µm": Unit("length", Fraction(1)),
    "mm": Unit("length", Fraction(1000), decimals=3),
    "cm": Unit("length", Fraction(10_000), decimals=4),
    "m": Unit("length", Fraction(10**6), decimals=6),
    "in": Unit("length", IN_UM, decimals=5),
    "ft": Unit("length", 12 * IN_UM, decimals=6),
    "thou": Unit("length", IN_UM / 1000, decimals=2),
}

# How people write them; compared in lower case, without spaces and full stops.
_ALSO: dict[str, str] = {
    "g": "gram grams gm gms",
    "kg": "kgs kilo kilos kilogram kilograms",
    "lb": "lbs pound pounds #",
    "oz": "ozs ounce ounces",
    "psi": "psig lb/in2 lbf/in2 psigauge",
    "psia": "psiabs psi(a) psiabsolute",
    "bar": "barg bargauge bar(g) bars",
    "bara": "barabs bar(a) barabsolute",
    "kPa": "kpag kpagauge",
    "kPa abs": "kpaa kpaabs kpa(a)",
    "MPa": "mpag mpagauge",
    "MPa abs": "mpaa mpaabs mpa(a)",
    "°C": "c degc celsius degreesc degreescelsius ℃",
    "°F": "f degf fahrenheit degreesf degreesfahrenheit ℉",
    "K": "kelvin",
    "mL": "millilitre millilitres milliliter milliliters",
    "L": "litre litres liter liters ltr",
    "cm3": "cc ccm cucm",
    "in3": "cuin ci cubicinch cubicinches inch3",
    "gal": "gals gallon gallons usgal usgallon usgallons",
    "µm": "um micron microns μm",
    "mm": "millimetre millimetres millimeter millimeters",
    "cm": "centimetre centimetres centimeter centimeters",
    "m": "metre metres meter meters",
    "in": 'inch inches " ″ ”',
    "ft": "foot feet ' ′ ’",
    "thou": "thous",
}
NAMES = {
    word: name
    for name in UNITS
    for word in [name.lower().replace(" ", ""), *_ALSO.get(name, "").split()]
    if name != "lb oz"
}
WORDS = {
    "mass": "weight",
    "pressure": "pressure",
    "temperature": "temperature",
    "volume": "volume",
    "length": "length",
}

# What can be meant at all, in stored units; beyond it a digit or the unit is wrong.
# Chosen wide, for all that the shop handles (common practice, no source): a tonne (a
# delivery of many bottles); 1,000 bar (a test pressure has 450 at most); −100 to +150 °C
# (nitrous freezes at −90.8 °C); a cubic metre; 10 km (an engine's bore up to the height
# of a shop above the sea).
LIMITS: dict[str, tuple[int, int, str]] = {
    "mass": (0, 1_000_000, "0 and 1000 kg (2204 lb)"),
    "pressure": (0, 100_000_000, "0 and 1000 bar (14 500 psi)"),
    "temperature": (173_150, 423_150, "−100 and 150 °C (−148 and 302 °F)"),
    "volume": (0, 1_000_000, "0 and 1000 L (61 000 in³)"),
    "length": (0, 10_000_000_000, "0 and 10 000 m (32 800 ft)"),
}
