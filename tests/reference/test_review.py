"""Findings and sentences against plain calls of the property library and calculations by hand."""

from __future__ import annotations

import pytest
from CoolProp.CoolProp import PropsSI

from gaugeside.checks.perform import perform, request
from gaugeside.checks.sheet import Answer
from gaugeside.quantities import SEA_LEVEL, Dress, Kind, unit, write
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
    assert found.remarks["motor_efficiency"].text == "above 100 % cannot be"
    assert [remark.text for remark in found.cautions] == ["Motor efficiency above 100 %: a reading is wrong."]


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
    said_of_suction = next(note.text for note in found.cautions if note.text.startswith("Suction"))
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


# An invented R-134a machine: 2.0 and 10.1 bar abs, saturated at -10.08 and 39.8 °C.
MACHINE = {
    "suction_pressure": "2.0 bar abs", "suction_temperature": "0 C", "discharge_pressure": "10.1 bar abs",
    "discharge_temperature": "68 C", "liquid_temperature": "33 C",
}  # fmt: skip


def test_suction_colder_than_its_dew_point_gives_no_heats() -> None:
    """Pressure and temperature alone would make the suction gas a liquid and the heat absorbed negative."""
    found = ask("machine", "R-134a", **{**MACHINE, "suction_temperature": "-11 C"}, heat_rejected="17 kW")
    dew = PropsSI("T", "P", 2e5, "Q", 1, "R134a")
    assert number(found, "superheat") == pytest.approx(262.15 - dew, abs=1e-6)
    assert {"heat_absorbed", "isentropic_efficiency", "volumetric_capacity"}.isdisjoint(found.findings)
    assert "suction pipe reads below the dew point" in said(found)
    assert "suction (vapour, not a pipe below the dew point)" in said(found)


def test_liquid_warmer_than_its_bubble_point_gives_no_heats() -> None:
    found = ask("machine", "R-134a", **{**MACHINE, "liquid_temperature": "42 C"}, mass_flow="0.14 kg/s")
    bubble = PropsSI("T", "P", 10.1e5, "Q", 0, "R134a")
    assert number(found, "subcooling") == pytest.approx(bubble - 315.15, abs=1e-6)
    assert {"heat_absorbed", "heat_rejected", "flash_fraction"}.isdisjoint(found.findings)
    work = 0.14 * (r134a("H", 10.1e5, 68) - r134a("H", 2e5, 0))
    assert number(found, "power_to_refrigerant") == pytest.approx(work, rel=1e-7)


def test_shell_loss_hides_the_isentropic_efficiency_of_the_machine_too() -> None:
    found = ask("machine", "R-134a", **MACHINE, electrical_power="8 kW", drive="hermetic", shell_loss="0.4 kW")
    assert "isentropic_efficiency" not in found.findings
    assert "the compression is not adiabatic" in said(found)
    flow = 7600 / (r134a("H", 10.1e5, 68) - r134a("H", 2e5, 0))
    assert number(found, "mass_flow") == pytest.approx(flow, rel=1e-7)


def test_limit_of_a_cascade_is_that_of_both_stages() -> None:
    """By hand: 80 kW at -25 °C to 25 °C take at least 80 kW x 50 / 248.15; both draw 20 + 25 kW."""
    below = {"heat_absorbed": 80e3, "heat_rejected": 100e3, "electrical_power": 20e3, "power_to_refrigerant": 20e3}
    asked = request(
        "machine",
        "R-717",
        {"suction_pressure": 2.9e5, "stage_below": below, "electrical_power": 25e3, "drive": "hermetic",
         "space_temperature": 248.15, "sink_temperature": 298.15},
        site=SEA_LEVEL,
        datum="iir",
        dress=Dress(),
    )  # fmt: skip
    found = Answer.from_plain(perform(asked)["answer"])
    assert number(found, "minimum_power") == pytest.approx(80e3 * 50 / 248.15, rel=1e-12)
    assert number(found, "overall_cop_refrigerator") == pytest.approx(80 / 45, rel=1e-12)
    assert number(found, "second_law_efficiency") == pytest.approx(80 / 45 * 50 / 248.15, rel=1e-12)
    # The upper refrigerant is warmer than the space, as it must be.
    assert "cooled space is not warmer" not in said(found)


def test_heat_gained_by_the_suction_line_is_no_cooling() -> None:
    """Heat rejected and power give what enters; evaporator and line share it by their enthalpy changes."""
    typed = {name: text for name, text in MACHINE.items() if name != "discharge_temperature"}
    found = ask(
        "machine", "R-134a", **typed, evaporator_outlet_temperature="-6 C", heat_rejected="30 kW",
        electrical_power="8 kW", drive="hermetic",
    )  # fmt: skip
    liquid, leaving, suction = r134a("H", 10.1e5, 33), r134a("H", 2e5, -6), r134a("H", 2e5, 0)
    assert number(found, "mass_flow") == pytest.approx(22e3 / (suction - liquid), rel=1e-7)
    assert number(found, "heat_absorbed") == pytest.approx(22e3 * (leaving - liquid) / (suction - liquid), rel=1e-7)


@pytest.mark.parametrize(
    ("value", "kind", "label", "text"),
    [
        (124.0, Kind.POWER, "kW", "0.124 kW"), (124.0, Kind.POWER, "hp", "0.166 hp"),
        (21400.0, Kind.POWER, "kW", "21.40 kW"), (20.98, Kind.POWER, "Btu/h", "71.6 Btu/h"),
        (0.00149, Kind.MASS_FLOW, "kg/s", "0.00149 kg/s"),
        (0.0001, Kind.MASS_FLOW, "kg/h", "0.360 kg/h"), (-0.0001, Kind.MASS_FLOW, "kg/h", "-0.360 kg/h"),
        (0.0, Kind.POWER, "kW", "0.00 kW"), (-0.0, Kind.POWER, "kW", "0.00 kW"), (1e-9, Kind.POWER, "kW", "0.00 kW"),
        (0.01 / 3600, Kind.VOLUME_FLOW, "m3/h", "0.0100 m3/h"),
    ],
)  # fmt: skip
def test_small_flows_and_powers_keep_three_digits(value: float, kind: Kind, label: str, text: str) -> None:
    """Factors of NIST SP 811 (2008), appendix B.8, by hand."""
    assert write(value, unit(kind, label), kind, SEA_LEVEL) == text


def test_a_refrigerant_without_a_safety_class_is_not_passed_over() -> None:
    """R-41 has no class in ASHRAE 34, and burns."""
    assert "R-41: no safety class is known here." in said(ask("saturation", "R-41", reading="10 bar abs"))
    assert "safety class" not in said(ask("saturation", "R-134a", reading="10 bar abs"))


def test_compressor_that_draws_below_the_atmosphere() -> None:
    typed = {"component": "compressor", "outlet": "6 bar abs, 60 C", "mass_flow": "0.01 kg/s"}
    assert "Suction is below the atmosphere" in said(ask("component", "R-600a", **typed, inlet="0.9 bar abs, 0 C"))
    assert "Suction is below the atmosphere" not in said(ask("component", "R-600a", **typed, inlet="1.1 bar abs, 0 C"))


def test_more_gas_than_the_displacement_holds_is_told() -> None:
    found = ask("machine", "R-134a", **MACHINE, mass_flow="0.14 kg/s", displacement="50 m3/h")
    share = 0.14 / (50 / 3600 * r134a("D", 2e5, 0))
    assert share > 1
    assert number(found, "volumetric_efficiency") == pytest.approx(share, rel=1e-7)
    assert "cannot be" in found.remarks["volumetric_efficiency"].text
