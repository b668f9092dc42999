"""The correlations of ESDU 91022 (1991), made without the equation of state that is used here."""

from __future__ import annotations

import math

from tests.physics.reference import rows

TC, PC, RHO_C = 309.57, 7251e3, 452.0  # K, Pa, kg/m3: its own critical constants, table 7.1


def esdu(name: str, kelvin: float) -> float:
    """One of its equations 4.1 to 4.6, 4.14 and 4.15, in SI units."""
    row = next(row for row in rows("esdu_91022_coefficients.csv") if row["property"] == name)
    b = [float(row[f"b{i}"]) if row[f"b{i}"] else 0.0 for i in range(1, 6)]
    tr = kelvin / TC
    x = 1.0 - tr
    if name == "p_vap":
        return PC * math.exp((b[0] * x + b[1] * x**1.5 + b[2] * x**2.5 + b[3] * x**5) / tr)
    if name == "rho_liq":
        return RHO_C * math.exp(sum(b[i] * x ** ((i + 1) / 3) for i in range(4)))
    if name == "rho_vap":
        return RHO_C * math.exp(sum(b[i] * (1 / tr - 1) ** ((i + 1) / 3) for i in range(5)))
    if name == "cp_ideal":
        return 1e3 * (b[0] + b[1] * tr**-0.5 + b[2] * tr**0.5 + b[3] * tr)
    if name == "h_ideal":
        return 1e3 * sum(b[i] * tr ** (i / 2) for i in range(5))
    return 1e3 * sum(b[i] * x ** (i / 3) for i in range(5))  # h_liq, h_vap


def latent_heat(kelvin: float) -> float:
    """Of its own two enthalpies, J/kg."""
    return esdu("h_vap", kelvin) - esdu("h_liq", kelvin)
