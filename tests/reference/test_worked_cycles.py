"""Worked energy balances from textbooks and tables, recomputed through the states."""

from __future__ import annotations

import pytest

from gaugeside.refrigerants import Datum, find, open_fluid

ZERO = 273.15
R134A = open_fluid(find("R-134a"), Datum.ASHRAE)


def test_ideal_cycle_with_r134a() -> None:
    """Cengel and Boles, Thermodynamics, table values: 0.14 and 0.80 MPa, 0.05 kg/s."""
    suction = R134A.dew_at_pressure(0.14e6)
    discharge = R134A.state_ps(0.80e6, suction.entropy)
    liquid = R134A.bubble_at_pressure(0.80e6)
    # The book's tables come from an equation of state whose enthalpies differ by up to 0.15 kJ/kg.
    assert suction.enthalpy / 1e3 == pytest.approx(239.16, abs=0.5)
    assert discharge.enthalpy / 1e3 == pytest.approx(275.39, abs=0.5)
    assert liquid.enthalpy / 1e3 == pytest.approx(95.47, abs=0.5)
    flow = 0.05
    absorbed = flow * (suction.enthalpy - liquid.enthalpy)
    power = flow * (discharge.enthalpy - suction.enthalpy)
    rejected = flow * (discharge.enthalpy - liquid.enthalpy)
    # Printed to 0.01 kW, enthalpies to 0.01 kJ/kg.
    assert absorbed / 1e3 == pytest.approx(7.18, abs=0.01)
    assert power / 1e3 == pytest.approx(1.81, abs=0.01)
    assert rejected / 1e3 == pytest.approx(9.00, abs=0.012)
    assert absorbed / power == pytest.approx(3.97, abs=0.01)


def test_throttling_of_r134a() -> None:
    """Cengel and Boles, table values: saturated liquid at 0.80 MPa to 0.12 MPa."""
    before = R134A.bubble_at_pressure(0.80e6)
    after = R134A.state_ph(0.12e6, before.enthalpy)
    assert after.vapour_fraction == pytest.approx(0.340, abs=0.001)
    # Two saturation temperatures printed to 0.01 K from an older equation of state.
    assert before.temperature - ZERO == pytest.approx(31.31, abs=0.03)
    assert after.temperature - ZERO == pytest.approx(-22.32, abs=0.03)


def test_two_stages_with_flash_chamber() -> None:
    """Cengel and Boles, table values: 0.14, 0.32 and 0.80 MPa."""
    high, middle, low = 0.80e6, 0.32e6, 0.14e6
    liquid, suction = R134A.bubble_at_pressure(high), R134A.dew_at_pressure(low)
    chamber = R134A.state_ph(middle, liquid.enthalpy)
    flashed = chamber.vapour_fraction
    assert flashed == pytest.approx(0.2049, abs=0.0005)
    first = R134A.state_ps(middle, suction.entropy)
    mixed = flashed * R134A.dew_at_pressure(middle).enthalpy + (1 - flashed) * first.enthalpy
    second = R134A.state_ps(high, R134A.state_ph(middle, mixed).entropy)
    assert second.enthalpy / 1e3 == pytest.approx(274.48, abs=0.5)
    cooling = (1 - flashed) * (suction.enthalpy - R134A.bubble_at_pressure(middle).enthalpy)
    work = (1 - flashed) * (first.enthalpy - suction.enthalpy) + second.enthalpy - mixed
    assert cooling / 1e3 == pytest.approx(146.3, abs=0.3)
    assert work / 1e3 == pytest.approx(32.71, abs=0.1)
    assert cooling / work == pytest.approx(4.47, abs=0.015)


def test_refrigerating_effect_of_r22() -> None:
    """R-22 at 7 and 32 °C, printed saturation pressures 621.22 and 1255.2 kPa; source not recorded."""
    fluid = open_fluid(find("R-22"))
    suction, liquid = fluid.dew_at_temperature(7 + ZERO), fluid.bubble_at_temperature(32 + ZERO)
    # An older equation of state: 0.15 % in pressure, 0.3 kJ/kg in enthalpy, 0.1 % in volume.
    assert suction.pressure / 1e3 == pytest.approx(621.22, rel=1.5e-3)
    assert liquid.pressure / 1e3 == pytest.approx(1255.2, rel=1.5e-3)
    assert (suction.enthalpy - liquid.enthalpy) / 1e3 == pytest.approx(168.6, abs=0.3)
    assert 1 / suction.density == pytest.approx(0.03798, rel=1e-3)


def test_cycles_of_r134a_from_memory() -> None:
    """From memory: Moran and Shapiro, examples 10.1 and 10.3; 0.08 kg/s."""
    flow, ton = 0.08, 3516.85284
    suction, liquid = R134A.dew_at_temperature(ZERO), R134A.bubble_at_temperature(26 + ZERO)
    discharge = R134A.state_ps(liquid.pressure, suction.entropy)
    power, cooling = flow * (discharge.enthalpy - suction.enthalpy), flow * (suction.enthalpy - liquid.enthalpy)
    # The book's table values differ by up to 1 % in the small difference that is the power.
    assert power / 1e3 == pytest.approx(1.4, abs=0.05)
    assert cooling / ton == pytest.approx(3.67, rel=0.01)
    assert cooling / power == pytest.approx(9.24, rel=0.01)

    suction, liquid = R134A.dew_at_temperature(ZERO - 10), R134A.state_pt(9e5, 30 + ZERO)
    ideal = R134A.state_ps(9e5, suction.entropy)
    power = flow * (ideal.enthalpy - suction.enthalpy) / 0.80
    cooling = flow * (suction.enthalpy - liquid.enthalpy)
    assert power / 1e3 == pytest.approx(3.1, abs=0.05)
    assert cooling / ton == pytest.approx(3.41, rel=0.01)
    assert cooling / power == pytest.approx(3.86, rel=0.01)
