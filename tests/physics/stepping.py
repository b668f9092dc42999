"""A plain peer for the closed forms: two bottles stepped by the full equation of state.

Nothing of the transfer's own code is used: at each step both bottles' temperatures are found
anew by halving, from the mass and the energy that they hold.
"""

from __future__ import annotations

from shop.physics.fluid import T_SATURATION_MAX, saturation_at_temperature, state_by_density_temperature


def settled(volume, wall, mass, energy, around):
    """Temperature and state in which contents and wall hold an energy."""
    low, high = around - 3.0, around + 3.0

    def surplus(t):
        return mass * state_by_density_temperature(mass / volume, t).energy + wall * t - energy

    while surplus(low) > 0.0:
        low -= 10.0
    while surplus(high) < 0.0:
        high += 10.0
    for _ in range(60):
        middle = 0.5 * (low + high)
        if surplus(middle) > 0.0:
            high = middle
        else:
            low = middle
        if high - low < 1e-8:
            break
    return low, state_by_density_temperature(mass / volume, low)


def outlet(volume, mass, state, *, latched, below=0.0):
    """Enthalpy of what leaves: liquid while there is any that the tube reaches, then vapour for good."""
    if state.quality is not None and state.temperature_k < T_SATURATION_MAX:
        side = saturation_at_temperature(state.temperature_k)
        reach = side.vapour_density * (volume - below) + side.liquid_density * below
        dry = latched or mass <= reach * (1.0 + 1e-9)
        return (side.vapour_enthalpy if dry else side.liquid_enthalpy), dry
    return state.enthalpy, latched


def step_mixed(source, receiver, moved, steps):
    """Both bottles after a mass has gone over in so many steps, by the midpoint rule."""
    m1, m2, t1, t2 = source.net_kg, receiver.net_kg, source.temperature_k, receiver.temperature_k
    v1, v2, c1, c2 = source.volume_m3, receiver.volume_m3, source.wall_j_k, receiver.wall_j_k
    e1 = m1 * state_by_density_temperature(m1 / v1, t1).energy + c1 * t1
    e2 = m2 * state_by_density_temperature(m2 / v2, t2).energy + c2 * t2
    total, share, latched, wet = e1 + e2, moved / steps, False, False
    one = state_by_density_temperature(m1 / v1, t1)
    for _ in range(steps):
        h, _ = outlet(v1, m1, one, latched=latched, below=source.below_tube_m3)
        _, half = settled(v1, c1, m1 - share / 2, e1 - h * share / 2, t1)
        h, dry = outlet(v1, m1 - share / 2, half, latched=latched, below=source.below_tube_m3)
        # A step may pass over the moment at which liquid is out: mist that comes later isn't drawn.
        latched = dry or (wet and half.quality is None)
        wet = half.quality is not None
        m1, m2, e1, e2 = m1 - share, m2 + share, e1 - h * share, e2 + h * share
        t1, one = settled(v1, c1, m1, e1, t1)
    t2, two = settled(v2, c2, m2, e2, t2)
    assert abs(e1 + e2 - total) < 1e-9 * abs(total)
    return t1, one.pressure_pa, t2, two.pressure_pa
