"""Whole machines, throttling and compressor polynomials against published worked balances.

Sources stand beside each value. Tolerances are half a unit of the last published digit plus what the property tables
behind the publication differ from the equations used here; where that is more, the reason stands there.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from gaugeside.checks.compressor_map import CompressorMap, load_maps, polynomial
from gaugeside.checks.perform import perform, request
from gaugeside.quantities import SEA_LEVEL, Dress


def findings(check: str, refrigerant: str, compressor: CompressorMap | None = None, **values: object) -> dict:
    asked = request(check, refrigerant, values, site=SEA_LEVEL, datum="ashrae", dress=Dress(), compressor=compressor)
    reply = perform(asked)
    assert "answer" in reply, reply
    return reply["answer"]["findings"]


def test_throttling_of_r134a():
    # Cengel & Boles, Thermodynamics, tables, throttling from saturated liquid at 0.80 MPa to 0.12 MPa:
    # vapour fraction 0.340, temperature from 31.31 to -22.32 °C. The tables differ from the equation of state used
    # here by 0.02 K in saturation temperature.
    found = findings(
        "component",
        "R-134a",
        component="expansion",
        inlet={"pressure": 0.80e6, "vapour_fraction": 0.0},
        outlet={"pressure": 0.12e6},
    )
    assert found["outlet_vapour_fraction"] == pytest.approx(0.340, abs=0.0006)
    assert found["inlet_temperature"] == pytest.approx(273.15 + 31.31, abs=0.025)
    assert found["outlet_temperature"] == pytest.approx(273.15 - 22.32, abs=0.025)


def test_two_stages_with_a_flash_chamber():
    # Cengel & Boles, two-stage R-134a with flash chamber at 0.14/0.32/0.80 MPa, isentropic stages, per kilogram through
    # the condenser: flash fraction 0.2049, COP 4.47; the upper compressor draws from the mixture of the flash
    # vapour and the lower discharge (h = 255.1 in the publication's datum). Their enthalpies carry 0.01 kJ/kg.
    low = _isentropic_stage(0.14e6, 0.32e6)
    flash = findings(
        "component",
        "R-134a",
        component="expansion",
        inlet={"pressure": 0.80e6, "vapour_fraction": 0.0},
        outlet={"pressure": 0.32e6},
    )
    fraction = flash["outlet_vapour_fraction"]
    assert fraction == pytest.approx(0.2049, abs=0.0006)
    share = 1 - fraction
    lower = findings(
        "machine",
        "R-134a",
        suction_pressure=0.14e6,
        suction_temperature=low["inlet_temperature"],
        discharge_pressure=0.32e6,
        discharge_temperature=low["outlet_temperature"],
        liquid_pressure=0.32e6,
        liquid_temperature=_saturated(0.32e6),
        mass_flow=share,
    )
    assert lower["heat_absorbed"] / 1000 == pytest.approx(146.3, abs=0.3)
    mixed = _mixed_suction(share, low["outlet_enthalpy"])
    upper_stage = _isentropic_stage(0.32e6, 0.80e6, mixed)
    upper = findings(
        "machine",
        "R-134a",
        suction_pressure=0.32e6,
        suction_temperature=upper_stage["inlet_temperature"],
        discharge_pressure=0.80e6,
        discharge_temperature=upper_stage["outlet_temperature"],
        liquid_temperature=_saturated(0.80e6),
        stage_below={
            "heat_absorbed": lower["heat_absorbed"],
            "heat_rejected": lower["heat_rejected"],
            "power_to_refrigerant": lower["power_to_refrigerant"],
        },
    )
    # The heat balance of the two sheets must give the one kilogram through the condenser of the publication.
    assert upper["mass_flow"] == pytest.approx(1.0, abs=0.002)
    assert upper["overall_power"] / 1000 == pytest.approx(32.71, abs=0.15)
    assert upper["overall_cop_refrigerator"] == pytest.approx(4.47, abs=0.02)


def _isentropic_stage(suction: float, discharge: float, inlet: dict | None = None) -> dict:
    return findings(
        "component",
        "R-134a",
        component="compressor",
        inlet=inlet or {"pressure": suction, "vapour_fraction": 1.0},
        outlet={"pressure": discharge},
        isentropic_efficiency=1.0,
        mass_flow=1.0,
    )


def _saturated(pressure: float) -> float:
    return findings("saturation", "R-134a", reading={"pressure": pressure})["bubble_temperature"]


def _mixed_suction(share: float, low_discharge_enthalpy: float) -> dict:
    vapour = findings("saturation", "R-134a", reading={"pressure": 0.32e6})["vapour_enthalpy"]
    return {"pressure": 0.32e6, "enthalpy": share * low_discharge_enthalpy + (1 - share) * vapour}


@pytest.mark.parametrize(
    ("sink", "space", "reversible"),
    [
        (305.0, 260.0, 5.78),  # Carnot between 305 and 260 K; as heat pump 6.78: Cengel & Boles, reversed Carnot cycle
        (300.0, 270.0, 9.0),  # Carnot between 300 and 270 K, the same book
    ],
)
def test_reversible_limit(sink: float, space: float, reversible: float):
    found = findings(
        "machine", "R-134a", space_temperature=space, sink_temperature=sink, heat_absorbed=1130e3 / 60,
        heat_rejected=30e3,
    )  # fmt: skip
    assert found["reversible_cop_refrigerator"] == pytest.approx(reversible, abs=0.005)
    if reversible == 9.0:
        # 1130 kJ/min absorbed need at least 2.1 kW.
        assert found["minimum_power"] / 1000 == pytest.approx(2.1, abs=0.05)


# A published ten-coefficient mass flow polynomial, dew temperatures in °F, result in lb/h.
_MASS_FLOW = (
    217.3163128, 5.094492028, -0.593170311, 4.38e-02, -2.14e-02, 1.04e-02, 7.90e-05, -5.73e-05, 1.79e-04, -8.08e-05,
)  # fmt: skip


@pytest.mark.parametrize(
    ("suction", "discharge", "published"), [(45, 130, 459.4479), (20, 120, 273.7570), (40, 100, 436.9470)]
)
def test_ten_coefficient_polynomial(suction: float, discharge: float, published: float):
    # The coefficients carry three digits where printed so; the published results four decimals of those coefficients.
    assert polynomial(_MASS_FLOW, suction, discharge) == pytest.approx(published, abs=5e-4)


def test_polynomial_of_a_settings_file_gives_the_mass_flow(tmp_path: Path):
    text = f"""
["rack 2"]
refrigerant = "R-134a"
source = "invented for this test"
temperature = "°F"
mass_flow_unit = "lb/h"
mass_flow = {list(_MASS_FLOW)}
suction_range = [0, 55]
discharge_range = [90, 150]
"""
    (tmp_path / "compressors.toml").write_text(text, encoding="utf-8")
    maps, troubles = load_maps(tmp_path)
    assert troubles == []
    suction, discharge = ((f + 459.67) * 5 / 9 for f in (45, 130))
    pressures = [
        findings("saturation", "R-134a", reading={"temperature": kelvin})["dew_pressure"]
        for kelvin in (suction, discharge)
    ]
    found = findings(
        "machine", "R-134a", maps["rack 2"], suction_pressure=pressures[0], discharge_pressure=pressures[1]
    )
    # lb/h to kg/s: 1 lb = 0.45359237 kg (NIST SP 811).
    assert found["mass_flow"] == pytest.approx(459.4479 * 0.45359237 / 3600, rel=2e-6)


def test_polynomial_outside_its_range_and_with_warm_suction_gas():
    machine = CompressorMap(
        tag="rack 2",
        refrigerant="R-134a",
        source="",
        temperature="°F",
        mass_flow_unit="lb/h",
        power_unit="W",
        mass_flow=_MASS_FLOW,
        suction_range=(0.0, 40.0),
        rated_superheat=11.0,
    )
    dew = {}
    for name, fahrenheit in (("suction", 45), ("discharge", 130)):
        kelvin = (fahrenheit + 459.67) * 5 / 9
        dew[name] = findings("saturation", "R-134a", reading={"temperature": kelvin})
    asked = request(
        "machine",
        "R-134a",
        {
            "suction_pressure": dew["suction"]["dew_pressure"],
            "suction_temperature": dew["suction"]["dew_temperature"] + 22.0,
            "discharge_pressure": dew["discharge"]["dew_pressure"],
        },
        site=SEA_LEVEL,
        datum="iir",
        dress=Dress(),
        compressor=machine,
    )
    answered = perform(asked)["answer"]
    # 45 °F lies above the 40 °F at which the data end.
    assert any("outside the range of the polynomial" in text for text, _ in answered["cautions"])
    # Dabiri and Rice (1981): m = m_rated (1 + 0.75 (v_rated / v - 1)); 22 K of superheat against 11 K makes the gas
    # about 4.6 % lighter as a perfect gas at 280 K would (291.4/302.4 - 1 = -3.6 %, more for a real one).
    rated = 459.4479 * 0.45359237 / 3600
    lighter = answered["findings"]["mass_flow"] / rated - 1
    assert -0.75 * 0.06 < lighter < -0.75 * 0.036
