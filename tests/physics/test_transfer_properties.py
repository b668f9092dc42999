"""What any two bottles must keep to: conservation, order, monotony, units, an answer or a sentence."""

from __future__ import annotations

import json
import math

import pytest
from hypothesis import assume, given, reject, settings
from hypothesis import strategies as st

from bottles.physics.condensation import Condensation
from bottles.physics.forecast import forecast
from bottles.physics.receiver_start import AIR, OWN_VAPOUR, VENTED, WEIGHED, Start, start_vessel
from bottles.physics.transfer import NO_DIFFERENCE, Transfer, held, mixed, wall_condensing
from bottles.physics.vessel import Vessel, pressure_and_energy, wall_heat
from shop.physics.errors import OutOfRange, PhysicsError
from shop.physics.fluid import ATMOSPHERE, T_SATURATION_MAX, T_TRIPLE, load, saturation_at_temperature
from shop.physics.states import RHO_CRITICAL
from shop.physics.units import in_own_unit, parse_mass, parse_pressure, parse_temperature, parse_volume
from tests.examples import times
from tests.physics.stepping import step_mixed

LIMITS = {"mixed": mixed, "wall_condensing": wall_condensing, "held": held}
LIMIT, VOLUME, WALL = 4.624, 6.8e-3, wall_heat("aluminium", 5.9)
STEEL = wall_heat("steel", 32.0)
TRAPS = [36.37, 36.3705, 36.370578, 36.37067, 36.3707, 36.4, -40.0, 52.0, 20.0]
CELSIUS = st.one_of(st.floats(-40.0, 52.0), st.floats(35.8, 36.8), st.sampled_from(TRAPS))
FILL = st.one_of(
    st.floats(0.0, 0.75), st.floats(0.75, 1.05), st.sampled_from([0.0, 1e-9, 1e-6, 1e-3, 0.05, 0.16, 0.4529])
)
BELOW = st.sampled_from([0.0, 0.0, 0.001, 0.02, 0.3])
LINE = st.sampled_from([0.0, 0.0, 2e-5, 1e-4, 1e-3])


@pytest.fixture(autouse=True, scope="module")
def loaded():
    """The first question of all loads the fluid: no hang, but seconds."""
    load()
    forecast(source=supply(10.0, 20.0), **into_of(0.0))


def into_of(celsius):
    return {
        "receiver_volume_m3": VOLUME, "receiver_wall_j_k": WALL, "receiver_temperature_k": celsius + 273.15, "limit_kg": LIMIT,
    }  # fmt: skip


def supply(net, celsius, **other):
    return Vessel(0.029, STEEL, net, celsius + 273.15, **other)


def into(celsius, net=None):
    start = Start(VENTED if net is None else WEIGHED, net)
    return start_vessel(volume_m3=VOLUME, wall_j_k=WALL, temperature_k=celsius + 273.15, start=start)


@st.composite
def refills(draw):
    """Any two bottles and a line, whether or not anyone would join them."""
    litres, small = draw(st.sampled_from([0.3, 3.4, 29.0, 60.0])), draw(st.sampled_from([0.3, 0.5, 6.8, 29.0]))
    celsius = draw(CELSIUS)
    try:
        source = Vessel(
            litres / 1e3, draw(st.floats(0.0, 600.0)) * litres, draw(FILL) * litres, celsius + 273.15, 0.0,
            draw(st.booleans()), draw(BELOW) * litres / 1e3,
        )  # fmt: skip
    except OutOfRange:  # above 500 bar
        reject()
    kind = draw(st.sampled_from([VENTED, OWN_VAPOUR, AIR, WEIGHED]))
    return {
        "source": source,
        "receiver_volume_m3": small / 1e3,
        "receiver_wall_j_k": draw(st.one_of(st.just(0.0), st.floats(0.0, 900.0))) * small,
        "receiver_temperature_k": (celsius if draw(st.booleans()) else draw(CELSIUS)) + 273.15,
        "limit_kg": draw(st.sampled_from([0.05, 0.68, 0.75, 1.0])) * small,
        "start": Start(kind, draw(FILL) * small if kind == WEIGHED else None),
        "line_volume_m3": draw(LINE),
    }


def receiver_of(asked):
    try:
        return start_vessel(
            volume_m3=asked["receiver_volume_m3"], wall_j_k=asked["receiver_wall_j_k"],
            temperature_k=asked["receiver_temperature_k"], start=asked["start"],
        )  # fmt: skip
    except OutOfRange:  # above 500 bar
        reject()


def energy(vessel, mass, kelvin):
    return pressure_and_energy(vessel.volume_m3, mass, kelvin)[1] + vessel.wall_j_k * kelvin


@settings(max_examples=times(250), deadline=None)
@given(refills())
def test_any_refill_gets_an_answer_or_a_sentence(asked):
    try:
        told = forecast(**asked)
    except PhysicsError as refusal:
        assert refusal.code in {"pressure_range", "density_range"}
        assert refusal.sentence.endswith(".")
        return
    json.dumps(told.as_dict(), allow_nan=False)
    assert 0.0 <= told.low_kg <= told.likely_kg <= told.high_kg <= told.room_kg + 1e-12
    names = {name for name, _ in told.width} | {"more refills", "receiver weight", None}
    assert told.narrows in names
    for limit in (told.mixed, told.wall_condensing, told.held):
        assert limit.moved_kg + limit.source_left_kg + told.line_loss_kg == pytest.approx(
            max(asked["source"].net_kg, 1e-9), rel=1e-9
        )
        assert limit.receiver_final_k > 0.0 < limit.source_final_k
    cold = min(told.mixed.source_final_k, told.mixed.receiver_final_k)
    if told.mixed.moved_kg > 1e-6 and cold > T_TRIPLE + 0.01:
        # While it flows it flows downhill, and ends level.
        assert told.mixed.source_final_pa >= told.mixed.receiver_final_pa * (1 - 2e-3)
        if told.mixed.stopped_by == "pressures equal":
            assert told.mixed.source_final_pa == pytest.approx(told.mixed.receiver_final_pa, rel=2e-3)


@settings(max_examples=times(250), deadline=None)
@given(refills().filter(lambda asked: asked["start"].kind in (VENTED, OWN_VAPOUR)))
def test_mass_and_energy_are_conserved_between_any_two_bottles(asked):
    source = asked["source"]
    receiver = receiver_of(asked)
    transfer = Transfer(source, receiver)
    told = mixed(transfer, asked["limit_kg"])
    assume(told.moved_kg > 1e-3 and min(told.source_final_k, told.receiver_final_k) > T_TRIPLE + 0.01)
    before = energy(source, source.net_kg, source.temperature_k)
    before += energy(receiver, receiver.net_kg, receiver.temperature_k)
    after = energy(source, told.source_left_kg, told.source_final_k)
    after += energy(receiver, told.receiver_final_kg, told.receiver_final_k)
    assert told.receiver_final_kg + told.source_left_kg == pytest.approx(source.net_kg + receiver.net_kg, rel=1e-12)
    # Against the heat of what moved; rounding of what both hold can't be told apart below that.
    assert after - before == pytest.approx(0.0, abs=1e-6 * 4e5 * told.moved_kg + 1e-11 * abs(before))


@settings(max_examples=times(250), deadline=None)
@given(refills())
def test_the_limits_of_any_refill_do_not_depend_on_what_was_asked_first(asked):
    receiver = receiver_of(asked)
    one, two = (Transfer(asked["source"], receiver, asked["line_volume_m3"]) for _ in range(2))
    forth = [LIMITS[name](one, asked["limit_kg"]) for name in LIMITS]
    back = [LIMITS[name](two, asked["limit_kg"]) for name in reversed(LIMITS)][::-1]
    for first, second in zip(forth, back, strict=True):
        assert first.moved_kg == pytest.approx(second.moved_kg, rel=1e-5, abs=1e-6)
        assert first.stopped_by == second.stopped_by


@settings(max_examples=times(60), deadline=None)
@given(st.floats(-40.0, 30.0), st.floats(0.2, 15.0), st.floats(4.0, 20.0))
def test_a_colder_bottle_takes_no_less_in_the_quick_and_the_slow_limit(celsius, degrees, net):
    warm, cold = (Transfer(supply(net, 20.0), into(c)) for c in (celsius + degrees, celsius))
    assert cold.mixed_free_kg() >= warm.mixed_free_kg() - 1e-5
    # The slow one is of first order in its step.
    if celsius + degrees <= 20.0:
        assert cold.slow_free_kg() >= warm.slow_free_kg() - 0.01 * LIMIT


@settings(max_examples=times(60), deadline=None)
@given(st.floats(0.5, 18.0), st.floats(0.05, 2.0), st.floats(-30.0, 25.0), st.sampled_from(sorted(LIMITS)))
def test_a_fuller_supply_gives_no_less_up_to_the_limit(net, more, celsius, name):
    little = LIMITS[name](Transfer(supply(net, 20.0), into(celsius)), LIMIT).moved_kg
    much = LIMITS[name](Transfer(supply(net + more, 20.0), into(celsius)), LIMIT).moved_kg
    assert much >= little - (0.01 * LIMIT if name == "wall_condensing" else 1e-5)


@settings(max_examples=times(80), deadline=None)
@given(st.floats(8.0, 19.7), st.floats(0.0, 30.0), st.floats(-40.0, 30.0))
def test_the_quick_limit_lies_above_the_slow_one_for_a_vented_bottle_no_warmer_than_the_supply(net, source_c, celsius):
    """Only so: in a warmer bottle liquid lies apart from the heat of the wall, and the slow limit may take more."""
    assume(celsius <= source_c)
    transfer = Transfer(supply(net, source_c), into(celsius))
    assert transfer.mixed_free_kg() >= transfer.slow_free_kg() - 1e-6


def test_in_a_much_warmer_bottle_the_slow_limit_takes_more():
    transfer = Transfer(supply(19.0, -10.0), into(25.0))
    assert transfer.slow_free_kg() > transfer.mixed_free_kg() + 0.2


@settings(max_examples=times(60), deadline=None)
@given(st.floats(4.0, 19.7), st.floats(0.0, 30.0), st.floats(-40.0, 29.0))
def test_kept_at_its_temperature_a_colder_bottle_takes_no_less_than_quickly(net, source_c, celsius):
    assume(celsius <= source_c - 1.0)
    transfer = Transfer(supply(net, source_c), into(celsius))
    kept = held(transfer, LIMIT)
    # Vapour alone fills a bottle better that cools with it than one that is kept warm.
    assume(not kept.liquid_out)
    assert kept.moved_kg >= mixed(transfer, LIMIT).moved_kg - 1e-5


@settings(max_examples=times(30), deadline=None)
@given(st.floats(8.0, 19.7), st.floats(0.0, 30.0))
def test_kept_at_one_temperature_is_no_upper_bound(net, celsius):
    transfer = Transfer(supply(net, celsius), into(celsius))
    assert held(transfer, LIMIT).moved_kg < mixed(transfer, LIMIT).moved_kg - 0.3


@settings(max_examples=times(40), deadline=None)
@given(st.floats(-20.0, 28.0), st.floats(-30.0, 20.0), st.floats(0.0, 1.0), st.floats(0.3, 1.0))
def test_a_reading_alone_spans_every_weight_that_it_allows(source_c, celsius, share, most):
    vapour = saturation_at_temperature(source_c + 273.15).vapour_density * 0.029
    top = most * 19.72
    net = vapour + share * (top - vapour)
    asked = into_of(celsius)
    weighed = forecast(source=supply(net, source_c), **asked)
    assume(top > net)
    span = forecast(source=supply(0.0, source_c), source_range_kg=(vapour, top), **asked)
    assert span.low_kg <= weighed.low_kg + 1e-3 * LIMIT
    assert weighed.likely_kg <= span.high_kg + 1e-3 * LIMIT
    # Its high end may pass the span's: a degree is worth more between cold bottles of nearly one pressure.
    assert weighed.high_kg <= span.high_kg + 0.1 * LIMIT
    assert span.narrows in ("source weight", None)


@settings(max_examples=times(25), deadline=None)
@given(st.integers(3000, 19700), st.integers(0, 30000), st.integers(-30000, 30000))
def test_the_units_of_an_entry_change_nothing(net_g, source_mc, receiver_mc):
    """The same bottles written in pounds, cubic inches and fahrenheit, and read again."""

    def there_and_back(parse, stored, unit, own):
        return parse(in_own_unit(stored, unit), default_unit=own).stored

    grams = there_and_back(parse_mass, net_g, "lb", "g")
    kelvins = [there_and_back(parse_temperature, 273150 + milli, "°F", "°C") for milli in (source_mc, receiver_mc)]
    litres = [there_and_back(parse_volume, millilitres, "in3", "mL") for millilitres in (29000, 6800)]

    def moved(net, source_mk, receiver_mk, source_ml, receiver_ml):
        source = Vessel(source_ml / 1e6, STEEL, net / 1e3, source_mk / 1e3)
        receiver = start_vessel(
            volume_m3=receiver_ml / 1e6, wall_j_k=WALL, temperature_k=receiver_mk / 1e3, start=Start()
        )
        return mixed(Transfer(source, receiver), LIMIT).moved_kg

    plain = moved(net_g, 273150 + source_mc, 273150 + receiver_mc, 29000, 6800)
    assert moved(grams, *kelvins, *litres) == pytest.approx(plain, rel=2e-3, abs=2e-3)


def test_a_pressure_in_psi_is_the_same_pressure():
    entry = parse_pressure("0 psi", default_unit="bar", ambient_pa=ATMOSPHERE)
    assert entry.stored == ATMOSPHERE


@settings(max_examples=times(6), deadline=None)
@given(st.floats(6.0, 19.7), st.floats(-10.0, 48.0), st.floats(-30.0, 30.0))
def test_the_quick_limit_agrees_with_stepping_wherever_it_is_asked(net, source_c, celsius):
    source, receiver = supply(net, source_c), into(celsius)
    # Above the critical temperature thin fluid turns wet drop by drop: what the peer then draws is its step's size.
    assume(source_c < 36.0 or net > 0.029 * RHO_CRITICAL)
    told = mixed(Transfer(source, receiver), LIMIT)
    assume(told.moved_kg > 0.05)
    t1, p1, t2, p2 = step_mixed(source, receiver, told.moved_kg, 1200 if told.liquid_out else 200)
    # Next to the critical point a millikelvin is many grams of liquid: the peer itself is coarse there.
    assume(max(t1, told.source_final_k) < T_SATURATION_MAX - 0.5 or source_c > 40.0)
    assert told.source_final_k == pytest.approx(t1, abs=0.05)
    assert told.receiver_final_k == pytest.approx(t2, abs=0.05)
    assert told.source_final_pa == pytest.approx(p1, rel=2e-3)
    assert told.receiver_final_pa == pytest.approx(p2, rel=2e-3)


@pytest.mark.parametrize("celsius", [-40.0, 0.0, 20.0, 36.0, 36.3705, 36.4, 52.0])
@pytest.mark.parametrize("name", LIMITS)
def test_the_same_fill_at_one_temperature_moves_nothing(name, celsius):
    for fill in (1e-6, 0.01, 0.3, 0.68):
        source = Vessel(0.029, STEEL, 29.0 * fill, celsius + 273.15)
        told = LIMITS[name](Transfer(source, into(celsius, 6.8 * fill)), 1.5 * 6.8 * fill)
        assert (told.moved_kg, told.stopped_by) == (0.0, NO_DIFFERENCE)
        assert math.isfinite(told.receiver_final_pa)


@settings(max_examples=times(40), deadline=None)
@given(st.floats(-20.0, 30.0), st.floats(-30.0, 20.0), st.floats(0.0, 1.0), st.floats(-0.02, 0.05))
def test_the_last_hair_of_liquid_in_the_supply_makes_no_leap(source_c, celsius, figure, beyond):
    """Less in the supply never promises more, through the mass at which its liquid is out."""
    hair = saturation_at_temperature(source_c + 273.15).vapour_density * 0.029 * (1.0 + beyond)
    known = Condensation(figure, 0.1, "measured")
    less, more = (
        forecast(source=supply(net, source_c), condensation=known, **into_of(celsius)) for net in (hair, hair * 1.0002)
    )
    slack = 5e-4 * hair  # two and a half times what there is more of it
    assert less.low_kg <= more.low_kg + slack
    assert less.likely_kg - 1e-6 <= more.likely_kg <= less.likely_kg + slack
    assert less.high_kg <= more.high_kg + slack
