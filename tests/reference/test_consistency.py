"""Thermodynamic consistency, which needs no table and holds for every refrigerant."""

from __future__ import annotations

import math

import pytest

from gaugeside.errors import OutOfRange
from gaugeside.refrigerants import Fluid, Refrigerant, all_refrigerants, find, library, open_fluid
from gaugeside.refrigerants.limits import MARGIN
from gaugeside.refrigerants.solvers import BUBBLE, DEW

MODELLED = [one for one in all_refrigerants() if one.modelled]
COLDEST = 213.15
LEAST_PRESSURE = 1000.0


def lowest(fluid: Fluid) -> float:
    """Where the sweep begins [K]: -60 °C, a kelvin above a triple point, or where the dew pressure is 1 kPa."""
    start = max(COLDEST, fluid.minimum_temperature + (0.0 if fluid.refrigerant.is_blend else 1.0))
    while fluid.dew_at_temperature(start).pressure < LEAST_PRESSURE:
        start += 0.5
    return start


def highest(fluid: Fluid) -> float:
    """The last temperature at which saturation is offered [K]."""
    return fluid.critical_temperature - MARGIN


def spread(fluid: Fluid, count: int) -> list[float]:
    low, high = lowest(fluid), highest(fluid) - 0.5
    return [low + (high - low) * (i + 0.5) / count for i in range(count)] if high > low else []


def is_for_the_trade(one: Refrigerant) -> bool:
    """Whether it still has liquid at -50 °C, which the cryogenic fluids of the catalogue have not."""
    return one.critical_temperature > 223.15


TRADE = [one for one in MODELLED if is_for_the_trade(one)]


def test_the_sweep_has_no_holes() -> None:
    """Every half kelvin, both curves, every refrigerant: solved, rising, bubble pressure never below dew pressure."""
    points = 0
    for one in TRADE:
        fluid = open_fluid(one)
        temperature, before = lowest(fluid), (0.0, 0.0)
        while temperature <= highest(fluid):
            here = (fluid.bubble_at_temperature(temperature).pressure, fluid.dew_at_temperature(temperature).pressure)
            assert here[0] > before[0], (one.designation, temperature)
            assert here[1] > before[1], (one.designation, temperature)
            # At an azeotropic point the two meet; the solver stops at 1e-8.
            assert here[0] >= here[1] * (1 - 1e-7), (one.designation, temperature)
            before, points, temperature = here, points + 2, temperature + 0.5
    assert len(TRADE) >= 120
    assert points > 90_000


@pytest.mark.parametrize("one", TRADE, ids=lambda one: one.designation)
def test_both_phases_have_equal_fugacities(one: Refrigerant) -> None:
    fluid = open_fluid(one)
    model = fluid._model
    for temperature in spread(fluid, 6):
        for side, curve in ((BUBBLE, model.bubble), (DEW, model.dew)):
            point = curve.at_temperature(temperature)
            if model.blend:
                whole = model.liquid.whole
                model.liquid.compose(whole if side == BUBBLE else point.other)
                model.vapour.compose(point.other if side == BUBBLE else whole)
            model.liquid.at(point.liquid_density, temperature)
            model.vapour.at(point.vapour_density, temperature)
            # A liquid is so stiff that rounding of its density alone moves the pressure by 1e-13 of its stiffness.
            slack = 1e-11 * point.liquid_density * model.liquid.stiffness()
            assert model.liquid.state.p() == pytest.approx(point.pressure, rel=1e-7, abs=slack)
            assert model.vapour.state.p() == pytest.approx(point.pressure, rel=1e-7)
            if model.blend:
                pairs = zip(model.liquid.log_fugacities(), model.vapour.log_fugacities(), strict=True)
                assert max(abs(a - b) for a, b in pairs) < 2e-7
            else:
                gibbs = model.liquid.state.gibbsmolar() - model.vapour.state.gibbsmolar()
                assert abs(gibbs) < 1e-7 * model.liquid.gas_constant * temperature


@pytest.mark.parametrize("one", [one for one in TRADE if not one.is_blend], ids=lambda one: one.designation)
def test_slope_of_the_vapour_pressure_is_clapeyrons(one: Refrigerant) -> None:
    """dp/dT = h_fg / (T v_fg), Clapeyron."""
    fluid = open_fluid(one)
    for temperature in spread(fluid, 6):
        step = 0.01
        slope = (
            fluid.dew_at_temperature(temperature + step).pressure
            - fluid.dew_at_temperature(temperature - step).pressure
        ) / (2 * step)
        bubble, dew = fluid.bubble_at_temperature(temperature), fluid.dew_at_temperature(temperature)
        latent, swelling = dew.enthalpy - bubble.enthalpy, 1 / dew.density - 1 / bubble.density
        # The central difference over 0.02 K is good to a few 1e-7; 5e-7 beside the critical point.
        assert latent / (temperature * swelling) == pytest.approx(slope, rel=2e-6)
        # Equal Gibbs energies: h_fg = T s_fg.
        assert latent == pytest.approx(temperature * (dew.entropy - bubble.entropy), rel=1e-7)


@pytest.mark.parametrize("one", TRADE, ids=lambda one: one.designation)
def test_enthalpy_follows_entropy_and_pressure(one: Refrigerant) -> None:
    """dh = T ds + v dp along short paths in vapour, liquid and between bubble and dew (Gibbs)."""
    fluid = open_fluid(one)
    temperature = spread(fluid, 3)[1]
    dew, bubble = fluid.dew_at_temperature(temperature), fluid.bubble_at_temperature(temperature)
    step = 1e-4
    starts = [
        fluid.state_superheat(dew.pressure, 12.0),
        fluid.state_subcooling(bubble.pressure, 6.0),
        fluid.state_px(0.98 * bubble.pressure, 0.35),
    ]
    for start in starts:
        for heat, squeeze in ((200.0, 0.0), (100.0, step)):
            ends = [
                fluid.state_ph(start.pressure * (1 + sign * squeeze), start.enthalpy + sign * heat) for sign in (-1, 1)
            ]
            rise = ends[1].enthalpy - ends[0].enthalpy
            work = (ends[1].pressure - ends[0].pressure) / start.density
            warmth = start.temperature * (ends[1].entropy - ends[0].entropy)
            # Central differences; the sum is compared on the scale of its own parts.
            assert rise == pytest.approx(warmth + work, abs=2e-5 * (abs(warmth) + abs(work)))


@pytest.mark.parametrize("one", TRADE, ids=lambda one: one.designation)
def test_the_critical_point_carried_as_data_is_where_the_curves_meet(one: Refrigerant) -> None:
    """See tests/tools/critical_points.py, which finds it; this asks the two curves below it."""
    fluid = open_fluid(one)
    critical = fluid.critical_temperature
    near, far = fluid._model.bubble.at_temperature(critical - 3.0), fluid._model.bubble.at_temperature(critical - 6.0)
    dew = fluid._model.dew.at_temperature(critical - 3.0)
    slope = math.log(near.pressure / far.pressure) / 3.0
    # The vapour pressure runs nearly straight there, in the logarithm. Bubble pressures of blends with carbon
    # dioxide level off before the critical point, by up to 5 % within 3 K.
    assert math.log(fluid.critical_pressure / near.pressure) == pytest.approx(3.0 * slope, abs=0.05)
    # Liquid and vapour are on their way to one density ...
    assert 1.0 < near.liquid_density / near.vapour_density < far.liquid_density / far.vapour_density < 4.5
    # ... and bubble and dew to one pressure.
    assert dew.pressure <= near.pressure * (1 + 1e-7)
    assert fluid.critical_pressure > dew.pressure


@pytest.mark.parametrize("designation", ["R-404A", "R-407C", "R-410A", "R-454B", "R-455A", "R-507A", "R-513B"])
def test_the_library_finds_the_same_critical_point(designation: str) -> None:
    """Its own search, for blends of few components, where it takes tenths of a second and not half a minute."""
    one = find(designation)
    fractions = None if one.library_fluid.endswith(".mix") else [share for _, share in one.composition]
    points = library.open_state(one.library_fluid, fractions).all_critical_points()
    found = max((p.T, p.p) for p in points if p.stable)
    # The catalogue carries three decimals of a kelvin and whole pascals.
    assert found == pytest.approx((one.critical_temperature, one.critical_pressure), rel=5e-6)


@pytest.mark.parametrize("one", TRADE, ids=lambda one: one.designation)
def test_beside_the_critical_point_a_sentence_and_no_number(one: Refrigerant) -> None:
    fluid = open_fluid(one)
    for temperature in (fluid.critical_temperature - 0.5, fluid.critical_temperature - 0.01):
        for saturated in (fluid.bubble_at_temperature, fluid.dew_at_temperature):
            with pytest.raises(OutOfRange, match="too near the critical point"):
                saturated(temperature)
    with pytest.raises(OutOfRange, match="no saturation above its critical point"):
        fluid.bubble_at_temperature(fluid.critical_temperature + 1.0)
