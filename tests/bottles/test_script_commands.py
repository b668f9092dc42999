"""Commands for scripts: JSON alone, the figures of the physics, a sentence for whatever can't be answered."""

from __future__ import annotations

import io

import pytest
from django.core.management import call_command, get_commands, load_command_class
from hypothesis import given, settings
from hypothesis import strategies as st

from bottles.management.for_scripts import NOT_COMPUTED, ScriptCommand
from manage import FOR_SCRIPTS
from shop.physics import fluid
from tests.bottles.of_scripts import KEYS, OBJECT, answer, codes, read, refusal, run, words
from tests.examples import times
from tests.physics.reference import rows

EMPTY = "receiver_net_kg (empty: vapour at 1 atm)"


def test_manage_knows_each_command_for_scripts_by_name():
    ours = {
        name for name, app in get_commands().items()
        if app == "bottles" and isinstance(load_command_class(app, name), ScriptCommand)
    }  # fmt: skip
    assert ours == set(FOR_SCRIPTS) == set(KEYS)


# --- transfer -------------------------------------------------------------------------------------


@pytest.mark.parametrize("row", rows("transfer_checkpoints.csv"), ids=lambda row: f"{row['case']} {row['limit']}")
def test_a_transfer_meets_an_independent_calculation(row):
    told = answer(
        "transfer",
        source_capacity=f"{row['source_L']}L", source_wall=row["source_wall"], source_wall_mass=f"{row['source_wall_kg']}kg",
        source_net=f"{row['source_net_kg']}kg", source_temperature=f"{row['source_c']}C",
        receiver_capacity=f"{row['receiver_L']}L", receiver_wall=row["receiver_wall"],
        receiver_wall_mass=f"{row['receiver_wall_kg']}kg", receiver_temperature=f"{row['receiver_c']}C",
        receiver_net=f"{row[EMPTY]}kg" if row[EMPTY] else None,
    )[row["limit"]]  # fmt: skip
    for key in ("moved_kg", "receiver_final_kg", "source_left_kg"):
        assert told[key] == pytest.approx(float(row[key]), rel=0.002, abs=0.002), key
    for key in ("source_final_c", "receiver_final_c"):
        assert told[key] == pytest.approx(float(row[key]), abs=0.05), key
    for key in ("source_final_bar", "receiver_final_bar"):
        assert told[key] == pytest.approx(float(row[f"{key}_abs"]), rel=0.002), key
    assert told["stopped_by"] == row["stopped_by"].partition(" (")[0]
    assert told["liquid_out"] is ("liquid out" in row["stopped_by"] or (row["case"], row["limit"]) == ("T13", "held"))


def test_a_transfer_says_three_limits_and_the_band():
    told = answer("transfer", line_volume="50mL", source_pressure="49.5bar")
    assert set(told) == KEYS["transfer"]
    for name in ("mixed", "wall_condensing", "held"):
        assert set(told[name]) == OBJECT
        whole = told[name]["moved_kg"] + told[name]["source_left_kg"] + told["line_loss_kg"]
        assert whole == pytest.approx(19.72, abs=1e-9)
    assert 0 < told["low_kg"] <= told["likely_kg"] <= told["high_kg"]
    assert told["line_loss_kg"] == pytest.approx(50e-6 * fluid.saturation_at_temperature(293.15).liquid_density)
    assert isinstance(told["full_fills"], int)


def test_without_a_weight_the_supply_is_whatever_its_gauge_allows():
    told = answer("transfer", source_net=None, source_pressure="49.5bar")
    assert set(told) == KEYS["transfer"]
    assert [told[name] for name in ("mixed", "wall_condensing", "held", "likely_kg", "full_fills")] == [None] * 5
    assert {"source_unknown", "liquid_unknown"} <= codes(told)
    reading = answer("contents")
    for name, net in (("low_kg", reading["least_kg"]), ("high_kg", reading["most_kg"])):
        weighed = f"{int(net * 1000)}g"  # down to the gram: a hair above the least there would be liquid
        assert told[name] == pytest.approx(answer("transfer", source_net=weighed)[name], abs=0.002)
    assert reading["most_kg"] == pytest.approx(0.68 * 29)
    less = answer("transfer", source_net=None, source_pressure="49.5bar", source_limit="8kg")
    assert less["high_kg"] < told["high_kg"]


def test_a_gauge_that_contradicts_the_weight_is_told_and_the_weight_counts():
    told = answer("transfer", source_pressure="30bar")
    assert "reads_below_weight" in codes(told)
    assert told["mixed"] == answer("transfer")["mixed"]
    assert "reads_above_weight" in codes(answer("transfer", source_pressure="60bar", source_net="3kg"))
    assert not codes(answer("transfer", source_pressure="49.5bar")) & {"reads_below_weight", "reads_above_weight"}


def test_a_gauge_that_no_fill_could_show_is_refused_where_nothing_was_weighed():
    assert refusal("transfer", source_net=None, source_pressure="450bar", source_temperature="-10C") == "beyond_any_fill"


def test_a_bottle_that_was_not_weighed_is_vented():
    told = answer("transfer")["mixed"]
    start = told["receiver_final_kg"] - told["moved_kg"]
    vapour = fluid.state_by_pressure_temperature(fluid.ATMOSPHERE, 263.15).density
    assert start == pytest.approx(6.8e-3 * vapour, abs=1e-9)
    assert told == answer("transfer", receiver_start="vented")["mixed"]
    assert told["receiver_final_kg"] == pytest.approx(0.68 * 6.8)


def test_the_start_of_the_bottle_can_be_named():
    kept = answer("transfer", receiver_start="own-vapour")
    assert kept["mixed"]["receiver_final_kg"] - kept["mixed"]["moved_kg"] > 0.2
    assert "air" in codes(answer("transfer", receiver_start="air"))
    assert answer("transfer", receiver_net="0.3kg", receiver_start="weighed") == answer("transfer", receiver_net="0.3kg")


def test_the_condensation_figure_is_the_prior_unless_it_is_named():
    without, named = answer("transfer"), answer("transfer", condensation="0.5")
    assert "condensation_prior" in codes(without)
    assert codes(named) - codes(without) == {"condensation_given"}
    assert named["likely_kg"] == without["likely_kg"]
    warm = {"receiver_temperature": "15C"}
    low, high = (answer("transfer", condensation=figure, **warm)["likely_kg"] for figure in ("0", "1"))
    free = answer("transfer", **warm)
    assert low == pytest.approx(free["wall_condensing"]["moved_kg"])
    assert high == pytest.approx(free["mixed"]["moved_kg"])
    sure = answer("transfer", condensation="0.5", condensation_deviation="0.05", **warm)
    assert "condensation_given" not in codes(sure)
    assert sure["high_kg"] - sure["low_kg"] < free["high_kg"] - free["low_kg"]


def test_what_a_dip_tube_leaves_is_not_given():
    whole, left = (answer("transfer", source_net="6.9kg", below_tube=volume) for volume in ("0mL", "1L"))
    assert left["wall_condensing"]["moved_kg"] < whole["wall_condensing"]["moved_kg"]


def test_an_evacuated_bottle_without_a_wall_is_answered_too():
    nothing = {"receiver_net": "0kg", "receiver_wall_mass": "0kg", "receiver_temperature": "36C"}
    free, full = answer("transfer", **nothing), answer("transfer", limit="2kg", **nothing)
    # With nothing in it to be warm, no start is too warm: only the limit decides.
    assert (free["mixed"]["stopped_by"], free["warmest_receiver_c"]) == ("pressures equal", None)
    assert (full["mixed"]["stopped_by"], full["warmest_receiver_c"]) == ("fill limit", pytest.approx(52.0))


def test_an_overfull_supply_is_told():
    assert "over_limit" in codes(answer("transfer", source_net="21kg"))


# --- contents -------------------------------------------------------------------------------------


def test_a_saturated_bottle_may_hold_anything_up_to_its_limit():
    told = answer("contents")
    side = fluid.saturation_at_temperature(293.15)
    assert set(told) == KEYS["contents"]
    assert (told["region"], told["liquid_kg"], told["vapour_kg"]) == ("saturated", None, None)
    assert told["least_kg"] == pytest.approx(0.029 * side.vapour_density)
    assert told["most_if_overfilled_kg"] == pytest.approx(0.029 * side.liquid_density)
    assert told["saturation_bar"] == pytest.approx(side.pressure_pa / 1e5)
    assert answer("contents", limit="10kg")["most_kg"] == 10.0


def test_a_weight_says_how_much_is_liquid():
    told = answer("contents", net="12kg")
    assert set(told) == KEYS["contents"] | {"expected_bar"}
    assert told["liquid_kg"] + told["vapour_kg"] == pytest.approx(12.0)
    alone = answer("contents")
    for end in ("least_kg", "most_kg", "most_if_overfilled_kg"):  # what the reading alone allows
        assert told[end] == alone[end]
    assert told["region"] == "saturated" and told["expected_bar"] == pytest.approx(told["saturation_bar"])


@pytest.mark.parametrize(
    ("region", "changed"),
    [
        ("vapour", {"pressure": "30bar"}),
        ("saturated", {"pressure": "47.6bar"}),  # 2.9 bar below: within gauge and thermometer together
        ("vapour", {"pressure": "47.6bar", "gauge_tolerance": "0.1bar", "thermometer_tolerance": "0.1K"}),
        ("liquid-full", {"pressure": "80bar"}),
        ("supercritical", {"temperature": "40C", "pressure": "80bar"}),
        ("contradictory", {"pressure": "450bar", "temperature": "-10C"}),
        ("contradictory", {"pressure": "30bar", "net": "12kg"}),
    ],
)
def test_the_region_follows_from_reading_and_tolerance(region, changed):
    told = answer("contents", **changed)
    assert told["region"] == region
    assert (told["saturation_bar"] is None) == (region == "supercritical")
    assert codes(told) or region == "saturated"


# --- heat -----------------------------------------------------------------------------------------


def test_warming_takes_energy_and_time():
    told = answer("heat")
    assert set(told) == KEYS["heat"]
    assert 15 < told["temperature_c"] < told["one_phase_at_c"] < 36.4
    assert told["becomes"] == "liquid-full"
    assert told["energy_kj"] * 1e3 / 300 / 60 < told["minutes"] < 2 * told["energy_kj"] * 1e3 / 300 / 60
    state = fluid.state_by_density_temperature(4.5 / 6.8e-3, 55 + 273.15)
    assert told["pressure_at_55c_bar"] == pytest.approx(state.pressure_pa / 1e5)
    assert answer("heat", loss=None)["minutes"] != told["minutes"]


def test_a_heater_too_weak_gives_no_minutes():
    told = answer("heat", watts="5")
    assert told["minutes"] is None and "never_gets_there" in codes(told)
    assert told["energy_kj"] == answer("heat")["energy_kj"]


def test_a_nearly_empty_bottle_is_said_to_boil_dry():
    told = answer("heat", net="1kg", to_pressure="55bara")
    assert told["becomes"] == "dry" and "boils_dry" in codes(told)
    assert refusal("heat", net="0.2kg", to_pressure="62bara") == "pressure_unreachable"


# --- as people write, and what is refused ---------------------------------------------------------


@pytest.mark.parametrize("written", ["-10C", "-10 C", "−10 °C", "14F", "14 °F", "263.15K"])
def test_a_value_may_begin_with_a_minus_and_units_are_symmetric(written):
    assert answer("transfer", receiver_temperature=written) == answer("transfer", receiver_temperature="-10C")


@pytest.mark.parametrize(
    ("one", "other"),
    [
        ({"receiver_temperature": "-4F"}, {"receiver_temperature": "-20C"}),
        ({"source_wall_mass": "70 lb 8 oz"}, {"source_wall_mass": "31978g"}),
        ({"source_pressure": "49.5 bar gauge"}, {"source_pressure": "50.51325bara"}),
        ({"source_pressure": "717.9psi"}, {"source_pressure": "732.5959psia"}),
        ({"line_volume": "3.0512 cu in"}, {"line_volume": "50cc"}),
        ({"receiver_wall": "Aluminum"}, {"receiver_wall": "aluminium"}),
        ({"thermometer_tolerance": "1.8F"}, {"thermometer_tolerance": "1 °C"}),
        ({"receiver_net": "0"}, {"receiver_net": "0kg"}),
    ],
)
def test_one_thing_may_be_written_in_several_ways(one, other):
    assert answer("transfer", **one) == answer("transfer", **other)


@pytest.mark.parametrize(
    ("name", "changed", "code"),
    [
        ("transfer", {"source_net": None}, "source_unknown"),
        ("transfer", {"source_net": "20"}, "no_unit"),
        ("transfer", {"source_net": "20 stone"}, "unknown_unit"),
        ("transfer", {"source_net": "20C"}, "other_kind"),
        ("transfer", {"source_net": "nan kg"}, "not_finite"),
        ("transfer", {"source_net": "1e3 kg"}, "exponent"),
        ("transfer", {"source_net": "-1kg"}, "negative"),
        ("transfer", {"source_net": ""}, "empty"),
        ("transfer", {"source_temperature": "20"}, "no_unit"),
        ("transfer", {"source_temperature": "20°"}, "no_unit"),
        ("transfer", {"source_temperature": "60C"}, "bottle_temperature"),
        ("transfer", {"source_wall": "titanium"}, "unknown_word"),
        ("transfer", {"source_capacity": "0L"}, "capacity"),
        ("transfer", {"source_net": "40kg"}, "pressure_range"),
        ("transfer", {"limit": "0kg"}, "limit"),
        ("transfer", {"condensation": "1.5"}, "out_of_range"),
        ("transfer", {"condensation": "-0.5"}, "out_of_range"),
        ("transfer", {"condensation": "half"}, "not_a_number"),
        ("transfer", {"condensation_deviation": "0.1"}, "options_conflict"),
        ("transfer", {"receiver_start": "air", "receiver_net": "0.3kg"}, "options_conflict"),
        ("transfer", {"receiver_start": "weighed"}, "options_conflict"),
        ("transfer", {"receiver_start": "cold"}, "unknown_word"),
        ("transfer", {"below_tube": "20L"}, "below_tube"),
        ("transfer", {"receiver_wall": None}, "usage"),
        ("transfer", {"receiver_colour": "blue"}, "usage"),
        ("contents", {"pressure": "-2bar"}, "negative"),
        ("contents", {"pressure": "49.5"}, "no_unit"),
        ("contents", {"pressure": "700bar"}, "pressure_range"),
        ("contents", {"temperature": "-95C"}, "temperature_range"),
        ("contents", {"thermometer_tolerance": "-1K"}, "negative"),
        ("heat", {"net": "0kg"}, "empty"),
        ("heat", {"watts": "lots"}, "not_a_number"),
        ("heat", {"watts": "-3"}, "out_of_range"),
        ("heat", {"to_pressure": "600bar"}, "pressure_range"),
    ],
)
def test_what_cannot_be_answered_is_refused_with_its_code(name, changed, code):
    assert refusal(name, **changed) == code


@pytest.mark.parametrize("more", [("--net",), ("12kg",), ("--capacity", "3L"), ("--cap", "3L"), ("--settings", "shop.settings")])
def test_options_that_are_unknown_twice_or_cut_short_are_refused(more):
    assert refusal("contents", *more) == "usage"


def test_a_refusal_names_its_option():
    _, told = run("contents", *words("contents", pressure="49.5"))
    assert told["sentence"].startswith("--pressure: ")


def test_a_solver_that_gives_up_is_a_refusal_too(monkeypatch):
    def give_up(**_):
        raise ValueError("no convergence")

    monkeypatch.setattr("bottles.management.commands.contents.contents_from_reading", give_up)
    assert refusal("contents") == NOT_COMPUTED


def test_the_json_option_changes_nothing_and_programs_may_call_it():
    assert answer("contents", "--json") == answer("contents")
    said = io.StringIO()
    call_command("contents", *words("contents"), stdout=said)
    assert read(said.getvalue()) == answer("contents")


# --- whatever is typed ----------------------------------------------------------------------------

NUMBERS = st.one_of(
    st.floats(-60, 120), st.floats(0, 2), st.sampled_from([0, 36.3, 36.37, 36.4, 52, 71.4, 72.44, 50.525])
).map(lambda value: f"{value:.6g}")
UNITS = st.sampled_from(["kg", "lb", "g", "lb 3 oz", "C", "F", "K", "bar", "bara", "psi", "L", "mL", "cu in", "", " ", "W"])
LIKELY = {
    "C": st.floats(-41, 53), "bar": st.floats(0, 120), "kg": st.floats(0, 25), "L": st.floats(0.3, 50), "mL": st.floats(0, 900),
}  # fmt: skip
SUITED = {
    "temperature": "C", "ambient": "C", "pressure": "bar", "net": "kg", "mass": "kg", "limit": "kg", "capacity": "L",
    "volume": "mL", "tube": "mL",
}  # fmt: skip


@st.composite
def typed(draw):
    name = draw(st.sampled_from(FOR_SCRIPTS))
    options = [option.name for option in load_command_class("bottles", name).options]
    wild = draw(st.booleans())
    found = {}
    for option in draw(st.lists(st.sampled_from(options), max_size=8, unique=True)):
        unit = SUITED.get(option.rpartition("-")[2])
        if wild or unit is None:
            found[option.replace("-", "_")] = draw(
                st.one_of(st.none(), st.tuples(NUMBERS, UNITS).map("".join), st.text(max_size=12))
            )
        else:
            found[option.replace("-", "_")] = f"{draw(LIKELY[unit]):.5f}{unit}"
    return name, words(name, **found)


@settings(max_examples=times(150), deadline=None)
@given(typed())
def test_whatever_is_typed_it_answers_or_refuses_in_json(case):
    name, options = case
    if {"-h", "--help"} & set(options):
        return
    code, told = run(name, *options)
    assert code in (0, 2)
    if code:
        assert set(told) == {"error", "sentence"} and told["error"] != NOT_COMPUTED and told["sentence"]
    else:
        assert set(told) - {"expected_bar"} == KEYS[name]
