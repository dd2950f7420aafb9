"""States from two readings: round trips, the plain flash of the library, regions, refusals, datum."""

from __future__ import annotations

import math
import random
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gaugeside.errors import OutOfRange, Refusal
from gaugeside.refrigerants import Datum, Fluid, Refrigerant, Region, State, all_refrigerants, find, library, open_fluid
from gaugeside.refrigerants.limits import MARGIN

ZERO = 273.15
MODELLED = [one for one in all_refrigerants() if one.modelled and one.critical_temperature > 223.15]
COMMON = [
    "R-407C",
    "R-448A",
    "R-449A",
    "R-454B",
    "R-454C",
    "R-455A",
    "R-513A",
    "R-410A",
    "R-134a",
    "R-744",
    "R-717",
    "R-290",
]


def random_states(fluid: Fluid, dice: random.Random, count: int) -> list[State]:
    """States of every kind, by pressure and temperature, superheat, subcooling and vapour fraction."""
    low = max(218.15, fluid.minimum_temperature + 16.0)
    high = min(fluid.critical_temperature - MARGIN - 3.0, fluid.maximum_temperature - 10.0)
    states = []
    for i in range(count):
        temperature = dice.uniform(low, high) if high > low else 0.5 * (low + fluid.critical_temperature)
        kind = i % 5
        if kind == 0:
            superheat = dice.uniform(0, min(40.0, fluid.maximum_temperature - temperature - 1.0))
            states.append(fluid.state_superheat(fluid.dew_at_temperature(temperature).pressure, superheat))
        elif kind == 1:
            states.append(
                fluid.state_subcooling(fluid.bubble_at_temperature(temperature).pressure, dice.uniform(0, 15))
            )
        elif kind == 2:
            states.append(fluid.state_tx(temperature, dice.random()))
        elif kind == 3:
            pressure = fluid.dew_at_temperature(temperature).pressure
            states.append(fluid.state_px(pressure, dice.random()))
        else:
            pressure = min(dice.uniform(1.1, 2.0) * fluid.critical_pressure, fluid.maximum_pressure)
            states.append(fluid.state_pt(pressure, dice.uniform(low, fluid.maximum_temperature)))
    return states


@pytest.mark.parametrize("one", MODELLED, ids=lambda one: one.designation)
def test_round_trips(one: Refrigerant) -> None:
    """p-h, p-s, p-x and p-T lead back to the state they were taken from."""
    fluid = open_fluid(one)
    for state in random_states(fluid, random.Random(one.designation), 20):
        for again in (fluid.state_ph(state.pressure, state.enthalpy), fluid.state_ps(state.pressure, state.entropy)):
            assert again.region is state.region
            assert again.temperature == pytest.approx(state.temperature, abs=1e-5)
            assert again.density == pytest.approx(state.density, rel=1e-6)
        if state.vapour_fraction is None:
            again = fluid.state_pt(state.pressure, state.temperature)
            assert again.enthalpy == pytest.approx(state.enthalpy, abs=0.01)
        else:
            again = fluid.state_px(state.pressure, state.vapour_fraction)
            assert again.temperature == pytest.approx(state.temperature, abs=1e-6)
            assert again.enthalpy == pytest.approx(state.enthalpy, abs=0.1)


@pytest.mark.parametrize("designation", ["R-407C", "R-448A", "R-454C", "R-455A", "R-463A", "R-472A"])
def test_inside_the_glide_pressure_and_temperature_give_the_vapour_fraction(designation: str) -> None:
    fluid = open_fluid(find(designation))
    for fraction in (0.05, 0.3, 0.6, 0.95):
        state = fluid.state_px(8e5, fraction)
        again = fluid.state_pt(8e5, state.temperature)
        assert again.region is Region.TWO_PHASE
        assert again.vapour_fraction == pytest.approx(fraction, abs=1e-6)


@pytest.mark.parametrize("designation", COMMON)
def test_agreement_with_the_plain_flash_of_the_library(designation: str) -> None:
    """1e-6 in temperature, enthalpy, entropy and density, wherever the plain flash is right."""
    one = find(designation)
    fluid, plain = open_fluid(one), library.open_state(one.library_fluid)
    start, compared = fluid.bubble_at_temperature(260.0), 0
    own_phase = fluid._model.liquid
    if one.is_blend:
        own_phase.compose(own_phase.whole)
    own_phase.at(start.density / own_phase.molar_mass, 260.0)
    shift = (start.enthalpy - own_phase.state.hmass(), start.entropy - own_phase.state.smass())
    for state in random_states(fluid, random.Random(designation), 40):
        try:
            if state.vapour_fraction is None:
                plain.update(library.PRESSURE_TEMPERATURE, state.pressure, state.temperature)
            else:
                plain.update(library.PRESSURE_QUALITY, state.pressure, molar_fraction(fluid, state, plain))
        except ValueError:
            continue  # one of its holes, which is why the states are solved here
        if state.vapour_fraction is None and wrong_root(plain, state):
            continue
        compared += 1
        assert plain.T() == pytest.approx(state.temperature, rel=1e-6)
        assert plain.rhomass() == pytest.approx(state.density, rel=1e-6)
        # Only differences of enthalpy and entropy mean anything: compared on the scale of a latent heat.
        assert plain.hmass() + shift[0] == pytest.approx(state.enthalpy, abs=1e-6 * 2e5)
        assert plain.smass() + shift[1] == pytest.approx(state.entropy, abs=1e-6 * 1e3)
    assert compared >= 25


def molar_fraction(fluid: Fluid, state: State, plain: object) -> float:
    """The molar vapour fraction of a state between bubble and dew, which the library's flash asks for."""
    if not fluid.refrigerant.is_blend:
        return float(state.vapour_fraction or 0.0)
    low, high = 0.0, 1.0
    fraction = 0.5
    for _ in range(60):
        fraction = 0.5 * (low + high)
        plain.update(library.PRESSURE_QUALITY, state.pressure, fraction)  # type: ignore[attr-defined]
        if plain.T() > state.temperature:  # type: ignore[attr-defined]
            high = fraction
        else:
            low = fraction
    return fraction


def wrong_root(plain: object, state: State) -> bool:
    """Whether the library took an unstable density, or liquid where there is vapour: far off and more Gibbs energy."""
    return abs(plain.rhomass() / state.density - 1.0) > 0.05  # type: ignore[attr-defined]


def test_where_the_plain_flash_takes_a_wrong_root_ours_is_the_stable_one() -> None:
    """The library hands out these densities without a word; the slope of pressure over density unmasks them."""
    for designation, pressure, temperature in (
        ("R-452C", 2175066.7443811987, 270.5841869501336),
        ("R-471A", 1984134.0903233925, 304.5703454899264),
        ("R-504", 1739057.6734194062, 239.44790601884782),
    ):
        fluid = open_fluid(find(designation))
        state = fluid.state_pt(pressure, temperature)
        phase = fluid._model.liquid
        phase.compose(phase.whole)
        phase.at(state.density / phase.molar_mass, temperature)
        assert phase.stiffness() > 0.0
        assert phase.state.p() == pytest.approx(pressure, rel=1e-5)
        assert state.density > fluid.bubble_at_temperature(temperature).density


# --- the known holes and wrong roots of plain flashes


@pytest.mark.parametrize(
    ("designation", "celsius"),
    # The first four are known holes of plain flashes.
    [
        ("R-410A", 45.0),
        ("R-407C", 55.0),
        ("R-454B", 57.0),
        ("R-448A", 65.0),
        ("R-404A", 40.0),
        ("R-407A", 41.5),
        ("R-407F", 43.0),
        ("R-407H", 44.0),
        ("R-417A", 45.5),
        ("R-422D", 47.0),
        ("R-427A", 48.0),
        ("R-442A", 49.5),
        ("R-449A", 51.0),
        ("R-450A", 52.0),
        ("R-452A", 53.5),
        ("R-452B", 55.0),
        ("R-454A", 56.0),
        ("R-454C", 57.5),
        ("R-455A", 59.0),
        ("R-466A", 60.0),
        ("R-502", 61.5),
        ("R-507A", 63.0),
        ("R-513A", 64.0),
        ("R-515B", 66.0),
    ],
)
def test_summer_condensing_temperatures(designation: str, celsius: float) -> None:
    fluid = open_fluid(find(designation))
    bubble, dew = fluid.bubble_at_temperature(celsius + ZERO), fluid.dew_at_temperature(celsius + ZERO)
    assert bubble.pressure >= dew.pressure > 5e5
    assert bubble.density > dew.density
    assert fluid.bubble_at_pressure(bubble.pressure).temperature == pytest.approx(celsius + ZERO, abs=1e-6)
    neighbours = [fluid.dew_at_temperature(celsius + ZERO + shift).pressure for shift in (-0.3, 0.3)]
    # Within 0.6 K the curve is straight in the logarithm to 1e-4: a wrong root is not.
    assert math.log(dew.pressure) == pytest.approx(sum(map(math.log, neighbours)) / 2, abs=1e-4)


def test_a_wrong_root_of_the_library_is_not_taken() -> None:
    """R-463A at 40 °C: a plain flash converges to something that is no saturation state."""
    fluid = open_fluid(find("R-463A"))
    pressures = [fluid.bubble_at_temperature(t).pressure for t in (311.15, 312.15, 313.15, 314.15, 315.15)]
    dew = [fluid.dew_at_temperature(t).pressure for t in (311.15, 312.15, 313.15, 314.15, 315.15)]
    for curve in (pressures, dew):
        steps = [math.log(b / a) for a, b in pairwise(curve)]
        assert all(0.019 < step < 0.027 for step in steps)
        assert steps == sorted(steps, reverse=True)


# --- carbon dioxide


def test_transcritical_carbon_dioxide() -> None:
    """Density and enthalpy differences: Span and Wagner (1996) through PYroMat in test_independent_codes."""
    fluid = open_fluid(find("R-744"))
    gas_cooler = fluid.state_pt(100e5, 35.0 + ZERO)
    assert gas_cooler.region is Region.SUPERCRITICAL
    assert gas_cooler.vapour_fraction is None
    assert gas_cooler.density == pytest.approx(712.8, rel=2e-3)  # NIST Chemistry WebBook, from memory
    beside = fluid.state_pt(74e5, 31.2 + ZERO)
    assert beside.region is Region.SUPERCRITICAL
    assert 300.0 < beside.density < 500.0  # the critical density is 467.6 kg/m3
    assert fluid.state_ph(74e5, beside.enthalpy).temperature == pytest.approx(31.2 + ZERO, abs=1e-4)
    assert fluid.state_pt(100e5, 20.0 + ZERO).region is Region.LIQUID_ABOVE_CRITICAL_PRESSURE
    assert fluid.state_pt(60e5, 60.0 + ZERO).region is Region.SUPERHEATED


def test_no_saturation_above_the_critical_point_and_none_below_the_triple_point() -> None:
    fluid = open_fluid(find("R-744"))
    with pytest.raises(OutOfRange, match=r"R-744 has no saturation above its critical point, 30\.98 °C and 73\.77 bar"):
        fluid.dew_at_temperature(35.0 + ZERO)
    with pytest.raises(OutOfRange, match="no saturation above"):
        fluid.bubble_at_pressure(80e5)
    with pytest.raises(OutOfRange, match="too near the critical point"):
        fluid.bubble_at_pressure(73.5e5)
    with pytest.raises(OutOfRange, match="dry ice"):
        fluid.dew_at_pressure(3e5)
    with pytest.raises(OutOfRange, match="dry ice"):
        fluid.bubble_at_temperature(-60.0 + ZERO)


# --- regions and refusals


def test_regions() -> None:
    fluid = open_fluid(find("R-134a"))
    bubble = fluid.bubble_at_temperature(300.0)
    assert bubble.region is Region.SATURATED_LIQUID
    assert bubble.vapour_fraction == 0.0
    assert fluid.dew_at_temperature(300.0).region is Region.SATURATED_VAPOUR
    assert fluid.state_px(5e5, 0.5).region is Region.TWO_PHASE
    assert fluid.state_px(5e5, 0.5).isobaric_heat_capacity is None
    assert fluid.state_pt(8e5, 280.0).region is Region.SUBCOOLED
    assert fluid.state_pt(2e5, 300.0).region is Region.SUPERHEATED
    assert fluid.state_pt(50e5, 400.0).region is Region.SUPERCRITICAL
    assert fluid.state_pt(50e5, 300.0).region is Region.LIQUID_ABOVE_CRITICAL_PRESSURE


@pytest.mark.parametrize("designation", ["R-134a", "R-717", "R-507A"])
def test_on_the_saturation_line_pressure_and_temperature_fix_nothing(designation: str) -> None:
    fluid = open_fluid(find(designation))
    pressure = fluid.dew_at_temperature(280.0).pressure
    for temperature in (280.0, 280.0005):
        with pytest.raises(Refusal, match="do not tell how much of it is vapour") as refusal:
            fluid.state_pt(pressure, temperature)
        assert "vapour fraction" in refusal.value.hint
    assert fluid.state_pt(pressure, 280.05).region is Region.SUPERHEATED
    assert fluid.state_pt(pressure, 279.9).region is Region.SUBCOOLED


@pytest.mark.parametrize(
    ("what", "word"),
    [
        (lambda f: f.state_pt(5e5, 900.0), "highest temperature"),
        (lambda f: f.state_pt(5e9, 300.0), "highest pressure"),
        (lambda f: f.state_pt(-1.0, 300.0), "above zero"),
        (lambda f: f.state_pt(0.0, 300.0), "above zero"),
        (lambda f: f.state_pt(5e5, -3.0), "absolute zero"),
        (lambda f: f.state_pt(math.nan, 300.0), "above zero"),
        (lambda f: f.state_pt(5e5, math.nan), "absolute zero"),
        (lambda f: f.state_pt(5e5, 100.0), "below"),
        (lambda f: f.bubble_at_temperature(100.0), "below"),
        (lambda f: f.bubble_at_temperature(math.nan), "absolute zero"),
        (lambda f: f.dew_at_pressure(1e-3), "below"),
        (lambda f: f.dew_at_pressure(math.nan), "above zero"),
        (lambda f: f.state_ph(5e5, 9e6), "hotter"),
        (lambda f: f.state_ph(5e5, -9e6), "below"),
        (lambda f: f.state_ps(5e5, 9e4), "hotter"),
        (lambda f: f.state_superheat(5e5, 400.0), "highest temperature"),
        (lambda f: f.state_superheat(60e5, 5.0), "no saturation"),
        (lambda f: f.state_px(5e5, 1.2), "vapour fraction"),
        (lambda f: f.state_px(5e5, math.nan), "vapour fraction"),
        (lambda f: f.state_superheat(5e5, -2.0), "superheat of -2 K is impossible"),
        (lambda f: f.state_subcooling(5e5, -2.0), "subcooling of -2 K is impossible"),
    ],
)
@pytest.mark.parametrize("designation", ["R-134a", "R-448A"])
def test_out_of_range_is_a_sentence(designation: str, what: object, word: str) -> None:
    fluid = open_fluid(find(designation))
    with pytest.raises(Refusal, match=word) as refusal:
        what(fluid)  # type: ignore[operator]
    assert refusal.value.message.endswith(".")
    assert refusal.value.hint.endswith(".")


CALLS = [
    "state_pt",
    "state_ph",
    "state_ps",
    "state_px",
    "state_tx",
    "state_superheat",
    "state_subcooling",
]
NUMBERS = st.one_of(
    st.floats(allow_nan=True, allow_infinity=True),
    st.floats(0.0, 1.0),
    st.floats(100.0, 700.0),
    st.floats(-1e5, 1e6),
    st.floats(1e3, 2e7),
)


@settings(max_examples=600, deadline=None)
@given(
    designation=st.sampled_from(["R-134a", "R-744", "R-448A", "R-472A", "R-718", "R-507A", "R-113"]),
    call=st.sampled_from(CALLS),
    first=NUMBERS,
    second=NUMBERS,
)
def test_any_two_numbers_give_a_state_or_a_sentence(designation: str, call: str, first: float, second: float) -> None:
    fluid = open_fluid(find(designation))
    try:
        state = getattr(fluid, call)(first, second)
    except Refusal as refusal:
        answer = refusal.sentence()
    else:
        answer = str(state.region) + "."
        assert all(map(math.isfinite, (state.pressure, state.temperature, state.enthalpy, state.entropy)))
        assert state.density > 0.0
        assert fluid.minimum_temperature - 1e-6 <= state.temperature <= fluid.maximum_temperature + 1e-6
    assert "." in answer


def test_superheat_counts_from_dew_and_subcooling_from_bubble() -> None:
    fluid = open_fluid(find("R-407C"))
    assert fluid.state_superheat(5e5, 6.0).temperature == pytest.approx(fluid.dew_at_pressure(5e5).temperature + 6.0)
    assert fluid.state_subcooling(5e5, 6.0).temperature == pytest.approx(
        fluid.bubble_at_pressure(5e5).temperature - 6.0
    )


# --- datum


@pytest.mark.parametrize("designation", ["R-134a", "R-410A", "R-407C", "R-717", "R-290", "R-1234ze(E)"])
def test_datum(designation: str) -> None:
    one = find(designation)
    iir = open_fluid(one).bubble_at_temperature(ZERO)
    assert (iir.enthalpy, iir.entropy) == (pytest.approx(200e3), pytest.approx(1e3))
    ashrae = open_fluid(one, Datum.ASHRAE).bubble_at_temperature(ZERO - 40.0)
    assert (ashrae.enthalpy, ashrae.entropy) == (pytest.approx(0.0, abs=1e-6), pytest.approx(0.0, abs=1e-9))
    boiling = open_fluid(one, Datum.NBP).bubble_at_pressure(101_325.0)
    assert (boiling.enthalpy, boiling.entropy) == (pytest.approx(0.0, abs=1e-6), pytest.approx(0.0, abs=1e-9))
    fluids = [open_fluid(one, datum) for datum in Datum]
    # Only the datum differs: differences between two states do not.
    assert len({round(f.dew_at_pressure(4e5).enthalpy - f.bubble_at_pressure(6e5).enthalpy, 3) for f in fluids}) == 1
    assert fluids[0].datum_note == Datum.IIR.description


def test_a_datum_that_does_not_exist_is_refused_or_moved_and_said() -> None:
    with pytest.raises(OutOfRange, match="does not exist for R-744"):
        open_fluid(find("R-744"), Datum.NBP)
    with pytest.raises(OutOfRange, match="does not exist for R-718"):
        open_fluid(find("R-718"), Datum.ASHRAE)
    water = open_fluid(find("R-718"))
    assert water.bubble_at_temperature(water.minimum_temperature).enthalpy == pytest.approx(200e3)
    assert "0.01 °C" in water.datum_note


def test_the_same_fluid_is_opened_once() -> None:
    assert open_fluid(find("134a")) is open_fluid(find("R-134a"))
    assert open_fluid(find("R-134a")).library_version.startswith("CoolProp 8")
