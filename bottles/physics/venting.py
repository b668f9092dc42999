"""What venting gives and costs: which phase comes out, how much, how cold the bottle gets."""

from __future__ import annotations

from dataclasses import dataclass, replace

from bottles.physics.venting_words import SENTENCES
from bottles.physics.vessel import COLDEST, Vessel, pressure_and_energy
from bottles.physics.withdrawal import Adiabatic
from shop.physics.errors import OutOfRange
from shop.physics.fluid import P_MAX, P_TRIPLE, T_SATURATION_MAX, engine
from shop.physics.roots import find_root

VAPOUR = "vapour"
LIQUID = "liquid"
UPRIGHT = "upright"
INVERTED = "inverted"
_EMPTY = 1e-9  # kg: as good as nothing inside
_LEAST = 1e-6  # share of the contents that is followed no further


@dataclass(frozen=True, slots=True)
class Vented:
    """A bottle after venting; `lost_when_warm_kg` is the loss once it's warm again, still open."""

    lost_kg: float
    left_kg: float
    liquid_left_kg: float
    temperature_k: float
    pressure_pa: float
    lost_when_warm_kg: float | None
    warnings: tuple[tuple[str, str], ...]

    def as_dict(self) -> dict[str, object]:
        """Everything, with units in the keys, ready for JSON; pressures absolute."""
        return {
            "lost_kg": self.lost_kg,
            "left_kg": self.left_kg,
            "liquid_left_kg": self.liquid_left_kg,
            "temperature_c": self.temperature_k - 273.15,
            "pressure_bar": self.pressure_pa / 1e5,
            "lost_when_warm_kg": self.lost_when_warm_kg,
            "warnings": [{"code": code, "sentence": words} for code, words in self.warnings],
        }


def phase_leaving(dip_tube: str, attitude: str) -> str | None:
    """Say which phase leaves a bottle that holds both.

    Parameters
    ----------
    dip_tube : str, `dip` or `none`; anything else is unknown [-]
    attitude : str, `upright` or `inverted`; anything else, lying too, is unknown [-]

    Returns
    -------
    str or None, `liquid` or `vapour`; None where it can't be told [-]

    Assumptions
    -----------
    The tube ends near the bottom of the upright bottle, so that upside down it ends in the
    vapour; without a tube the valve itself opens at the top of the upright bottle.

    Valid for
    ---------
    Bottles that stand; lying ones depend on how the tube is bent.

    Raises
    ------
    Nothing of its own.

    References
    ----------
    Common practice, no source.
    """
    if dip_tube not in ("dip", "none") or attitude not in (UPRIGHT, INVERTED):
        return None
    return LIQUID if (dip_tube == "dip") == (attitude == UPRIGHT) else VAPOUR


def vent(vessel: Vessel, phase: str, *, to_kg: float | None = None, to_pa: float | None = None) -> Vented:
    """Let nitrous out of a bottle, down to a mass or to a pressure.

    Parameters
    ----------
    vessel : Vessel, the bottle at rest [-]
    phase : str, `vapour` or `liquid`, what leaves while there are both [-]
    to_kg : float or None, contents to come down to [kg]
    to_pa : float or None, absolute pressure to come down to, as the room's [Pa]

    Returns
    -------
    Vented, masses [kg], temperature [K] and absolute pressure at the end [Pa]; the loss
    when it's warm again only for a pressure [kg]

    Assumptions
    -----------
    Quick: contents and wall at one temperature, no heat from outside. When the liquid is out
    vapour follows. Liquid that the dip tube doesn't reach stays, boiling, as vapour leaves.

    Valid for
    ---------
    Bottles between -40 and 52 °C at the start, without air, down to the triple point.

    Raises
    ------
    OutOfRange
        `vent` for a word that is no phase, for both targets or neither, or one out of range;
        `air` for a bottle with air in it.
    NoSolution
        Where the bottle's path can't be followed.

    References
    ----------
    Mass and energy balances, any text on thermodynamics; a pound of vapour cools a 10-lb
    aluminium bottle by 6 to 8 °C, a pound of liquid by 1 to 2 °C: common practice, no source.
    """
    if phase not in (VAPOUR, LIQUID) or (to_kg is None) == (to_pa is None):
        raise OutOfRange("vent", "Say what leaves, vapour or liquid, and down to which weight or which pressure.")
    if not 0.0 <= (0.0 if to_kg is None else to_kg) < 1e6 or not 0.0 < (1.0 if to_pa is None else to_pa) <= P_MAX:
        raise OutOfRange("vent", "A bottle is vented down to nothing or more, and to an absolute pressure above nothing.")
    if vessel.air:
        raise OutOfRange("air", SENTENCES["air"])
    net, codes = vessel.net_kg, ["outdoors", "cold"]
    warm = None if to_pa is None else max(net - _gas_left(vessel, to_pa), 0.0)
    rest = pressure_and_energy(vessel.volume_m3, net, vessel.temperature_k)[0]
    if net <= _EMPTY or (to_kg is not None and to_kg >= net) or (to_pa is not None and to_pa >= rest):
        return Vented(
            0.0, net, _liquid(vessel.volume_m3, net, vessel.temperature_k), vessel.temperature_k, rest, warm,
            _told(["nothing_to_vent"]),
        )  # fmt: skip
    path = Adiabatic(replace(vessel, liquid_pickup=phase == LIQUID))
    most = net * (1.0 - _LEAST)
    if to_kg is not None:
        lost = min(net - to_kg, most)
    else:
        assert to_pa is not None
        lost = _down_to(path, to_pa, most)
        if path.after(lost).pressure_pa > 1.001 * to_pa:
            codes.append("solid")
    after = path.after(lost)
    left = net - lost if to_kg is None else min(to_kg, net)
    liquid = _liquid(vessel.volume_m3, left, after.temperature_k)
    if phase == LIQUID and path.after(0.0).liquid:
        codes.append("liquid_out")
    if after.temperature_k < COLDEST:
        codes.append("very_cold")
    if to_pa is not None and liquid > 1e-3 * net:
        codes.append("liquid_stays")
    if warm is not None:
        warm = max(warm, lost)
    return Vented(net - left, left, liquid, after.temperature_k, after.pressure_pa, warm, _told(codes))


def _down_to(path: Adiabatic, pressure: float, most: float) -> float:
    """Mass given when a pressure is reached; where solid would begin if it's below that."""
    aim = pressure
    if path.after(most).pressure_pa > aim:
        aim = P_TRIPLE * (1.0 + 1e-6)
        if path.after(most).pressure_pa > aim:
            return most
    # That it stands above at rest is known; asked again, rounding might deny it.
    at_rest = max(path.after(0.0).pressure_pa - aim, 1e-6)
    return find_root(
        lambda given: path.after(given).pressure_pa - aim, 0.0, most, tolerance=1e-8 * most, at_low=at_rest
    )  # fmt: skip


def _gas_left(vessel: Vessel, pressure: float) -> float:
    """What vapour at a pressure, at the bottle's own temperature, leaves inside."""
    t = vessel.temperature_k
    if t <= T_SATURATION_MAX:
        p_sat, _, rho_v, _, _ = engine().saturation(t)
        if pressure >= p_sat * (1.0 - 1e-5):
            return rho_v * vessel.volume_m3
    return engine().density(pressure, t) * vessel.volume_m3


def _liquid(volume: float, mass: float, temperature: float) -> float:
    """Liquid among the contents."""
    if temperature > T_SATURATION_MAX:
        return 0.0
    _, rho_l, rho_v, _, _ = engine().saturation(temperature)
    if mass >= rho_l * volume:
        return mass
    return max(mass - rho_v * volume, 0.0) / (1.0 - rho_v / rho_l)


def _told(codes: list[str]) -> tuple[tuple[str, str], ...]:
    """Codes with their sentences."""
    return tuple((code, SENTENCES[code]) for code in codes)
