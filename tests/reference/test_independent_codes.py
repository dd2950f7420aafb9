"""The same states by other people's code: teqp, PYroMat, iapws, and an older model of four blends."""

from __future__ import annotations

import json
import math
import warnings
from collections.abc import Iterator
from itertools import combinations
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import teqp

from gaugeside.refrigerants import Fluid, find, library, open_fluid
from gaugeside.refrigerants.solvers import BUBBLE, DEW

ZERO = 273.15
TEQP = Path(teqp.get_datapath())
PURES = (
    "R-22",
    "R-23",
    "R-32",
    "R-41",
    "R-123",
    "R-124",
    "R-125",
    "R-134a",
    "R-143a",
    "R-152a",
    "R-227ea",
    "R-236fa",
    "R-245fa",
    "R-1234ze(E)",
    "R-290",
    "R-600",
    "R-600a",
    "R-717",
    "R-744",
    "R-1270",
    "R-170",
)
HFC_BLENDS = ("R-404A", "R-407A", "R-407C", "R-407F", "R-410A", "R-507A")


def library_name(designation: str) -> str:
    return find(designation).library_fluid


def number(value: Any) -> float:
    """One number out of whatever array it comes wrapped in."""
    return float(np.ravel(value)[0])


def teqp_pressure(model: Any, temperature: float, density: float, fractions: Any) -> float:
    """p = rho R T (1 + delta d(alpha_r)/d(delta))."""
    return float(density * model.get_R(fractions) * temperature * (1 + model.get_Ar01(temperature, density, fractions)))


def teqp_residual_enthalpy(model: Any, temperature: float, density: float, fractions: Any) -> float:
    """h - h_ideal = R T (tau d(alpha_r)/d(tau) + delta d(alpha_r)/d(delta))."""
    sum_ = model.get_Ar10(temperature, density, fractions) + model.get_Ar01(temperature, density, fractions)
    return float(sum_ * model.get_R(fractions) * temperature)


@pytest.mark.parametrize("designation", PURES)
def test_pure_fluids_by_teqp(designation: str) -> None:
    fluid = open_fluid(find(designation))
    model = teqp.build_multifluid_model([library_name(designation)], str(TEQP))
    one = np.array([1.0])
    for part in (0.62, 0.75, 0.88, 0.97):
        temperature = max(part * fluid.critical_temperature, fluid.minimum_temperature + 1.0)
        bubble, dew = fluid.bubble_at_temperature(temperature), fluid.dew_at_temperature(temperature)
        mass = fluid._model.liquid.molar_mass
        # Started from half a per cent off, so that the other code must find the state by itself.
        liquid, vapour = model.pure_VLE_T(temperature, 1.005 * bubble.density / mass, 0.995 * dew.density / mass, 30)
        # The same equation of state in other code: differences are rounding and the gas constant.
        assert teqp_pressure(model, temperature, vapour, one) == pytest.approx(dew.pressure, rel=1e-8)
        assert liquid * mass == pytest.approx(bubble.density, rel=1e-8)
        latent = teqp_residual_enthalpy(model, temperature, vapour, one) - teqp_residual_enthalpy(
            model, temperature, liquid, one
        )
        assert latent / mass == pytest.approx(dew.enthalpy - bubble.enthalpy, rel=1e-7)


def rewritten_pairs(names: list[str]) -> list[dict[str, Any]]:
    """Mixing parameters of teqp's own data, the xi and zeta form (Lemmon and Jacobsen 2004) turned into beta and gamma.

    T_red = sum x_i T_i + x_i x_j xi and v_red = sum x_i v_i + x_i x_j zeta are the GERG rules with beta = 1 and
    gamma_T = (T_i + T_j + xi) / (2 sqrt(T_i T_j)), gamma_v = 4 (v_i + v_j + zeta) / (v_i^(1/3) + v_j^(1/3))^3.
    """
    reducing = {}
    for name in names:
        fluid = json.loads((TEQP / "dev/fluids" / f"{name}.json").read_text(encoding="utf-8"))
        states = fluid["EOS"][0]["STATES"]["reducing"]
        reducing[name] = (states["T"], 1.0 / states["rhomolar"])
    pairs = json.loads((TEQP / "dev/mixtures/mixture_binary_pairs.json").read_text(encoding="utf-8"))
    found = []
    for one, other in combinations(names, 2):
        pair = dict(next(p for p in pairs if {p["Name1"], p["Name2"]} == {one, other}))
        if "xi" in pair:
            (t1, v1), (t2, v2) = reducing[one], reducing[other]
            cubes = v1 ** (1 / 3) + v2 ** (1 / 3)
            gamma_t = (t1 + t2 + pair.pop("xi")) / (2 * math.sqrt(t1 * t2))
            gamma_v = 4 * (v1 + v2 + pair.pop("zeta")) / cubes**3
            pair |= {"betaT": 1.0, "gammaT": gamma_t, "betaV": 1.0, "gammaV": gamma_v}
        found.append(pair)
    return found


@pytest.mark.parametrize("designation", HFC_BLENDS)
def test_hfc_blends_by_teqp(designation: str, tmp_path: Path) -> None:
    fluid = open_fluid(find(designation))
    names = [library_name(name) for name, _ in find(designation).composition]
    order = library.open_state(library_name(designation)).fluid_names()
    whole = np.array(fluid._model.liquid.whole)[[list(order).index(name) for name in names]]
    file = tmp_path / "pairs.json"
    file.write_text(json.dumps(rewritten_pairs(names)), encoding="utf-8")
    model = teqp.build_multifluid_model(names, str(TEQP), str(file))
    for celsius in (-50.0, -25.0, 0.0, 25.0, 45.0, 55.0, 60.0):
        temperature = celsius + ZERO
        for side in (BUBBLE, DEW):
            pressure = teqp_saturation(model, fluid, side, temperature, whole, names, list(order))
            curve = fluid.bubble_at_temperature if side == BUBBLE else fluid.dew_at_temperature
            # Measured: 1.1e-6; the gas constants of the two codes differ in the seventh figure.
            assert pressure == pytest.approx(curve(temperature).pressure, rel=5e-6)


def teqp_saturation(
    model: Any, fluid: Fluid, side: int, temperature: float, whole: Any, names: list[str], order: list[str]
) -> float:
    """Bubble or dew pressure by Newton's method on teqp's fugacities, started a per cent off [Pa]."""
    point = (fluid._model.bubble if side == BUBBLE else fluid._model.dew).at_temperature(temperature)
    other = np.array(point.other)[[order.index(name) for name in names]]
    count = len(names)

    def residuals(unknowns: Any) -> Any:
        dense, thin, incipient = math.exp(unknowns[0]), math.exp(unknowns[1]), np.exp(unknowns[2:])
        x, y = (whole, incipient) if side == BUBBLE else (incipient, whole)
        liquid = np.log(model.get_fugacity_coefficients(temperature, dense * x / x.sum()))
        vapour = np.log(model.get_fugacity_coefficients(temperature, thin * y / y.sum()))
        low = teqp_pressure(model, temperature, dense, x / x.sum())
        high = teqp_pressure(model, temperature, thin, y / y.sum())
        equal = liquid + np.log(x * abs(low)) - vapour - np.log(y * high)
        return np.concatenate([equal, [(low - high) / high, incipient.sum() - 1.0]])

    unknowns = np.log([1.002 * point.liquid_density, 1.01 * point.vapour_density, *(1.01 * other)])
    for _ in range(12):
        here = residuals(unknowns)
        jacobian = np.empty((count + 2, count + 2))
        for i in range(count + 2):
            moved = unknowns.copy()
            moved[i] += 1e-7
            jacobian[:, i] = (residuals(moved) - here) / 1e-7
        unknowns -= np.linalg.solve(jacobian, here)
    assert np.abs(residuals(unknowns)).max() < 1e-8
    y = np.exp(unknowns[2:]) if side == BUBBLE else whole
    return teqp_pressure(model, temperature, math.exp(unknowns[1]), y / y.sum())


@pytest.mark.parametrize("blend", ["R-404A", "R-407C", "R-410A", "R-507A"])
def test_blends_against_the_older_pseudo_pure_equations(blend: str) -> None:
    """Lemmon, Pseudo-pure fluid equations of state for R-410A, R-404A, R-507A and R-407C (2003): another model."""
    fluid = open_fluid(find(blend))
    other = library.open_state(blend.replace("-", ""))
    for celsius in (-50.0, -30.0, 0.0, 30.0, 50.0):
        temperature = celsius + ZERO
        bubble, dew = fluid.bubble_at_temperature(temperature), fluid.dew_at_temperature(temperature)
        values = []
        for fraction, own in ((0.0, bubble), (1.0, dew)):
            other.update(library.TEMPERATURE_QUALITY, fraction, temperature)
            # Measured: up to 0.05 % in pressure below -40 °C, 0.02 % above; both fit the same measurements.
            assert own.pressure == pytest.approx(other.p(), rel=1e-3)
            values.append(other.hmass())
        assert dew.enthalpy - bubble.enthalpy == pytest.approx(values[1] - values[0], rel=2e-3)


@pytest.fixture(scope="module")
def pyromat() -> Iterator[Any]:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        import pyromat as pm

        pm.config["unit_energy"] = "J"
        pm.config["unit_pressure"] = "Pa"
        pm.config["unit_matter"] = "kg"
        yield pm


@pytest.mark.parametrize(
    ("designation", "name"), [("R-134a", "mp.C2H2F4"), ("R-1234ze(E)", "mp.C3H2F4_1"), ("R-744", "mp.CO2")]
)
def test_saturation_and_superheat_by_pyromat(designation: str, name: str, pyromat: Any) -> None:
    other = pyromat.get(name)
    fluid = open_fluid(find(designation))
    for temperature in (235.0, 255.0, 275.0, 295.0):
        bubble, dew = fluid.bubble_at_temperature(temperature), fluid.dew_at_temperature(temperature)
        # Its saturation line is an auxiliary equation, good to 0.014 %.
        assert number(other.ps(T=temperature)) == pytest.approx(dew.pressure, rel=2e-4)
        warm = fluid.state_superheat(dew.pressure, 25.0)
        far = fluid.state_pt(0.5 * dew.pressure, temperature + 60.0)
        values = [number(other.h(T=s.temperature, p=s.pressure)) for s in (warm, far)]
        assert values[1] - values[0] == pytest.approx(far.enthalpy - warm.enthalpy, rel=2e-4)
        cold = fluid.state_pt(2.0 * bubble.pressure, temperature - 10.0)
        assert number(other.d(T=cold.temperature, p=cold.pressure)) == pytest.approx(cold.density, rel=2e-4)


def test_carbon_dioxide_past_its_critical_point_by_pyromat(pyromat: Any) -> None:
    other, fluid = pyromat.get("mp.CO2"), open_fluid(find("R-744"))
    start = fluid.state_pt(100e5, 380.0)
    first = number(other.h(T=380.0, p=100e5))
    for pressure, temperature in ((100e5, 308.15), (90e5, 313.15), (120e5, 303.15), (85e5, 350.0), (75e5, 320.0)):
        state = fluid.state_pt(pressure, temperature)
        difference = number(other.h(T=temperature, p=pressure)) - first
        # Both use Span and Wagner (1996); what differs is how many terms each keeps beside the critical point.
        assert state.enthalpy - start.enthalpy == pytest.approx(difference, rel=1e-3)
        assert number(other.d(T=temperature, p=pressure)) == pytest.approx(state.density, rel=2e-3)


def test_water_by_iapws() -> None:
    from iapws import IAPWS95, IAPWS97

    fluid = open_fluid(find("R-718"))
    for temperature in (280.0, 300.0, 373.15, 450.0):
        bubble, dew = fluid.bubble_at_temperature(temperature), fluid.dew_at_temperature(temperature)
        liquid, vapour = IAPWS95(T=temperature, x=0), IAPWS95(T=temperature, x=1)
        # The same formulation; iapws solves it to about 1e-6.
        megapascal = 1e-6
        assert pytest.approx(megapascal * bubble.pressure, rel=1e-5) == liquid.P
        assert vapour.rho == pytest.approx(dew.density, rel=1e-5)
        assert (vapour.h - liquid.h) * 1e3 == pytest.approx(dew.enthalpy - bubble.enthalpy, rel=1e-5)
        # The industrial formulation agrees with the scientific one within 0.03 % in saturation pressure.
        industrial = IAPWS97(T=temperature, x=0)
        assert pytest.approx(megapascal * bubble.pressure, rel=4e-4) == industrial.P
