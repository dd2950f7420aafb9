"""The secondary side against published tables, worked examples, other equations and another library."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from iapws import IAPWS95, IAPWS97

from gaugeside.checks.sheet import Surroundings
from gaugeside.checks.stream import Findings, Readings, run
from gaugeside.quantities import SEA_LEVEL
from gaugeside.refrigerants import Datum
from gaugeside.refrigerants.secondary import Liquid, MoistAir, find_medium
from reference.tables import rows

ATMOSPHERE = 101325.0
ZERO = 273.15


def answered(**readings: object) -> Findings:
    outcome = run(Surroundings(Datum.IIR, SEA_LEVEL), replace(Readings(), **readings))
    assert outcome.unresolved is None
    found: Findings = outcome.findings
    return found


# Water


@pytest.mark.parametrize(("inlet", "outlet"), [(1, 3), (15, 25), (40, 90), (5, 99)])
def test_water_duty_is_that_of_an_independent_library(inlet: float, outlet: float) -> None:
    found = answered(medium="water", inlet=ZERO + inlet, outlet=ZERO + outlet, flow={"mass flow": 2.0})
    megapascal = ATMOSPHERE / 1e6
    scientific = [IAPWS95(T=ZERO + t, P=megapascal).h * 1e3 for t in (inlet, outlet)]
    industrial = [IAPWS97(T=ZERO + t, P=megapascal).h * 1e3 for t in (inlet, outlet)]
    # The same equation in other code.
    assert found.heat_absorbed == pytest.approx(2.0 * (scientific[1] - scientific[0]), rel=1e-8)
    # Another equation: IF97 approximates IAPWS-95 to a few hundredths of a per cent in such differences.
    assert found.heat_absorbed == pytest.approx(2.0 * (industrial[1] - industrial[0]), rel=5e-4)
    assert found.inlet_density == pytest.approx(IAPWS97(T=ZERO + inlet, P=megapascal).rho, rel=5e-5)


def test_water_cools_a_condenser_as_in_the_textbook() -> None:
    """Cengel & Boles, Thermodynamics, example 5-12, from memory: 1218 kJ/min warm 29.1 kg/min from 15 to 25 °C."""
    found = answered(medium="water", inlet=ZERO + 15, outlet=ZERO + 25, heat=1218e3 / 60)
    # Printed to three figures.
    assert found.mass_flow * 60 == pytest.approx(29.1, abs=0.05)


def test_water_duty_by_hand() -> None:
    """m cp dT with cp = 4.18 kJ/(kg K), Cengel & Boles table A-3 (25 °C), from memory."""
    found = answered(medium="water", inlet=ZERO + 12, outlet=ZERO + 7, flow={"mass flow": 0.5})
    # Over 7 to 12 °C the heat capacity is 4.19 to 4.20, half a per cent above the table's.
    assert found.heat_rejected == pytest.approx(0.5 * 4180 * 5, rel=6e-3)


# Solutions

# Largest distance from the published freezing point [K]. The correlation was fitted to other measurements than the
# handbooks', which are printed to 0.1 K and scatter among themselves; what was measured is rounded up. All lie well
# inside the 3 K within which the program warns.
FREEZING_TOLERANCES = {
    "sodium chloride": 0.15,
    "methanol": 0.3,
    "propylene glycol": 0.6,
    "calcium chloride": 1.1,
    "ethanol": 1.2,
    "glycerol": 1.3,
    "magnesium chloride": 1.4,
    "ethylene glycol": 1.6,
}


@pytest.mark.parametrize(
    "row", rows("freezing_points.csv"), ids=lambda row: f"{row['substance']} {row['percent_by_mass']} %"
)
def test_freezing_points_are_the_published_ones(row: dict[str, str]) -> None:
    liquid = Liquid(find_medium(f"{row['substance']} {row['percent_by_mass']} %"), ATMOSPHERE)
    assert liquid.freezing is not None
    assert liquid.freezing - ZERO == pytest.approx(float(row["freezing_C"]), abs=FREEZING_TOLERANCES[row["substance"]])


# Density of the pure glycols at 20 °C [kg/m3], CRC Handbook of Chemistry and Physics, from memory.
GLYCOL_DENSITY = {"ethylene glycol": 1113.2, "propylene glycol": 1036.1}


@pytest.mark.parametrize(
    "row",
    rows("glycols_by_volume.csv"),
    ids=lambda row: f"{row['substance']} {row['percent_by_volume']} vol % {row['temperature_C']} C",
)
def test_glycols_hold_the_heat_of_the_handbook(row: dict[str, str]) -> None:
    share = float(row["percent_by_volume"]) / 100
    heavy = GLYCOL_DENSITY[row["substance"]]
    by_mass = share * heavy / (share * heavy + (1 - share) * 998.2)
    liquid = Liquid(find_medium(f"{row['substance']} {100 * by_mass:.4f} %"), ATMOSPHERE)
    temperature = ZERO + float(row["temperature_C"])
    # The handbook's solutions are inhibited; their figures differ from the pure glycol's by up to 1.5 %.
    assert liquid.heat_capacity(temperature) == pytest.approx(float(row["heat_capacity_J_kgK"]), rel=0.017)
    assert liquid.density(temperature) == pytest.approx(float(row["density_kg_m3"]), rel=0.007)


@pytest.mark.parametrize(
    ("medium", "temperature", "gravity", "water"),
    [
        # Specific gravities of Lange's Handbook, table 5.13, at the temperature given, over water there.
        ("sodium chloride 20 %", 15.0, 1.152, 999.1),
        ("sodium chloride 15 %", 15.0, 1.112, 999.1),
        ("magnesium chloride 10 %", 15.6, 1.086, 999.0),
        ("magnesium chloride 20 %", 15.6, 1.180, 999.0),
        ("glycerol 30 %", 20.0, 1.07470, 998.2),
        ("glycerol 50 %", 20.0, 1.12845, 998.2),
    ],
)
def test_densities_are_the_published_ones(medium: str, temperature: float, gravity: float, water: float) -> None:
    # Printed to a thousandth, and the correlation is fitted to half a per cent.
    assert Liquid(find_medium(medium), ATMOSPHERE).density(ZERO + temperature) == pytest.approx(
        gravity * water, rel=5e-3
    )


@pytest.mark.parametrize("medium", ["propylene glycol 30 %", "calcium chloride 25 %", "potassium formate 40 %"])
def test_enthalpy_differences_are_the_integral_of_the_heat_capacity(medium: str) -> None:
    liquid = Liquid(find_medium(medium), ATMOSPHERE)
    low, high, count = ZERO - 8, ZERO + 30, 64
    step = (high - low) / count
    weights = [1 if i in (0, count) else 4 if i % 2 else 2 for i in range(count + 1)]
    simpson = step / 3 * sum(w * liquid.heat_capacity(low + i * step) for i, w in enumerate(weights))
    # Simpson's rule is exact for the cubic that the heat capacity is; what remains is the pressure's share of the
    # enthalpy, p (v - T dv/dT), some 6 J/kg over this range at one atmosphere.
    assert liquid.enthalpy(high) - liquid.enthalpy(low) == pytest.approx(simpson, rel=1e-4)


# Moist air


def saturation_pressure(temperature: float) -> float:
    """Saturation pressure of water [Pa] over ice or liquid.

    Source: Hyland and Wexler 1983, as equations 5 and 6 of chapter 1, ASHRAE Handbook Fundamentals; from memory.
    """
    t = temperature
    if t < ZERO:
        return math.exp(
            -5.6745359e3 / t
            + 6.3925247
            - 9.677843e-3 * t
            + 6.2215701e-7 * t**2
            + 2.0747825e-9 * t**3
            - 9.484024e-13 * t**4
            + 4.1635019 * math.log(t)
        )
    return math.exp(
        -5.8002206e3 / t
        + 1.3914993
        - 4.8640239e-2 * t
        + 4.1764768e-5 * t**2
        - 1.4452093e-8 * t**3
        + 6.5459673 * math.log(t)
    )


def perfect_gas(temperature: float, relative_humidity: float, pressure: float = ATMOSPHERE) -> tuple[float, float]:
    """Humidity ratio [kg/kg] and enthalpy [J/kg dry air] of perfect gases.

    Source: equations 20 and 30 of the same chapter; from memory.
    """
    vapour = relative_humidity * saturation_pressure(temperature)
    ratio = 0.621945 * vapour / (pressure - vapour)
    celsius = temperature - ZERO
    return ratio, 1e3 * (1.006 * celsius + ratio * (2501 + 1.86 * celsius))


@pytest.mark.parametrize("row", rows("saturated_air.csv"), ids=lambda row: f"{row['temperature_C']} C")
def test_saturated_air_is_that_of_the_handbook(row: dict[str, str]) -> None:
    air = MoistAir(ATMOSPHERE)
    temperature = ZERO + float(row["temperature_C"])
    ratio = air.saturated_ratio(temperature)
    # Half a digit of the table's last place at 0 °C, where ice and liquid meet, 0.03 %; else a ten-thousandth.
    assert ratio == pytest.approx(float(row["humidity_ratio"]), rel=4e-4)
    # Printed to a thousandth; the 1997 edition rests on the equation before.
    assert air.enthalpy(temperature, ratio) / 1e3 == pytest.approx(float(row["enthalpy_kJ_kg"]), abs=0.006)


@pytest.mark.parametrize("temperature", [-15.0, -2.0, 5.0, 20.0, 35.0])
@pytest.mark.parametrize("humidity", [0.3, 0.9])
def test_moist_air_is_near_the_perfect_gas(temperature: float, humidity: float) -> None:
    air = MoistAir(ATMOSPHERE)
    ratio = air.ratio_at_humidity(ZERO + temperature, humidity)
    by_hand, enthalpy = perfect_gas(ZERO + temperature, humidity)
    # Perfect gases neglect the enhancement factor, 1.004 at one atmosphere: within 0.7 % (the handbook's own figure).
    assert ratio == pytest.approx(by_hand, rel=7e-3)
    assert air.enthalpy(ZERO + temperature, ratio) == pytest.approx(enthalpy, rel=7e-3, abs=60)


def test_wet_bulb_example_of_the_handbook() -> None:
    """Dry bulb 40, wet bulb 20 °C at 101.325 kPa: W 0.0065, 14 %, 56.7 kJ/kg, 0.896 m3/kg, dew point 7 °C.

    Source: ASHRAE Handbook Fundamentals 2017, chapter 1, example 1, read off the chart: hence its tolerances.
    """
    air = MoistAir(ATMOSPHERE)
    temperature = ZERO + 40
    ratio = air.ratio_at_wet_bulb(temperature, ZERO + 20, "inlet")
    assert ratio == pytest.approx(0.0065, abs=0.0001)
    assert air.relative_humidity(temperature, ratio) == pytest.approx(0.14, abs=0.005)
    assert air.enthalpy(temperature, ratio) / 1e3 == pytest.approx(56.7, abs=0.2)
    assert air.volume(temperature, ratio) == pytest.approx(0.896, abs=0.001)
    dew_point = air.dew_point(temperature, ratio)
    assert dew_point is not None
    assert dew_point - ZERO == pytest.approx(7.0, abs=0.5)


def test_cooling_coil_of_the_handbook() -> None:
    """Air at 30 °C and 50 %, 5 m3/s, leaves a coil saturated at 10 °C: 5.70 kg/s of dry air give off 197 kW.

    Source: ASHRAE Handbook Fundamentals, chapter on psychrometrics, example of cooling and dehumidification, with
    W 0.0133 and 0.0077 read off the chart; from memory.
    """
    found = answered(
        medium="air", inlet=ZERO + 30, outlet=ZERO + 10, flow={"volume flow": 5.0}, inlet_relative_humidity=0.5,
        outlet_relative_humidity=1.0,
    )  # fmt: skip
    assert found.dry_air_flow == pytest.approx(5.70, rel=3e-3)
    # The chart's enthalpies are read to 0.1 kJ/kg each, 0.6 % of their difference.
    assert found.heat_rejected == pytest.approx(197e3, rel=7e-3)
    assert found.condensate_flow == pytest.approx(5.70 * (0.0133 - 0.0077), rel=0.02)
