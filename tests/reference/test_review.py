"""Findings and sentences against plain calls of the property library and calculations by hand."""

from __future__ import annotations

import pytest
from CoolProp.CoolProp import PropsSI

from unit.check_tools import ask, number, refusal, said

ATMOSPHERE = 101325.0
DATUMS = ("iir", "ashrae", "nbp")


def r134a(output: str, pressure: float, celsius: float) -> float:
    return float(PropsSI(output, "P", pressure, "T", celsius + 273.15, "R134a"))


@pytest.mark.parametrize("datum", DATUMS)
def test_pump_inlet_follows_from_its_outlet(datum: str) -> None:
    """By hand: liquid hardly gives way, so its enthalpy rises by v dp / efficiency."""
    found = ask(
        "component", "R-717", datum=datum, component="pump", inlet="2 bar g", outlet="5 bar g, -12 C",
        isentropic_efficiency="60 %", mass_flow="1 kg/s",
    )  # fmt: skip
    density = PropsSI("D", "P", 2e5 + ATMOSPHERE, "T", 261.05, "Ammonia")
    # The density changes by less than 0.1 % on the way.
    assert number(found, "power_to_refrigerant") == pytest.approx(3e5 / density / 0.6, rel=2e-3)
    assert found.findings["inlet_region"] == "subcooled liquid"


def test_readings_that_disagree_are_told_with_their_sign() -> None:
    found = ask(
        "component", "R-134a", component="compressor", inlet="2 bar abs, 0 C", outlet="8 bar abs, 60 C",
        mass_flow="0.05 kg/s", electrical_power="3 kW", motor_efficiency="90 %", isentropic_efficiency="50 %",
    )  # fmt: skip
    first, second = r134a("H", 2e5, 0), r134a("H", 8e5, 60)
    ideal = PropsSI("H", "P", 8e5, "S", r134a("S", 2e5, 0), "R134a") - first
    electrical = 100 * (3000 * 0.9 / (0.05 * (second - first)) - 1)
    efficiency = 100 * (ideal / (second - first) / 0.5 - 1)
    assert electrical > 0
    assert efficiency > 0
    assert f"motor and drive efficiency is {electrical:+.1f} % off the power to the refrigerant" in said(found)
    assert f"the isentropic efficiency by the states is {efficiency:+.1f} % off the one typed" in said(found)


@pytest.mark.parametrize("datum", DATUMS)
def test_two_enthalpies_are_told_apart_without_the_datum(datum: str) -> None:
    refused = refusal(
        "component", "R-134a", datum=datum, component="expansion", inlet="8 bar abs, 25 C", outlet="2 bar abs, x 0.2"
    )
    apart = (PropsSI("H", "P", 2e5, "Q", 0.2, "R134a") - r134a("H", 8e5, 25)) / 1e3
    assert f"the outlet enthalpy typed is {apart:+.2f} kJ/kg off the inlet's" in refused.message


def test_liquid_suction_exchanger_with_both_sides_measured() -> None:
    found = ask(
        "component", "R-134a", component="liquid-suction", inlet="10 bar abs, 35 C", outlet="10 bar abs, 28 C",
        suction_inlet="2.5 bar abs, 0 C", suction_outlet="2.5 bar abs, 15 C", mass_flow="0.1 kg/s",
    )  # fmt: skip
    given = r134a("H", 10e5, 35) - r134a("H", 10e5, 28)
    taken = r134a("H", 2.5e5, 15) - r134a("H", 2.5e5, 0)
    assert found.unresolved is None
    assert number(found, "heat_exchanged") == pytest.approx(0.1 * given, rel=1e-6)
    assert number(found, "effectiveness") == pytest.approx(15 / 35, rel=1e-9)
    off = f"{100 * (taken / given - 1):+.1f} %"
    assert f"heat taken up by the suction gas is {off} off the heat given off by the liquid" in said(found)


def test_motor_above_one_is_not_blamed_on_the_shell() -> None:
    found = ask(
        "component", "R-134a", component="compressor", inlet="2 bar abs, 0 C", outlet="8 bar abs, 60 C",
        power="3 kW", electrical_power="2 kW",
    )  # fmt: skip
    assert number(found, "motor_efficiency") == pytest.approx(1.5, rel=1e-12)
    assert found.remarks["motor_efficiency"].text == "above 100 % cannot be: a reading is wrong"


def test_vacuum_at_the_suction_gauge_is_told_although_the_clamp_is_above_atmosphere() -> None:
    found = ask(
        "superheat",
        "R-134a",
        suction_pressure="-0.05 bar g",
        suction_pressure_drop="0.1 bar",
        suction_temperature="-15 C",
    )
    dew = PropsSI("T", "P", ATMOSPHERE + 5e3, "Q", 1, "R134a")
    assert number(found, "superheat") == pytest.approx(258.15 - dew, abs=1e-6)
    assert "Suction is below the atmosphere" in said(found)
    assert found.remarks["saturated_suction_temperature"].text == "at the pipe clamp"


def test_suction_above_the_critical_point_is_no_gas_cooler() -> None:
    found = ask("superheat", "R-744", suction_pressure="80 bar g", discharge_pressure="100 bar g")
    said_of_suction = next(note.text for note in found.notes if note.text.startswith("Suction"))
    assert "gas cooler" not in said_of_suction
    assert "no superheat" in said_of_suction


def test_a_fan_between_the_readings_is_part_of_the_sensible_heat() -> None:
    """By hand with the ideal-gas formulas of the ASHRAE Handbook, chapter on psychrometrics; within 1 % of real gas.

    27 °C with a wet bulb of 19.5 °C to 13 °C at 95 %, one cubic metre per second at the inlet.
    """
    found = ask(
        "stream", "", medium="air", inlet="27 C", inlet_wet_bulb="19.5 C", outlet="13 C",
        outlet_relative_humidity="95 %", flow="3600 m3/h", fan_or_pump_heat="1 kW",
    )  # fmt: skip
    # Saturation pressures of water at 19.5 and 13 °C [kPa], steam tables, from memory.
    bulb = 0.62198 * 2.2678 / (101.325 - 2.2678)
    entering = ((2501 - 2.326 * 19.5) * bulb - 1.006 * 7.5) / (2501 + 1.86 * 27 - 4.186 * 19.5)
    leaving = 0.62198 * 0.95 * 1.4981 / (101.325 - 0.95 * 1.4981)
    flow = 101.325 / (0.287042 * 300.15 * (1 + 1.607858 * entering))
    sensible = flow * (1.006 + 1.86 * leaving) * 14 + 1
    latent = flow * (entering - leaving) * (2501 + 1.86 * 27 - 4.186 * 13)
    assert number(found, "sensible_heat") / 1e3 == pytest.approx(sensible, rel=0.01)
    assert number(found, "latent_heat") / 1e3 == pytest.approx(latent, rel=0.02)
    whole = number(found, "sensible_heat") + number(found, "latent_heat")
    assert whole == pytest.approx(number(found, "heat_rejected"), rel=1e-12)
