"""Every quantity of a component's balance, left blank in turn, comes back as it was: each way round, over refrigerants.

A case is solved once for its heat or power; then each reading that went in is left blank and must be found again from
the answer. No number here is the program's own: what is compared is what was put in.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gaugeside.checks.perform import perform, request
from gaugeside.quantities import SEA_LEVEL, Dress

REFRIGERANTS = ("R-134a", "R-717", "R-290", "R-410A", "R-407C", "R-448A", "R-454C")
PER_STATE = ("enthalpy", "temperature")


def found(refrigerant: str, **values: Any) -> dict[str, Any]:
    reply = perform(request("component", refrigerant, values, site=SEA_LEVEL, datum="iir", dress=Dress()))
    assert "answer" in reply, reply
    assert reply["answer"]["unresolved"] is None, reply["answer"]["unresolved"]
    return dict(reply["answer"]["findings"])


def saturated(refrigerant: str, temperature: float) -> float:
    values = {"reading": {"temperature": temperature}}
    reply = perform(request("saturation", refrigerant, values, site=SEA_LEVEL, datum="iir", dress=Dress()))
    return float(reply["answer"]["findings"]["dew_pressure"])


machines = st.fixed_dictionaries(
    {
        "refrigerant": st.sampled_from(REFRIGERANTS),
        "evaporating": st.floats(243.15, 278.15),
        "condensing": st.floats(298.15, 323.15),
        "superheat": st.floats(1.0, 20.0),
        "subcooling": st.floats(1.0, 15.0),
        "flow": st.floats(0.005, 5.0),
    }
)


def exchange(machine: Mapping[str, Any], component: str) -> dict[str, Any]:
    """Return the readings of a condenser or an evaporator."""
    low, high = (saturated(machine["refrigerant"], machine[name]) for name in ("evaporating", "condensing"))
    if component == "condenser":
        inlet = {"pressure": high, "superheat": machine["superheat"] + 25}
        outlet = {"pressure": high * 0.99, "subcooling": machine["subcooling"]}
    else:
        inlet = {"pressure": low * 1.02, "vapour_fraction": 0.25}
        outlet = {"pressure": low, "superheat": machine["superheat"]}
    return {"component": component, "inlet": inlet, "outlet": outlet, "mass_flow": machine["flow"]}


@settings(max_examples=40, deadline=None, derandomize=True)
@given(machine=machines, component=st.sampled_from(("condenser", "evaporator")))
def test_heat_exchangers(machine: dict[str, Any], component: str):
    refrigerant, readings = machine["refrigerant"], exchange(machine, component)
    first = found(refrigerant, **readings)
    heat = first["heat_rejected" if component == "condenser" else "heat_absorbed"]
    rise = first["outlet_enthalpy"] - first["inlet_enthalpy"]
    assert heat == pytest.approx(machine["flow"] * rise * (-1 if component == "condenser" else 1), rel=1e-9)
    back = found(refrigerant, **{**readings, "mass_flow": None, "heat": heat})
    assert back["mass_flow"] == pytest.approx(machine["flow"], rel=1e-9)
    for blank in ("inlet", "outlet"):
        pressure = {"pressure": readings[blank]["pressure"]}
        again = found(refrigerant, **{**readings, blank: pressure, "heat": heat})
        for name in PER_STATE:
            assert again[f"{blank}_{name}"] == pytest.approx(first[f"{blank}_{name}"], rel=1e-7), (blank, name)


@settings(max_examples=30, deadline=None, derandomize=True)
@given(
    machine=machines,
    efficiency=st.floats(0.4, 0.95),
    motor=st.floats(0.6, 0.97),
    filled=st.floats(0.4, 0.98),
)
def test_compressors(machine: dict[str, Any], efficiency: float, motor: float, filled: float):
    refrigerant = machine["refrigerant"]
    low, high = (saturated(refrigerant, machine[name]) for name in ("evaporating", "condensing"))
    inlet = {"pressure": low, "superheat": machine["superheat"]}
    first = found(
        refrigerant, component="compressor", inlet=inlet, outlet={"pressure": high}, mass_flow=machine["flow"],
        isentropic_efficiency=efficiency, motor_efficiency=motor, volumetric_efficiency=filled,
    )  # fmt: skip
    outlet = {"pressure": high, "enthalpy": first["outlet_enthalpy"]}
    base: dict[str, Any] = {"component": "compressor", "inlet": inlet, "outlet": outlet}
    assert found(refrigerant, **base, mass_flow=1.0)["isentropic_efficiency"] == pytest.approx(efficiency, rel=1e-7)
    by_power = found(refrigerant, **base, power=first["power_to_refrigerant"])
    assert by_power["mass_flow"] == pytest.approx(machine["flow"], rel=1e-9)
    by_meter = found(refrigerant, **base, electrical_power=first["electrical_power"], motor_efficiency=motor)
    assert by_meter["mass_flow"] == pytest.approx(machine["flow"], rel=1e-9)
    by_plate = found(refrigerant, **base, displacement=first["displacement"], volumetric_efficiency=filled)
    assert by_plate["mass_flow"] == pytest.approx(machine["flow"], rel=1e-9)
    unfilled = found(refrigerant, **base, mass_flow=machine["flow"], displacement=first["displacement"])
    assert unfilled["volumetric_efficiency"] == pytest.approx(filled, rel=1e-9)
    no_inlet = found(
        refrigerant, component="compressor", inlet={"pressure": low}, outlet=outlet, mass_flow=machine["flow"],
        power=first["power_to_refrigerant"],
    )  # fmt: skip
    assert no_inlet["inlet_temperature"] == pytest.approx(first["inlet_temperature"], abs=1e-3)
    no_inlet = found(
        refrigerant, component="compressor", inlet={"pressure": low}, outlet=outlet, mass_flow=machine["flow"],
        isentropic_efficiency=efficiency,
    )  # fmt: skip
    assert no_inlet["inlet_enthalpy"] == pytest.approx(first["inlet_enthalpy"], rel=1e-6)


@settings(max_examples=30, deadline=None, derandomize=True)
@given(machine=machines)
def test_liquid_suction_exchangers(machine: dict[str, Any]):
    refrigerant = machine["refrigerant"]
    low, high = (saturated(refrigerant, machine[name]) for name in ("evaporating", "condensing"))
    ends: dict[str, Any] = {
        "inlet": {"pressure": high, "subcooling": machine["subcooling"]},
        "suction_inlet": {"pressure": low, "superheat": machine["superheat"]},
        "suction_outlet": {"pressure": low, "superheat": machine["superheat"] + 8},
    }
    first = found(refrigerant, component="liquid-suction", **ends, outlet={"pressure": high}, mass_flow=machine["flow"])
    # What the liquid gives, the suction gas takes.
    given_off = first["inlet_enthalpy"] - first["outlet_enthalpy"]
    assert given_off == pytest.approx(first["suction_outlet_enthalpy"] - first["suction_inlet_enthalpy"], rel=1e-9)
    assert first["heat_exchanged"] == pytest.approx(machine["flow"] * given_off, rel=1e-9)
    whole = {**ends, "outlet": {"pressure": high, "enthalpy": first["outlet_enthalpy"]}}
    for blank in ends:
        again = found(
            refrigerant, component="liquid-suction", **{**whole, blank: {"pressure": whole[blank]["pressure"]}}
        )
        assert again[f"{blank}_enthalpy"] == pytest.approx(first[f"{blank}_enthalpy"], rel=1e-9), blank


def test_pump_head_is_the_pressure_rise_of_a_liquid_column():
    first = found(
        "R-717", component="pump", inlet={"pressure": 1.9e5, "subcooling": 2.0}, outlet={"pressure": 4.9e5},
        mass_flow=2.0, isentropic_efficiency=0.5,
    )  # fmt: skip
    # Ammonia at -22.6 °C weighs 669 kg/m3 (from memory of published tables, to 0.3 %): 3 bar / (669 * 9.80665).
    assert first["head"] == pytest.approx(3.0e5 / (669 * 9.80665), rel=0.01)
    # An incompressible liquid takes m dp / (rho eta).
    assert first["power_to_refrigerant"] == pytest.approx(2.0 * 3.0e5 / (669 * 0.5), rel=0.02)


def test_no_solution_is_refused_with_the_side_named():
    asked = request(
        "component",
        "R-134a",
        {
            "component": "condenser",
            "inlet": {"pressure": 10e5, "superheat": 20.0},
            "outlet": {"pressure": 10e5},
            "mass_flow": 0.001,
            "heat": 1e6,
        },
        site=SEA_LEVEL,
        datum="iir",
        dress=Dress(),
    )
    error = perform(asked)["error"]
    assert error["field"] == "outlet"
    assert "No outlet state fits" in error["message"]
