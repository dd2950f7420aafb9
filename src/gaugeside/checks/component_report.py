"""From a solved component to its findings and the words beside them."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from gaugeside.checks.caution import discharge_cautions, model_note, refrigerant_caution, suction_caution
from gaugeside.checks.component_kinds import WRONG_WAY, Setup
from gaugeside.checks.sheet import Conditions, Outcome
from gaugeside.errors import Refusal
from gaugeside.refrigerants import Region

if TYPE_CHECKING:
    from gaugeside.refrigerants import Fluid, State

_STANDARD_GRAVITY = 9.80665
_ENERGY = {
    "condenser": "heat_rejected",
    "gas-cooler": "heat_rejected",
    "desuperheater": "heat_rejected",
    "evaporator": "heat_absorbed",
    "liquid-suction": "heat_exchanged",
    "compressor": "power_to_refrigerant",
    "pump": "power_to_refrigerant",
}
_REVERSED = {
    "heat_rejected": "negative: as typed it ABSORBS heat, the wrong way round",
    "heat_absorbed": "negative: as typed it REJECTS heat, the wrong way round",
    "heat_exchanged": "negative: as typed the suction gas heats the liquid, the wrong way round",
    "power_to_refrigerant": "negative: as typed it GIVES power, the wrong way round",
}


def report(conditions: Conditions, setup: Setup, outcome: Outcome) -> None:
    """Fill the findings of `outcome` from a solved component."""
    known, found = setup.network.known, outcome.findings
    for name in ("inlet", "outlet", "suction_inlet", "suction_outlet"):
        if known.get(name) is not None:
            _report_state(conditions.fluid, found, name, known[name])
    inlet, outlet = known.get("inlet"), known.get("outlet")
    if inlet is not None and outlet is not None:
        found.enthalpy_difference = outlet.enthalpy - inlet.enthalpy
    if setup.component != "expansion":
        _report_energy(setup, outcome)
        outcome.note("Steady flow; kinetic and potential energy neglected.")
    elif inlet is not None and outlet is not None and outlet.pressure >= inlet.pressure:
        outcome.note("The outlet pressure is not below the inlet pressure: nothing expands; check which is which.")
    if setup.component in ("compressor", "pump"):
        _report_machine(conditions, setup, outcome)
    if setup.component == "liquid-suction":
        _report_effectiveness(known, outcome)
    outcome.note(f"Enthalpies: {conditions.fluid.datum_note}.")
    model_note(conditions, outcome)
    refrigerant_caution(conditions, outcome)


def _report_state(fluid: Fluid, found: Any, name: str, at: State) -> None:
    for finding, value in (
        ("region", at.region.value),
        ("pressure", at.pressure),
        ("temperature", at.temperature),
        ("enthalpy", at.enthalpy),
        ("vapour_fraction", at.vapour_fraction),
    ):
        if hasattr(found, f"{name}_{finding}"):
            setattr(found, f"{name}_{finding}", value)
    if at.pressure >= fluid.critical_pressure or not hasattr(found, f"{name}_superheat"):
        return
    if at.vapour_fraction is not None and 0 < at.vapour_fraction < 1:
        return
    try:
        superheat = at.temperature - fluid.dew_at_pressure(at.pressure).temperature
        subcooling = fluid.bubble_at_pressure(at.pressure).temperature - at.temperature
    except Refusal:
        return  # Too near the critical point for either to have a meaning.
    if superheat > 1e-6:
        setattr(found, f"{name}_superheat", superheat)
    elif subcooling > 1e-6:
        setattr(found, f"{name}_subcooling", subcooling)


def _report_energy(setup: Setup, outcome: Outcome) -> None:
    found, known = outcome.findings, setup.network.known
    found.mass_flow = known.get("mass_flow")
    amount = known.get("power" if setup.component in ("compressor", "pump") else "heat")
    name = _ENERGY[setup.component]
    if amount is None:
        return
    setattr(found, name, amount)
    if amount < 0:
        outcome.remark(name, _REVERSED[name])
        outcome.note(f"Wrong way round: {WRONG_WAY[setup.component]}. Check which side is the inlet.")


def _report_machine(conditions: Conditions, setup: Setup, outcome: Outcome) -> None:
    known, found = setup.network.known, outcome.findings
    inlet, outlet = known.get("inlet"), known.get("outlet")
    for name in ("electrical_power", "motor_efficiency", "isentropic_efficiency"):
        setattr(found, name, known.get(name))
    _too_good(setup, outcome)
    if setup.component == "compressor":
        found.volumetric_efficiency, found.displacement = known.get("volumetric_efficiency"), known.get("displacement")
        _report_shell(setup, outcome)
    if inlet is None or outlet is None:
        return
    ratio = outlet.pressure / inlet.pressure
    if ratio <= 1:
        outcome.note("The outlet pressure is not above the inlet pressure: nothing is compressed.")
    if setup.component == "pump":
        found.head = (outlet.pressure - inlet.pressure) / (inlet.density * _STANDARD_GRAVITY)
        if inlet.region is Region.SUPERHEATED:
            outcome.note("Gas enters the pump: a liquid pump cannot move it. Check the component chosen and the inlet.")
        elif inlet.vapour_fraction is not None and inlet.vapour_fraction > 0:
            outcome.note("Vapour enters the pump: it cavitates.")
        return
    suction_caution(conditions, outcome, inlet.pressure)
    discharge_cautions(conditions, outcome, outlet.temperature, ratio)
    if inlet.region in (Region.SUBCOOLED, Region.LIQUID_ABOVE_CRITICAL_PRESSURE):
        outcome.note("Liquid enters the compressor: it breaks. Check the component chosen and the inlet.")
    elif inlet.vapour_fraction is not None and inlet.vapour_fraction < 1:
        outcome.note("Wet vapour enters the compressor: liquid damages it.")


def _too_good(setup: Setup, outcome: Outcome) -> None:
    """Say when an efficiency that was found is above one."""
    for name in ("isentropic_efficiency", "motor_efficiency", "volumetric_efficiency"):
        value = setup.network.known.get(name)
        if value is not None and value > 1 and name in setup.network.followed:
            or_else = ", or heat leaves the shell" if name == "isentropic_efficiency" else ""
            outcome.remark(name, f"above 100 % cannot be: a reading is wrong{or_else}")


def _report_shell(setup: Setup, outcome: Outcome) -> None:
    loss = setup.network.known.get("heat")
    if not loss:
        return
    outcome.findings.heat_rejected = loss
    if setup.loss_wanted:
        outcome.remark("heat_rejected", "left to the shell by power and states")
        if loss < 0:
            outcome.remark("heat_rejected", "negative: the refrigerant gains more than the power typed")
            outcome.note("The refrigerant gains more than the power typed: one of these readings is wrong.")
    else:
        outcome.remark("heat_rejected", "lost by the shell, as typed")
    outcome.note("With heat lost from the shell no isentropic efficiency is given: the compression is not adiabatic.")
    outcome.findings.isentropic_efficiency = None


def _report_effectiveness(known: Any, outcome: Outcome) -> None:
    """Add the temperature effectiveness of the suction side: (T_out - T_in) / (T_liquid,in - T_in)."""
    ends = [known.get(name) for name in ("suction_inlet", "suction_outlet", "inlet")]
    if any(end is None for end in ends):
        return
    cold, warm, liquid = (end.temperature for end in ends)
    if liquid > cold:
        outcome.findings.effectiveness = (warm - cold) / (liquid - cold)
        outcome.remark("effectiveness", "of the suction side, by temperatures")
        if warm > liquid:
            outcome.note("The suction gas leaves warmer than the liquid enters: that cannot be; check the readings.")
