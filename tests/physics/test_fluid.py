"""The states of nitrous oxide against the same equation computed elsewhere, and against another one."""

from __future__ import annotations

import math
import subprocess
import sys
import threading

import pytest

from shop.physics import fluid
from shop.physics.errors import NoSolution, OutOfRange
from shop.physics.states import RHO_CRITICAL, T_CRITICAL
from tests.physics.reference import rows

PSI = 6894.757293168  # Pa, NIST SP 811


@pytest.mark.parametrize("row", rows("refprop10_check_points.csv"), ids=lambda row: row["T_K"][:6])
def test_saturation_meets_the_published_check_points(row):
    state = fluid.saturation_at_temperature(float(row["T_K"]))
    assert state.pressure_pa == pytest.approx(float(row["p_Pa"]), rel=1e-8)
    assert state.liquid_density / fluid.MOLAR_MASS == pytest.approx(float(row["rhoL_mol_m3"]), rel=1e-7)
    assert state.vapour_density / fluid.MOLAR_MASS == pytest.approx(float(row["rhoV_mol_m3"]), rel=1e-7)


def test_pressure_at_the_authors_own_check_state():
    row = next(row for row in rows("lemmon_span_2006_check.csv") if row["quantity"] == "p")
    density = float(row["rho_mol_dm3"]) * 1e3 * fluid.MOLAR_MASS
    state = fluid.state_by_density_temperature(density, float(row["T_K"]))
    assert state.pressure_pa / 1e3 == pytest.approx(float(row["value"]), rel=1e-6)
    assert state.phase == "supercritical"


@pytest.mark.parametrize("row", rows("nist_webbook_saturation.csv"), ids=lambda row: row["t_degC"])
def test_saturation_meets_the_webbook_table(row):
    state = fluid.saturation_at_temperature(float(row["t_degC"]) + 273.15)
    assert state.pressure_pa / PSI == pytest.approx(float(row["p_psia"]), rel=1e-4)
    assert state.liquid_density == pytest.approx(float(row["rhoL_kg_m3"]), rel=1e-4)
    assert state.vapour_density == pytest.approx(float(row["rhoV_kg_m3"]), rel=1e-4)
    assert state.latent_heat / 1e3 == pytest.approx(float(row["hV_kJ_kg"]) - float(row["hL_kJ_kg"]), rel=2e-4)


def test_constants_are_those_published():
    published = {
        (row["quantity"], row["unit"]): float(row["value"])
        for row in rows("constants.csv")
        if row["source"].startswith("Lemmon")
    }
    assert published["critical temperature", "K"] == pytest.approx(T_CRITICAL, abs=1e-3)
    assert published["critical pressure", "MPa"] * 1e6 == pytest.approx(fluid.P_CRITICAL, rel=1e-4)
    assert published["critical density", "kg/m3"] == pytest.approx(RHO_CRITICAL, rel=2.5e-3)
    assert published["molar mass", "g/mol"] / 1e3 == pytest.approx(fluid.MOLAR_MASS, rel=1e-9)
    assert published["triple/melting temperature", "K"] == fluid.T_TRIPLE


def test_about_745_psi_at_70_fahrenheit():
    row = next(row for row in rows("filling_pressures.csv") if row["rule"] == "vapour pressure")
    gauge = fluid.saturation_pressure(float(row["temperature_c"]) + 273.15) - fluid.ATMOSPHERE
    assert gauge / PSI == pytest.approx(float(row["pressure"]), rel=0.015)


def test_a_warm_supply_shows_about_a_thousand_psi():
    # Common practice, no source: a supply bottle at about 1,000 psi (70 bar) is a warm one.
    gauge = fluid.saturation_pressure(34.0 + 273.15) - fluid.ATMOSPHERE
    assert 950 * PSI < gauge < 1050 * PSI


@pytest.mark.parametrize("density", [2.0, 100.0, 300.0, 452.0, 700.0, 900.0])
@pytest.mark.parametrize("kelvin", [233.15, 270.0, 293.15, 309.4, 309.6, 330.0])
def test_a_state_is_the_same_by_density_and_energy(density, kelvin):
    one = fluid.state_by_density_temperature(density, kelvin)
    two = fluid.state_by_density_energy(density, one.energy)
    assert two.temperature_k == pytest.approx(kelvin, abs=2e-3)
    assert two.pressure_pa == pytest.approx(one.pressure_pa, rel=1e-4)
    assert (one.quality is None) == (two.quality is None)


@pytest.mark.parametrize(
    ("bar", "kelvin", "phase"), [(10, 293.15, "vapour"), (60, 293.15, "liquid"), (90, 320, "supercritical")]
)
def test_a_state_by_pressure_and_temperature_has_one_phase(bar, kelvin, phase):
    state = fluid.state_by_pressure_temperature(bar * 1e5, kelvin)
    assert state.phase == phase
    again = fluid.state_by_density_temperature(state.density, kelvin)
    assert again.pressure_pa == pytest.approx(bar * 1e5, rel=1e-6)


def test_two_phases_are_told_with_their_share():
    side = fluid.saturation_at_temperature(280.0)
    density = 1.0 / (0.25 / side.vapour_density + 0.75 / side.liquid_density)
    state = fluid.state_by_density_temperature(density, 280.0)
    assert state.phase == "two-phase"
    assert state.quality == pytest.approx(0.25, abs=1e-9)
    assert state.energy == pytest.approx(0.25 * side.vapour_energy + 0.75 * side.liquid_energy, rel=1e-9)
    assert fluid.saturation_at_pressure(side.pressure_pa).temperature_k == pytest.approx(280.0, abs=1e-6)


@pytest.mark.parametrize(
    ("call", "code"),
    [
        (lambda: fluid.saturation_pressure(180.0), "no_saturation"),
        (lambda: fluid.saturation_pressure(310.0), "no_saturation"),
        (lambda: fluid.saturation_pressure(math.nan), "no_saturation"),
        (lambda: fluid.saturation_at_pressure(8e6), "no_saturation"),
        (lambda: fluid.state_by_density_temperature(400.0, 600.0), "temperature_range"),
        (lambda: fluid.state_by_density_temperature(400.0, math.nan), "temperature_range"),
        (lambda: fluid.state_by_density_temperature(0.0, 300.0), "density_range"),
        (lambda: fluid.state_by_density_temperature(math.nan, 300.0), "density_range"),
        (lambda: fluid.state_by_density_temperature(1390.0, 300.0), "pressure_range"),
        (lambda: fluid.state_by_density_energy(400.0, 9e6), "temperature_range"),
        (lambda: fluid.state_by_density_energy(400.0, math.nan), "temperature_range"),
        (lambda: fluid.state_by_pressure_temperature(6e7, 300.0), "pressure_range"),
        (lambda: fluid.state_by_pressure_temperature(-1.0, 300.0), "pressure_range"),
    ],
)
def test_what_lies_outside_is_refused(call, code):
    with pytest.raises(OutOfRange) as refusal:
        call()
    assert refusal.value.code == code


def test_on_saturation_pressure_and_temperature_tell_nothing():
    with pytest.raises(NoSolution) as refusal:
        fluid.state_by_pressure_temperature(fluid.saturation_pressure(290.0), 290.0)
    assert refusal.value.code == "on_saturation"


def test_each_thread_owns_its_state():
    engines = []
    threads = [threading.Thread(target=lambda: engines.append(fluid.engine())) for _ in range(2)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(20)
    assert len({id(engine) for engine in [*engines, fluid.engine()]}) == 3
    assert fluid.engine() is fluid.engine()


def test_importing_the_transfer_loads_no_coolprop():
    program = "import bottles.physics.forecast, bottles.physics.heating, sys; print('CoolProp' in sys.modules)"
    told = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, timeout=60, check=True)
    assert told.stdout.strip() == "False"
