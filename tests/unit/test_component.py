"""One component's balance: what follows from what, both ways, and what is said when nothing can follow."""

from __future__ import annotations

import pytest

from gaugeside.checks.sheet import Answer
from gaugeside.checks.view import sentence
from gaugeside.quantities import SEA_LEVEL, Dress
from gaugeside.refrigerants import find, open_fluid
from unit.check_tools import ask, number, refusal, said

ENERGY = {
    "condenser": "heat_rejected",
    "gas-cooler": "heat_rejected",
    "evaporator": "heat_absorbed",
    "compressor": "power_to_refrigerant",
}
# An invented cold store and an invented transcritical machine; states by pressure and one more.
STATES = {
    "condenser": ("R-448A", "16 bar g, 75 C", "15.8 bar g, SC 4 K"),
    "gas-cooler": ("R-744", "95 bar g, 105 C", "94.6 bar g, 34 C"),
    "evaporator": ("R-454C", "2.1 bar g, x 0.27", "2 bar g, SH 6 K"),
    "compressor": ("R-134a", "2 bar g, 8 C", "9.1 bar g, 68 C"),
}


def component(kind: str, refrigerant: str, datum: str = "iir", **texts: str) -> Answer:
    return ask("component", refrigerant, datum=datum, component=kind, **texts)


def amount_of(kind: str) -> str:
    return "power" if kind == "compressor" else "heat"


@pytest.mark.parametrize("kind", STATES)
def test_energy_and_flow_follow_from_each_other(kind: str) -> None:
    refrigerant, inlet, outlet = STATES[kind]
    states = {"inlet": inlet, "outlet": outlet}
    by_flow = component(kind, refrigerant, **states, mass_flow="0.14 kg/s")
    energy = number(by_flow, ENERGY[kind])
    assert energy > 0
    gain = number(by_flow, "outlet_enthalpy") - number(by_flow, "inlet_enthalpy")
    assert energy == pytest.approx(0.14 * abs(gain), rel=1e-12)
    assert number(by_flow, "enthalpy_difference") == pytest.approx(gain, rel=1e-12)
    by_energy = component(kind, refrigerant, **states, **{amount_of(kind): f"{energy!r} W"})
    assert number(by_energy, "mass_flow") == pytest.approx(0.14, rel=1e-9)
    again = component(kind, refrigerant, **states, mass_flow=f"{number(by_energy, 'mass_flow')!r} kg/s")
    assert number(again, ENERGY[kind]) == pytest.approx(energy, rel=1e-9)


@pytest.mark.parametrize("wanted", ["inlet", "outlet"])
@pytest.mark.parametrize("kind", STATES)
def test_a_blank_state_is_solved_back(kind: str, wanted: str) -> None:
    refrigerant, inlet, outlet = STATES[kind]
    states = {"inlet": inlet, "outlet": outlet}
    whole = component(kind, refrigerant, **states, mass_flow="0.14 kg/s")
    energy = {amount_of(kind): f"{number(whole, ENERGY[kind])!r} W"}
    states[wanted] = states[wanted].split(",")[0]
    found = component(kind, refrigerant, **states, **energy, mass_flow="0.14 kg/s")
    for name in ("temperature", "enthalpy"):
        assert number(found, f"{wanted}_{name}") == pytest.approx(number(whole, f"{wanted}_{name}"), rel=1e-8)
    assert found.findings[f"{wanted}_region"] == whole.findings[f"{wanted}_region"]


def test_energy_of_a_cycle_closes() -> None:
    """What the condenser rejects is what the evaporator absorbs and the compressor puts in."""
    flow = {"mass_flow": "0.05 kg/s"}
    expanded = component("expansion", "R-134a", inlet="9 bar g, SC 5 K", outlet="2 bar g")
    wet = f"2 bar g, h {number(expanded, 'outlet_enthalpy')!r} J/kg"
    low = component("evaporator", "R-134a", inlet=wet, outlet="2 bar g, SH 6 K", **flow)
    drive = component("compressor", "R-134a", inlet="2 bar g, SH 6 K", outlet="9 bar g, 60 C", **flow)
    high = component("condenser", "R-134a", inlet="9 bar g, 60 C", outlet="9 bar g, SC 5 K", **flow)
    assert number(high, "heat_rejected") == pytest.approx(
        number(low, "heat_absorbed") + number(drive, "power_to_refrigerant"), rel=1e-9
    )


@pytest.mark.parametrize("kind", STATES)
def test_datum_moves_enthalpies_and_not_the_energy(kind: str) -> None:
    refrigerant, inlet, outlet = STATES[kind]
    found = [
        component(kind, refrigerant, datum, inlet=inlet, outlet=outlet, mass_flow="0.14 kg/s")
        for datum in ("iir", "ashrae")
    ]
    assert abs(number(found[0], "inlet_enthalpy") - number(found[1], "inlet_enthalpy")) > 1e4
    assert number(found[0], ENERGY[kind]) == pytest.approx(number(found[1], ENERGY[kind]), rel=1e-9)
    assert "Enthalpies: IIR" in said(found[0])
    assert "Enthalpies: ASHRAE" in said(found[1])


@pytest.mark.parametrize("refrigerant", ["R-134a", "R-448A", "R-717", "R-744"])
def test_expansion_keeps_the_enthalpy(refrigerant: str) -> None:
    found = component("expansion", refrigerant, inlet="20 bar g, SC 4 K", outlet="6 bar g")
    assert number(found, "outlet_enthalpy") == pytest.approx(number(found, "inlet_enthalpy"), rel=1e-9)
    assert found.findings["outlet_region"] == "saturated, two-phase"
    # By the lever rule between the saturation pane's own enthalpies, for what has one temperature at a pressure.
    fraction = number(found, "outlet_vapour_fraction")
    assert 0 < fraction < 1
    if refrigerant != "R-448A":
        there = ask("saturation", refrigerant, reading="6 bar g")
        liquid, latent = number(there, "liquid_enthalpy"), number(there, "latent_heat")
        assert fraction == pytest.approx((number(found, "inlet_enthalpy") - liquid) / latent, rel=1e-7)
        assert number(found, "outlet_temperature") == pytest.approx(number(there, "dew_temperature"), abs=1e-6)
    assert "Expansion at constant enthalpy" in said(found)


@pytest.mark.parametrize("refrigerant", ["R-134a", "R-454C"])
def test_expansion_to_a_temperature_and_back(refrigerant: str) -> None:
    found = component("expansion", refrigerant, inlet="14 bar g, SC 4 K", outlet="-10 C")
    assert number(found, "outlet_temperature") == pytest.approx(263.15, abs=1e-9)
    assert number(found, "outlet_enthalpy") == pytest.approx(number(found, "inlet_enthalpy"), rel=1e-7)
    fraction = number(found, "outlet_vapour_fraction")
    back = component("expansion", refrigerant, inlet="14 bar g", outlet=f"-10 C, x {fraction!r}")
    assert number(back, "inlet_temperature") == pytest.approx(number(found, "inlet_temperature"), abs=1e-3)


def test_expansion_that_does_not_expand_is_said() -> None:
    assert "nothing expands" in said(component("expansion", "R-134a", inlet="2 bar g, SC 4 K", outlet="9 bar g"))


@pytest.mark.parametrize("efficiency", [1.0, 0.7])
@pytest.mark.parametrize(
    ("refrigerant", "inlet", "outlet"),
    [("R-134a", "2 bar g, SH 8 K", "9 bar g"), ("R-448A", "2 bar g, SH 8 K", "16 bar g"),
     ("R-744", "26 bar g, SH 8 K", "90 bar g")],
)  # fmt: skip
def test_isentropic_efficiency_both_ways(refrigerant: str, inlet: str, outlet: str, efficiency: float) -> None:
    typed = {"inlet": inlet, "mass_flow": "0.05 kg/s"}
    found = component("compressor", refrigerant, **typed, outlet=outlet, isentropic_efficiency=f"{efficiency}")
    enthalpy = number(found, "outlet_enthalpy")
    back = component("compressor", refrigerant, **typed, outlet=f"{outlet}, h {enthalpy!r} J/kg")
    assert number(back, "isentropic_efficiency") == pytest.approx(efficiency, rel=1e-7)
    if efficiency == 1.0:
        fluid = open_fluid(find(refrigerant))
        entropies = [
            fluid.state_ph(number(found, f"{side}_pressure"), number(found, f"{side}_enthalpy")).entropy
            for side in ("inlet", "outlet")
        ]
        assert entropies[0] == pytest.approx(entropies[1], rel=1e-8)


def test_an_efficiency_above_one_is_said_to_be_impossible() -> None:
    found = component("compressor", "R-134a", inlet="2 bar g, SH 8 K", outlet="9 bar g, 41 C", mass_flow="0.05 kg/s")
    assert number(found, "isentropic_efficiency") > 1
    assert "above 100 % cannot be" in said(found)


def test_shell_loss_is_added_to_the_power_and_hides_the_efficiency() -> None:
    typed = {"inlet": "2 bar g, SH 8 K", "outlet": "9 bar g, 60 C", "mass_flow": "0.05 kg/s"}
    bare = component("compressor", "R-134a", **typed)
    lossy = component("compressor", "R-134a", **typed, heat="0.3 kW")
    assert number(lossy, "power_to_refrigerant") == pytest.approx(number(bare, "power_to_refrigerant") + 300, rel=1e-9)
    assert number(lossy, "heat_rejected") == 300
    assert "isentropic_efficiency" not in lossy.findings
    assert "No heat is lost from the compressor's shell" in said(bare)


@pytest.mark.parametrize(
    ("refrigerant", "state", "region"),
    [
        ("R-134a", "9 bar g, SC 4 K", "subcooled liquid"), ("R-134a", "9 bar g, sat liquid", "saturated liquid"),
        ("R-134a", "9 bar g, x 0.5", "saturated, two-phase"),
        ("R-134a", "9 bar g, sat vapour", "saturated vapour"),
        ("R-134a", "9 bar g, 68 C", "superheated vapour"), ("R-744", "90 bar g, 40 C", "supercritical fluid"),
        ("R-744", "90 bar g, 20 C", "liquid above critical"),
        ("R-454C", "9 bar g, 26 C", "saturated, two-phase"),
    ],
)  # fmt: skip
def test_region_of_a_state_is_said(refrigerant: str, state: str, region: str) -> None:
    found = component("evaporator", refrigerant, inlet=state, outlet=state, mass_flow="1 kg/s")
    assert found.findings["inlet_region"] == region
    assert ("inlet_vapour_fraction" in found.findings) == region.startswith("saturated")
    assert number(found, "heat_absorbed") == 0


@pytest.mark.parametrize(
    ("kind", "finding", "words"),
    [
        ("condenser", "heat_rejected", "ABSORBS heat, the wrong way round"),
        ("gas-cooler", "heat_rejected", "ABSORBS heat, the wrong way round"),
        ("evaporator", "heat_absorbed", "REJECTS heat, the wrong way round"),
        ("compressor", "power_to_refrigerant", "GIVES power, the wrong way round"),
    ],
)
def test_the_wrong_way_round_is_said_and_shown(kind: str, finding: str, words: str) -> None:
    refrigerant, inlet, outlet = STATES[kind]
    found = component(kind, refrigerant, inlet=outlet, outlet=inlet, mass_flow="0.14 kg/s")
    assert number(found, finding) < 0
    assert words in said(found)
    assert "Check which side is the inlet" in said(found)
    wanted = refusal("component", refrigerant, component=kind, inlet=outlet, outlet=inlet, **{amount_of(kind): "5 kW"})
    assert wanted.field == "outlet"
    assert "wrong way round" in wanted.message


@pytest.mark.parametrize(
    ("kind", "texts", "field", "words"),
    [
        ("", {}, "component", "No component is named"),
        ("co", {}, "component", "could be condenser or compressor"),
        ("boiler", {}, "component", "is not a choice here"),
        (
            "condenser", {"inlet": "9 bar g, 68 C", "outlet": "9 bar g, SC 4 K"}, "mass_flow",
            "2 are blank: mass flow and heat",
        ),
        ("condenser", {"inlet": "9 bar g, 68 C", "mass_flow": "1 kg/s"}, "heat", "2 are blank"),
        ("condenser", {}, "mass_flow", "4 are blank"),
        (
            "evaporator",
            {"inlet": "2 bar g, x 0.3", "outlet": "2 bar g, SH 5 K", "mass_flow": "1 kg/s", "heat": "5 kW"},
            "heat", "Nothing is left blank",
        ),
        ("expansion", {"outlet": "2 bar g"}, "inlet", "Neither side of the expansion device is a full state"),
        ("expansion", {"inlet": "9 bar g, SC 4 K"}, "outlet", "its pressure is not known"),
        ("expansion", {"inlet": "9 bar g, SC 4 K", "outlet": "2 bar g, x 0.9"}, "outlet", "Nothing is left blank"),
        ("expansion", {"inlet": "9 bar g, SC 4 K", "outlet": "80 C"}, "outlet", "is not wet"),
        (
            "compressor", {"inlet": "2 bar g, SH 5 K", "mass_flow": "1 kg/s", "power": "9 kW"}, "outlet",
            "pressure is not known",
        ),
        ("condenser", {"power": "5 kW"}, "power", "takes no power"),
        ("evaporator", {"power": "5 kW"}, "power", "The evaporator takes no power"),
        ("expansion", {"heat": "5 kW"}, "heat", "takes no heat"),
        ("condenser", {"inlet": "9 bar g, 68 C", "mass_flow": "-1 kg/s"}, "mass_flow", "typed with a minus"),
        ("condenser", {"inlet": "9 bar g, 68 C", "heat": "-5 kW"}, "heat", "which side is the inlet"),
        ("condenser", {"inlet": "9 bar g, 68 C", "mass_flow": "0 kg/s"}, "mass_flow", "zero"),
        ("condenser", {"inlet": "9 bar g, 68 C", "outlet": "9 bar g, SC 4 K", "heat": "0 kW"}, "heat", "zero"),
        (
            "condenser", {"inlet": "9 bar g, 68 C", "outlet": "9 bar g", "mass_flow": "1 g/s", "heat": "900 kW"},
            "outlet", "No outlet state fits",
        ),
        ("evaporator", {"inlet": "9 bar g, 68 K", "outlet": "9 bar g"}, "inlet", "below"),
    ],
)  # fmt: skip
def test_refusal_names_the_field_and_the_reason(kind: str, texts: dict[str, str], field: str, words: str) -> None:
    refused = refusal("component", "R-134a", component=kind, **texts)
    assert refused.field == field
    assert words in refused.message + refused.hint
    assert refused.hint


def test_pressure_and_temperature_on_the_dome_of_a_pure_refrigerant_ask_for_the_vapour_fraction() -> None:
    there = number(ask("saturation", "R-134a", reading="9 bar abs"), "dew_temperature")
    refused = refusal(
        "component", "R-134a", component="evaporator", inlet=f"9 bar abs, {there!r} K", outlet="9 bar abs, SH 5 K",
        mass_flow="1 kg/s",
    )  # fmt: skip
    assert refused.field == "inlet"
    assert "vapour fraction" in refused.sentence()


def test_a_heat_exchanger_takes_its_missing_pressure_from_the_other_side_and_says_so() -> None:
    whole = component("condenser", "R-134a", inlet="9 bar g, 68 C", outlet="9 bar g, SC 4 K", mass_flow="1 kg/s")
    half = component("condenser", "R-134a", inlet="9 bar g, 68 C", outlet="SC 4 K", mass_flow="1 kg/s")
    assert number(half, "heat_rejected") == number(whole, "heat_rejected")
    assert "outlet pressure is taken as the other side's: no pressure drop" in said(half)
    assert "no pressure drop" not in said(whole)


def test_a_blank_outlet_of_a_heat_exchanger_is_found_at_the_inlet_pressure() -> None:
    found = component("evaporator", "R-134a", inlet="2 bar g, x 0.3", mass_flow="0.05 kg/s", heat="7 kW")
    assert number(found, "outlet_pressure") == pytest.approx(number(found, "inlet_pressure"), rel=1e-12)
    assert number(found, "outlet_enthalpy") == pytest.approx(number(found, "inlet_enthalpy") + 7000 / 0.05, rel=1e-9)


def test_wet_vapour_into_a_compressor_is_said() -> None:
    found = component("compressor", "R-134a", inlet="2 bar g, x 0.95", outlet="9 bar g, 45 C", mass_flow="1 kg/s")
    assert "Wet vapour enters the compressor" in said(found)
    assert "kinetic and potential energy neglected" in said(found)


def test_a_machine_that_cannot_move_what_enters_it_is_said() -> None:
    pump = component("pump", "R-717", inlet="2 bar g, SH 8 K", outlet="11.2 bar g, 120 C", mass_flow="0.35 kg/s")
    assert "Gas enters the pump" in said(pump)
    compressor = component("compressor", "R-717", inlet="2 bar g, SC 8 K", outlet="9 bar g, 90 C", mass_flow="1 kg/s")
    assert "Liquid enters the compressor" in said(compressor)


def cautions(answer: Answer) -> list[str]:
    return [sentence(remark, Dress(), SEA_LEVEL) for remark in answer.cautions]


@pytest.mark.parametrize(
    ("kind", "refrigerant", "texts", "words"),
    [
        # critical at 73.77 bar abs (Span and Wagner 1996).
        ("gas-cooler", "R-744", {"inlet": "60 bar abs, 90 C", "outlet": "20 C"},
         "Gas cooler: below the critical pressure, 73.77 bar abs, this is a condenser."),
        ("condenser", "R-744", {"inlet": "90 bar abs, 90 C", "outlet": "35 C"},
         "Condenser: above the critical pressure, 73.77 bar abs, this is a gas cooler."),
        ("evaporator", "R-744", {"inlet": "90 bar abs, 10 C", "outlet": "35 C"},
         "Above the critical pressure, 73.77 bar abs, nothing evaporates. Check the readings."),
        ("condenser", "R-134a", {"inlet": "9 bar g, SC 4 K", "outlet": "20 C"}, "Liquid enters the condenser"),
        ("condenser", "R-134a", {"inlet": "9 bar g, SH 30 K", "outlet": "SH 5 K"}, "Vapour leaves the condenser"),
        ("desuperheater", "R-134a", {"inlet": "9 bar g, SH 30 K", "outlet": "SC 2 K"}, "desuperheater's outlet is not"),
        ("desuperheater", "R-134a", {"inlet": "9 bar g, SH 30 K", "outlet": "x 0.9"}, "desuperheater's outlet is not"),
        ("desuperheater", "R-134a", {"inlet": "9 bar g, x 0.9", "outlet": "x 0.2"}, "desuperheater's inlet is not"),
        ("evaporator", "R-134a", {"inlet": "1 bar g, SH 2 K", "outlet": "SH 5 K"}, "Vapour enters the evaporator"),
        ("evaporator", "R-134a", {"inlet": "1 bar g, SC 9 K", "outlet": "SC 2 K"}, "Liquid leaves the evaporator"),
        ("compressor", "R-134a", {"inlet": "1 bar g, SH 8 K", "outlet": "9 bar g, 30 C"}, "compressor's outlet is not"),
        ("compressor", "R-134a", {"inlet": "1 bar g, sat liquid", "outlet": "9 bar g, 60 C"}, "Liquid enters the comp"),
        ("pump", "R-134a", {"inlet": "1 bar g, x 0.1", "outlet": "2 bar g, SC 9 K"}, "Vapour enters the pump"),
        ("expansion", "R-134a", {"inlet": "9 bar g, SH 5 K", "outlet": "1 bar g"}, "Vapour enters the expansion"),
        ("liquid-suction", "R-134a",
         {"inlet": "9 bar g, SH 9 K", "outlet": "SH 5 K", "suction_inlet": "1 bar g, SH 2 K"}, "the liquid side: are"),
    ],
)  # fmt: skip
def test_a_state_that_contradicts_the_kind_is_a_caution_and_the_findings_stay(
    kind: str, refrigerant: str, texts: dict[str, str], words: str
) -> None:
    amount = {} if kind == "expansion" else {"mass_flow": "0.1 kg/s"}
    found = component(kind, refrigerant, **texts, **amount)
    (told,) = [caution for caution in cautions(found) if words in caution]
    assert len(told) < 85
    assert number(found, "enthalpy_difference") == pytest.approx(
        number(found, "outlet_enthalpy") - number(found, "inlet_enthalpy"), abs=1e-6
    )


@pytest.mark.parametrize(
    ("kind", "refrigerant", "texts"),
    [
        ("gas-cooler", "R-744", {"inlet": "90 bar g, 90 C", "outlet": "35 C"}),
        ("condenser", "R-134a", {"inlet": "9 bar g, SH 30 K", "outlet": "SC 4 K"}),
        ("desuperheater", "R-134a", {"inlet": "9 bar g, SH 30 K", "outlet": "SH 1 K"}),
        ("evaporator", "R-134a", {"inlet": "1 bar g, x 0.2", "outlet": "SH 5 K"}),
        # Pumped: liquid enters, wet vapour leaves.
        ("evaporator", "R-134a", {"inlet": "1 bar g, SC 2 K", "outlet": "x 0.4"}),
        ("compressor", "R-134a", {"inlet": "1 bar g, SH 8 K", "outlet": "9 bar g, 60 C"}),
        ("pump", "R-134a", {"inlet": "1 bar g, SC 2 K", "outlet": "3 bar g"}),
        ("expansion", "R-134a", {"inlet": "9 bar g, SC 2 K", "outlet": "1 bar g"}),
        ("liquid-suction", "R-134a", {"inlet": "9 bar g, SC 2 K", "outlet": "20 C", "suction_inlet": "1 bar g, 2 C"}),
    ],
)  # fmt: skip
def test_states_that_fit_the_kind_are_no_caution(kind: str, refrigerant: str, texts: dict[str, str]) -> None:
    amount = {"expansion": {}, "pump": {"mass_flow": "0.1 kg/s", "isentropic_efficiency": "60 %"}}.get(
        kind, {"mass_flow": "0.1 kg/s"}
    )
    assert [text for text in cautions(component(kind, refrigerant, **texts, **amount)) if "R-744:" not in text] == []
