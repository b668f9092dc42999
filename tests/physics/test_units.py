"""What people write becomes whole numbers, once, and comes back the same."""

import csv
import time
from decimal import Decimal
from fractions import Fraction
from pathlib import Path

import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from shop.physics.errors import QuantityError
from shop.physics.unit_table import GAL_ML, IN3_ML, LB_G, LIMITS, NAMES, PSI_PA, UNITS
from shop.physics.units import (
    Entry,
    in_own_unit,
    parse_length,
    parse_mass,
    parse_pressure,
    parse_temperature,
    parse_volume,
    value_in,
)
from tests.examples import times

AIR = 101_325
REFERENCE = Path(__file__).parent.parent / "reference" / "units.csv"
PUBLISHED = list(csv.DictReader(REFERENCE.read_text(encoding="utf-8").splitlines()))
FEW = settings(max_examples=times(50), deadline=None)


def parse(kind: str, text: str, unit: str, ambient_pa: float = AIR) -> Entry:
    if kind == "pressure":
        return parse_pressure(text, default_unit=unit, ambient_pa=ambient_pa)
    functions = {
        "mass": parse_mass,
        "temperature": parse_temperature,
        "volume": parse_volume,
        "length": parse_length,
    }
    return functions[kind](text, default_unit=unit)


def units_of(kind: str) -> list[str]:
    return [name for name, unit in UNITS.items() if unit.kind == kind]


@pytest.mark.parametrize(
    ("text", "grams", "unit"),
    [
        ("12.4 lb", 5625, "lb"),  # 12.4 × 453.59237 = 5624.545
        ("5.62 kg", 5620, "kg"),
        ("11.06kg", 11060, "kg"),
        ("850 g", 850, "g"),
        ("850", 850_000, "kg"),  # the default
        ("11,06 kg", 11060, "kg"),
        (",5 kg", 500, "kg"),
        (".5 kg", 500, "kg"),
        ("5. kg", 5000, "kg"),
        ("+5 kg", 5000, "kg"),
        ("5 KG.", 5000, "kg"),
        ("5\u00a0kg", 5000, "kg"),
        ("5\u202fkg", 5000, "kg"),
        ("10 lbs", 4536, "lb"),  # 4535.9237
        ("10#", 4536, "lb"),
        ("3 pounds", 1361, "lb"),  # 1360.777
        ("6 oz", 170, "oz"),  # 170.097
        ("12 lb 6 oz", 5613, "lb oz"),  # 198 × 28.349523 = 5613.206
        ("12lb6oz", 5613, "lb oz"),
        ("24-6", 11056, "lb oz"),  # 390 × 28.349523 = 11056.314
        ("24 lb 6", 11056, "lb oz"),
        ("24 lbs. 6 ozs.", 11056, "lb oz"),
        ("24\u20136", 11056, "lb oz"),
        ("24-6.5", 11070, "lb oz"),  # 390.5 × 28.349523 = 11070.489
        ("24-0", 10886, "lb oz"),
        ("0", 0, "kg"),
        ("0.0005 kg", 0, "kg"),  # half to even
        ("0.0015 kg", 2, "kg"),
        ("0.0025 kg", 2, "kg"),
    ],
)
def test_a_weight_is_understood_as_written(text: str, grams: int, unit: str) -> None:
    assert parse_mass(text, default_unit="kg") == Entry(grams, text, unit)


def test_a_bare_number_at_a_pound_ounce_scale_is_pounds() -> None:
    assert parse_mass("24.5", default_unit="lb oz") == Entry(11113, "24.5", "lb")


@pytest.mark.parametrize(
    ("text", "pascal", "unit"),
    [
        ("950 psi", 6_651_344, "psi"),  # 950 × 6894.757293 + 101325 = 6651344.4
        ("950 psig", 6_651_344, "psi"),
        ("950 PSI", 6_651_344, "psi"),
        ("965 psia", 6_653_441, "psia"),  # 965 × 6894.757293
        ("65.5 bar", 6_651_325, "bar"),
        ("65.5 barg", 6_651_325, "bar"),
        ("65.5", 6_651_325, "bar"),
        ("66.5 bara", 6_650_000, "bara"),
        ("66.5 bar abs", 6_650_000, "bara"),
        ("66.5 bar(a)", 6_650_000, "bara"),
        ("6.55 MPa", 6_651_325, "MPa"),
        ("6.55 MPa abs", 6_550_000, "MPa abs"),
        ("6550 kPa", 6_651_325, "kPa"),
        ("6550 kPa abs", 6_550_000, "kPa abs"),
        ("0 psi", 101_325, "psi"),
    ],
)
def test_a_pressure_is_gauge_unless_it_says_absolute(text: str, pascal: int, unit: str) -> None:
    assert parse_pressure(text, default_unit="bar", ambient_pa=AIR) == Entry(pascal, text, unit)


@pytest.mark.parametrize(
    ("text", "millikelvin", "unit"),
    [
        ("68F", 293_150, "°F"),
        ("70 °F", 294_261, "°F"),  # (70 + 459.67) / 1.8 = 294.2611
        ("20 °C", 293_150, "°C"),
        ("20C", 293_150, "°C"),
        ("20 deg C", 293_150, "°C"),
        ("20 º C", 293_150, "°C"),
        ("20 ℃", 293_150, "°C"),
        ("20°", 293_150, "°C"),
        ("-12 C", 261_150, "°C"),
        ("\u221212 C", 261_150, "°C"),
        ("\u2212 12", 261_150, "°C"),
        ("-40 F", 233_150, "°F"),
        ("293.15 K", 293_150, "K"),
        ("20,5 C", 293_650, "°C"),
    ],
)
def test_a_temperature_is_understood_as_written(text: str, millikelvin: int, unit: str) -> None:
    assert parse_temperature(text, default_unit="°C") == Entry(millikelvin, text, unit)


@pytest.mark.parametrize(
    ("text", "millilitres", "unit"),
    [
        ("6.8", 6800, "L"),
        ("6.8 l", 6800, "L"),
        ("6800 ml", 6800, "mL"),
        ("6800 cc", 6800, "cm3"),
        ("6800 cm³", 6800, "cm3"),
        ("415 in3", 6801, "in3"),  # 415 × 16.387064 = 6800.63
        ("415 cu. in.", 6801, "in3"),
        ("1.8 gal", 6814, "gal"),  # 1.8 × 3785.411784 = 6813.74
    ],
)
def test_a_volume_is_understood_as_written(text: str, millilitres: int, unit: str) -> None:
    assert parse_volume(text, default_unit="L") == Entry(millilitres, text, unit)


@pytest.mark.parametrize(
    ("text", "micrometres", "unit"),
    [
        (".036 in", 914, "in"),  # 914.4
        ('.036"', 914, "in"),
        ("36 thou", 914, "thou"),
        ("0.91", 910, "mm"),
        ("4 ft", 1_219_200, "ft"),
        ("1.2 m", 1_200_000, "m"),
        ("12 cm", 120_000, "cm"),
        ("5 µm", 5, "µm"),
        ("5 μm", 5, "µm"),
    ],
)
def test_a_length_is_understood_as_written(text: str, micrometres: int, unit: str) -> None:
    assert parse_length(text, default_unit="mm") == Entry(micrometres, text, unit)


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("", "empty"),
        ("  \u00a0 ", "empty"),
        ("abc", "not_a_number"),
        ("kg 5", "not_a_number"),
        ("1.2.3 kg", "not_a_number"),
        ("5.. kg", "not_a_number"),
        ("٣ kg", "not_a_number"),
        ("--5 kg", "not_a_number"),
        ("\x00", "not_a_number"),
        ("nan", "not_finite"),
        ("NaN kg", "not_finite"),
        ("inf", "not_finite"),
        ("-Infinity", "not_finite"),
        ("1e9 kg", "exponent"),
        ("1E9", "exponent"),
        ("1e-3 kg", "exponent"),
        ("1 x 10^3 kg", "exponent"),
        ("1,234", "ambiguous_comma"),
        ("1,234 kg", "ambiguous_comma"),
        ("1,234-6", "ambiguous_comma"),
        ("1,234.5 kg", "grouped"),
        ("1,234,567 g", "grouped"),
        ("1 234 kg", "more_than_one"),
        ("24-6-2", "more_than_one"),
        ("12 stone", "unknown_unit"),
        ("5² kg", "unknown_unit"),
        ("12 lb 6 kg", "unknown_unit"),
        ("950 psi", "other_kind"),
        ("20 °C", "other_kind"),
        ("-3 kg", "negative"),
        ("\u22123 kg", "negative"),
        ("-24-6", "negative"),
        ("1001 kg", "too_large"),
        ("99999999-6", "too_large"),
        ("24-16", "ounces"),
        ("24 lb 16 oz", "ounces"),
        ("24.5 lb 6 oz", "pounds_not_whole"),
        ("5" * 65, "too_long"),
    ],
)
def test_a_weight_that_cannot_be_understood_is_refused(text: str, code: str) -> None:
    with pytest.raises(QuantityError) as refused:
        parse_mass(text, default_unit="kg")
    assert refused.value.code == code
    assert str(refused.value).endswith(".")


@pytest.mark.parametrize(
    ("kind", "text", "unit", "code"),
    [
        ("pressure", "-3 psi", "psi", "negative"),
        ("pressure", "20000 psi", "psi", "too_large"),
        ("pressure", "950 kg", "psi", "other_kind"),
        ("pressure", "24-6", "psi", "more_than_one"),
        ("temperature", "-200 C", "°C", "too_cold"),
        ("temperature", "-5 K", "K", "too_cold"),
        ("temperature", "400 F", "°F", "too_hot"),
        ("temperature", "20 X", "°C", "unknown_unit"),
        ("volume", "-1 L", "L", "negative"),
        ("volume", "1001 L", "L", "too_large"),
        ("length", "11 km", "mm", "unknown_unit"),
        ("length", "10001 m", "mm", "too_large"),
    ],
)
def test_each_kind_refuses_what_cannot_be(kind: str, text: str, unit: str, code: str) -> None:
    with pytest.raises(QuantityError) as refused:
        parse(kind, text, unit)
    assert refused.value.code == code


def test_an_unknown_unit_is_answered_with_the_known_ones() -> None:
    with pytest.raises(QuantityError) as refused:
        parse_mass("12 stone", default_unit="kg")
    assert all(name in refused.value.sentence for name in units_of("mass"))


def test_a_pasted_file_is_refused_at_once() -> None:
    paste = "9" * 3_000_000
    begun = time.perf_counter()
    with pytest.raises(QuantityError) as refused:
        parse_mass(paste, default_unit="kg")
    assert refused.value.code == "too_long"
    assert len(refused.value.sentence) < 200
    assert time.perf_counter() - begun < 0.05


@pytest.mark.parametrize("text", ["(" * 64, "1." * 32, "1 " * 32, "- " * 32, "9-" * 32, "l" * 64])
def test_no_entry_makes_the_reader_slow(text: str) -> None:
    begun = time.perf_counter()
    with pytest.raises(QuantityError):
        parse_mass(text, default_unit="kg")
    assert time.perf_counter() - begun < 0.2


def test_a_default_of_another_kind_is_a_mistake_in_the_program() -> None:
    for unit in ("psi", "stone"):
        with pytest.raises(ValueError):
            parse_mass("5", default_unit=unit)


def test_a_gauge_unit_needs_the_pressure_of_the_air() -> None:
    with pytest.raises(ValueError):
        value_in(6_000_000, "psi")


@pytest.mark.parametrize("row", PUBLISHED, ids=lambda row: row["unit"])
def test_factors_agree_with_the_published_ones(row: dict[str, str]) -> None:
    # Published to seven digits: half a unit of the last.
    ours, published = UNITS[row["unit"]].factor, Fraction(row["one_in_stored"])
    assert UNITS[row["unit"]].kind == row["kind"]
    assert abs(ours - published) <= published * Fraction(5, 10**7)


def test_the_exact_factors_are_exact() -> None:
    # NIST SP 811 (2008), appendix B.8 and its footnotes; NIST Handbook 44, appendix C.
    assert Fraction("453.59237") == LB_G
    assert Fraction("2.54") ** 3 == IN3_ML
    assert Fraction("3785.411784") == GAL_ML
    # lbf = 4.4482216152605 N exactly; over 0.0254² m².
    assert Fraction("4.4482216152605") / Fraction("0.00064516") == PSI_PA


def test_fixed_points_of_temperature() -> None:
    # Definition of the Celsius scale; NIST SP 811 (2008), appendix B.8.
    assert value_in(273_150, "°C") == 0
    assert value_in(273_150, "°F") == 32
    assert value_in(373_150, "°F") == 212
    assert value_in(233_150, "°F") == value_in(233_150, "°C") == -40


PINT = {
    "g": "gram", "kg": "kilogram", "lb": "pound", "oz": "ounce",
    "psia": "psi", "bara": "bar", "kPa abs": "kPa", "MPa abs": "MPa",
    "°C": "degC", "°F": "degF", "K": "kelvin",
    "mL": "mL", "L": "L", "cm3": "cm^3", "in3": "in^3", "gal": "gallon",
    "µm": "um", "mm": "mm", "cm": "cm", "m": "m", "in": "inch", "ft": "foot", "thou": "thou",
}  # fmt: skip
STORED = {
    "mass": "gram", "pressure": "pascal", "temperature": "millikelvin", "volume": "mL",
    "length": "um",
}  # fmt: skip


@pytest.fixture(scope="module")
def pint_units() -> "pint.UnitRegistry[Decimal]":
    return pint.UnitRegistry(non_int_type=Decimal)


@pytest.mark.parametrize("unit", sorted(PINT))
def test_an_independent_library_converts_alike(unit: str, pint_units: "pint.UnitRegistry[Decimal]") -> None:
    kind = UNITS[unit].kind
    for text in {"K": ("200", "293.15"), "MPa abs": ("1", "17.25")}.get(unit, ("1", "17.25", "123.4")):
        theirs = pint_units.Quantity(Decimal(text), PINT[unit]).to(STORED[kind]).magnitude
        assert abs(parse(kind, text, unit).stored - theirs) <= Decimal("0.5001")


def test_every_unit_has_been_checked_outside() -> None:
    # The gauge units are the absolute ones with the air's pressure added; pounds and
    # ounces have their own examples above.
    assert set(UNITS) - set(PINT) == {"lb oz", "psi", "bar", "kPa", "MPa"}


@pytest.mark.parametrize("unit", sorted(UNITS))
@FEW
@given(data=st.data())
def test_shown_in_its_own_unit_and_typed_again_it_stores_the_same(unit: str, data: st.DataObject) -> None:
    kind = UNITS[unit].kind
    low, high, _ = LIMITS[kind]
    ambient = data.draw(st.one_of(st.integers(60_000, 105_000), st.floats(60_000, 105_000)))
    if UNITS[unit].gauge:
        low = round(ambient)
    stored = data.draw(st.integers(low, high))
    shown = in_own_unit(stored, unit, ambient_pa=ambient)
    # The default is another unit, so that the unit shown is what counts.
    again = parse(kind, shown, units_of(kind)[0], ambient)
    assert (again.stored, again.unit) == (stored, unit)


@FEW
@given(
    kind=st.sampled_from(sorted(LIMITS)),
    data=st.data(),
    number=st.decimals(0, 900, places=3),
)
def test_an_entry_shown_back_keeps_its_stored_number(kind: str, data: st.DataObject, number: Decimal) -> None:
    unit = data.draw(st.sampled_from([each for each in units_of(kind) if each != "lb oz"]))
    try:
        entry = parse(kind, f"{number} {unit}", unit)
    except QuantityError as refused:
        assert refused.code in ("too_large", "too_hot", "too_cold")
        return
    shown = in_own_unit(entry.stored, entry.unit, ambient_pa=AIR)
    assert parse(kind, shown, unit) == Entry(entry.stored, shown, entry.unit)


@pytest.mark.parametrize(("text", "default"), [("12.4 lb", "kg"), ("24 lb 6 oz", "kg"), ("5.62 kg", "lb")])
def test_an_entry_is_shown_back_as_short_as_it_was_typed(text: str, default: str) -> None:
    entry = parse_mass(text, default_unit=default)
    assert in_own_unit(entry.stored, entry.unit) == text


@FEW
@given(text=st.text(max_size=80))
def test_any_text_is_understood_or_refused_with_a_code(text: str) -> None:
    for kind, unit in (("mass", "kg"), ("pressure", "psi"), ("temperature", "°F")):
        try:
            entry = parse(kind, text, unit)
        except QuantityError as refused:
            assert refused.code
        else:
            assert entry.typed == text


def test_every_way_of_writing_a_unit_leads_to_it() -> None:
    for word, name in NAMES.items():
        text = f"200 {word}" if name == "K" else f"20 {word}"
        assert parse(UNITS[name].kind, text, units_of(UNITS[name].kind)[0]).unit == name
