"""Worked energy balances of textbooks, typed into the checks as a person would type them."""

from __future__ import annotations

import pytest

from gaugeside.checks.sheet import Answer
from unit.check_tools import ask, number

TON = 12_000 * 1055.05585262 / 3600  # [W], NIST SP 811 (2008) B.8
ZERO = 273.15


def component(kind: str, refrigerant: str, **texts: str) -> Answer:
    """The textbooks of the R-134a examples count from saturated liquid at -40 °C."""
    return ask("component", refrigerant, datum="ashrae", component=kind, **texts)


class TestIdealCycleWithR134a:
    """Cengel and Boles, Thermodynamics, table values: 0.14 and 0.80 MPa, saturated vapour in, 0.05 kg/s.

    h1 239.16, h2 275.39, h3 95.47 kJ/kg; heat absorbed 7.18, power 1.81, heat rejected 9.00 kW, COP 3.97.
    The tables come from another equation of state: enthalpies may differ by 0.15 kJ/kg, and enthalpies and results
    are printed to half a hundredth.
    """

    def test_evaporator(self) -> None:
        found = component(
            "evaporator", "R-134a", inlet="0.14 MPa abs, h 95.47 kJ/kg", outlet="0.14 MPa abs, sat vapour",
            mass_flow="0.05 kg/s",
        )  # fmt: skip
        assert number(found, "outlet_enthalpy") == pytest.approx(239.16e3, abs=150)
        assert number(found, "heat_absorbed") == pytest.approx(7180, abs=5 + 0.05 * 150)

    def test_compressor(self) -> None:
        found = component(
            "compressor", "R-134a", inlet="0.14 MPa abs, sat vapour", outlet="0.8 MPa abs",
            isentropic_efficiency="100 %", mass_flow="0.05 kg/s",
        )  # fmt: skip
        assert number(found, "outlet_enthalpy") == pytest.approx(275.39e3, abs=150)
        assert number(found, "power_to_refrigerant") == pytest.approx(1810, abs=5 + 0.05 * 150)

    def test_efficiency_of_the_printed_outlet_state_is_one(self) -> None:
        found = component(
            "compressor", "R-134a", inlet="0.14 MPa abs, sat vapour", outlet="0.8 MPa abs, h 275.39 kJ/kg",
            mass_flow="0.05 kg/s",
        )  # fmt: skip
        # 0.15 kJ/kg on either end of a rise of 36.23 kJ/kg.
        assert number(found, "isentropic_efficiency") == pytest.approx(1.0, abs=0.3 / 36.23)

    def test_condenser(self) -> None:
        found = component(
            "condenser", "R-134a", inlet="0.8 MPa abs, h 275.39 kJ/kg", outlet="0.8 MPa abs, sat liquid",
            mass_flow="0.05 kg/s",
        )  # fmt: skip
        assert number(found, "outlet_enthalpy") == pytest.approx(95.47e3, abs=150)
        assert number(found, "heat_rejected") == pytest.approx(9000, abs=5 + 0.05 * 150)

    def test_coefficient_of_performance(self) -> None:
        low = component(
            "evaporator", "R-134a", inlet="0.14 MPa abs, h 95.47 kJ/kg", outlet="0.14 MPa abs, sat vapour",
            mass_flow="0.05 kg/s",
        )  # fmt: skip
        drive = component(
            "compressor", "R-134a", inlet="0.14 MPa abs, sat vapour", outlet="0.8 MPa abs",
            isentropic_efficiency="100 %", mass_flow="0.05 kg/s",
        )  # fmt: skip
        ratio = number(low, "heat_absorbed") / number(drive, "power_to_refrigerant")
        # 0.15 of 36.23 kJ/kg is 0.4 % of the power.
        assert ratio == pytest.approx(3.97, abs=0.005 + 0.004 * 3.97)


def test_throttling_of_r134a() -> None:
    """Cengel and Boles, table values: saturated liquid at 0.80 MPa to 0.12 MPa; x 0.340, 31.31 to -22.32 °C."""
    found = component("expansion", "R-134a", inlet="0.8 MPa abs, sat liquid", outlet="0.12 MPa abs")
    # Printed to half a thousandth; 0.15 of a latent heat of 214 kJ/kg is 0.0007.
    assert number(found, "outlet_vapour_fraction") == pytest.approx(0.340, abs=0.0012)
    # Printed to 0.01 K; the other equation of state differs by 0.02 K at these pressures.
    assert number(found, "inlet_temperature") - ZERO == pytest.approx(31.31, abs=0.025)
    assert number(found, "outlet_temperature") - ZERO == pytest.approx(-22.32, abs=0.025)
    assert found.findings["outlet_region"] == "saturated, two-phase"


class TestR22Between7And32:
    """A worked R-22 cycle at 7 and 32 °C: 621.22 and 1255.2 kPa, effect 168.6 kJ/kg, suction volume 0.03798 m3/kg.

    Its tables are older than the equation in use, which gives 168.36 kJ/kg and 0.03796 m3/kg: within 0.2 %.
    """

    @pytest.mark.parametrize(("temperature", "pressure"), [("7 C", 621.22e3), ("32 C", 1255.2e3)])
    def test_saturation_pressure(self, temperature: str, pressure: float) -> None:
        found = ask("saturation", "R-22", reading=temperature)
        # The two equations differ by 0.05 %, which is 0.02 K.
        assert number(found, "bubble_pressure") == pytest.approx(pressure, rel=6e-4)
        assert found.findings["dew_pressure"] == pytest.approx(found.findings["bubble_pressure"], rel=1e-9)

    def test_suction_volume(self) -> None:
        found = ask("saturation", "R-22", reading="7 C")
        assert 1 / number(found, "vapour_density") == pytest.approx(0.03798, rel=0.001)

    def test_refrigerating_effect(self) -> None:
        liquid = number(ask("saturation", "R-22", reading="32 C"), "liquid_enthalpy")
        found = ask(
            "component", "R-22", component="evaporator", inlet=f"621.22 kPa abs, h {liquid:.3f} J/kg",
            outlet="621.22 kPa abs, sat vapour", mass_flow="1 kg/s",
        )  # fmt: skip
        assert number(found, "heat_absorbed") == pytest.approx(168.6e3, rel=0.002)


class TestMoranAndShapiro:
    """Moran and Shapiro, Fundamentals of Engineering Thermodynamics, examples 10.1 and 10.3, figures from memory.

    R-134a, 0.08 kg/s. Printed to two or three digits, from tables that differ by 0.15 kJ/kg in enthalpy: at most
    0.7 % of a rise of 17 kJ/kg, and 1 % of what hangs on it.
    """

    @staticmethod
    def cycle(suction: str, discharge: str, liquid: str, efficiency: str) -> tuple[float, float]:
        """Return the heat absorbed and the power [W] of a cycle with saturated suction vapour."""
        before = component("expansion", "R-134a", inlet=liquid, outlet="-10 C")
        enthalpy = number(before, "inlet_enthalpy")
        low = component(
            "evaporator", "R-134a", inlet=f"{suction}, h {enthalpy:.3f} J/kg", outlet=f"{suction}, sat vapour",
            mass_flow="0.08 kg/s",
        )  # fmt: skip
        drive = component(
            "compressor", "R-134a", inlet=f"{suction}, sat vapour", outlet=discharge,
            isentropic_efficiency=efficiency, mass_flow="0.08 kg/s",
        )  # fmt: skip
        return number(low, "heat_absorbed"), number(drive, "power_to_refrigerant")

    @staticmethod
    def saturated(temperature: str) -> str:
        pressure = number(ask("saturation", "R-134a", reading=temperature), "dew_pressure")
        return f"{pressure:.4f} Pa abs"

    def test_ideal_cycle_between_0_and_26(self) -> None:
        low, high = self.saturated("0 C"), self.saturated("26 C")
        heat, power = self.cycle(low, high, f"{high}, sat liquid", "100 %")
        assert power == pytest.approx(1400, abs=50)
        assert heat / TON == pytest.approx(3.67, rel=0.01)
        assert heat / power == pytest.approx(9.24, rel=0.01)

    def test_cycle_with_an_efficiency_of_80_percent(self) -> None:
        heat, power = self.cycle(self.saturated("-10 C"), "9 bar abs", "9 bar abs, 30 C", "80 %")
        assert power == pytest.approx(3100, abs=50)
        assert heat / TON == pytest.approx(3.41, rel=0.01)
        assert heat / power == pytest.approx(3.86, rel=0.01)
