"""From a solved component to its findings and the words beside them."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from gaugeside.checks.caution import (
    discharge_cautions,
    impossible_efficiency,
    model_note,
    refrigerant_caution,
    suction_caution,
)
from gaugeside.checks.component_kinds import WRONG_WAY, Setup
from gaugeside.checks.sheet import Conditions, Outcome
from gaugeside.errors import Refusal
from gaugeside.quantities import Kind
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

_LIQUID = (Region.SUBCOOLED, Region.SATURATED_LIQUID, Region.LIQUID_ABOVE_CRITICAL_PRESSURE)
_WET = (Region.TWO_PHASE,)
_VAPOUR = (Region.SATURATED_VAPOUR, Region.SUPERHEATED)
# Component and place, the regions that contradict it there, and what to say.
_CONTRADICTIONS = (
    ("condenser", "inlet", _LIQUID, "Liquid enters the condenser: nothing is left to condense. Check the inlet."),
    ("condenser", "outlet", _VAPOUR, "Vapour leaves the condenser: nothing has condensed. Check the outlet."),
    ("desuperheater", "inlet", (*_LIQUID, *_WET), "The desuperheater's inlet is not vapour: it has no superheat."),
    ("desuperheater", "outlet", (*_LIQUID, *_WET), "The desuperheater's outlet is not vapour: some has condensed."),
    ("evaporator", "inlet", _VAPOUR, "Vapour enters the evaporator: nothing is left to evaporate. Check the inlet."),
    ("evaporator", "outlet", _LIQUID, "Liquid leaves the evaporator: nothing has evaporated. Check the outlet."),
    ("compressor", "inlet", _LIQUID, "Liquid enters the compressor: it breaks. Check component and inlet."),
    ("compressor", "inlet", _WET, "Wet vapour enters the compressor: liquid damages it."),
    ("compressor", "outlet", (*_LIQUID, *_WET), "The compressor's outlet is not vapour: check inlet and outlet."),
    ("pump", "inlet", _VAPOUR, "Gas enters the pump, which moves only liquid. Check component and inlet."),
    ("pump", "inlet", _WET, "Vapour enters the pump: it cavitates."),
    ("expansion", "inlet", _VAPOUR, "Vapour enters the expansion device: a hot gas valve, or a wrong inlet."),
    ("liquid-suction", "inlet", _VAPOUR, "Vapour enters the liquid side: are liquid and suction swapped?"),
    ("liquid-suction", "suction_inlet", _LIQUID, "Liquid enters the suction side: are liquid and suction swapped?"),
)
_BELOW_CRITICAL = {"gas-cooler": "Gas cooler: below the critical pressure, {critical}, this is a condenser."}
_ABOVE_CRITICAL = {
    "condenser": "Condenser: above the critical pressure, {critical}, this is a gas cooler.",
    "evaporator": "Above the critical pressure, {critical}, nothing evaporates. Check the readings.",
}


def report(conditions: Conditions, setup: Setup, outcome: Outcome) -> None:
    """Fill the findings of `outcome` from a solved component."""
    known, found = setup.network.known, outcome.findings
    for name in ("inlet", "outlet", "suction_inlet", "suction_outlet"):
        if known.get(name) is not None:
            _report_state(conditions.fluid, found, name, known[name])
    _contradictions(conditions.fluid, setup, outcome)
    inlet, outlet = known.get("inlet"), known.get("outlet")
    if inlet is not None and outlet is not None:
        found.enthalpy_difference = outlet.enthalpy - inlet.enthalpy
    if setup.component != "expansion":
        _report_energy(setup, outcome)
        outcome.note("Steady flow; kinetic and potential energy neglected.")
    elif inlet is not None and outlet is not None and outlet.pressure >= inlet.pressure:
        outcome.caution("The outlet pressure is not below the inlet pressure: nothing expands; check which is which.")
    if setup.component in ("compressor", "pump"):
        _report_machine(conditions, setup, outcome)
    if setup.component == "liquid-suction":
        _report_effectiveness(known, outcome)
    outcome.note(f"Enthalpies: {conditions.fluid.datum_note}.")
    model_note(conditions, outcome)
    refrigerant_caution(conditions, outcome)


def _contradictions(fluid: Fluid, setup: Setup, outcome: Outcome) -> None:
    """Say where a state is none that this component works with."""
    known, component = setup.network.known, setup.component
    entering = known.get("inlet") or known.get("outlet")
    if entering is not None:
        is_above = entering.pressure >= fluid.critical_pressure
        text = (_ABOVE_CRITICAL if is_above else _BELOW_CRITICAL).get(component)
        if text is not None:
            outcome.caution(text, critical=(fluid.critical_pressure, Kind.PRESSURE))
    for kind, place, regions, text in _CONTRADICTIONS:
        if kind == component and known.get(place) is not None and known[place].region in regions:
            outcome.caution(text)


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
        outcome.caution(f"Wrong way round: {WRONG_WAY[setup.component]}. Check which side is the inlet.")


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
        outcome.caution("The outlet pressure is not above the inlet pressure: nothing is compressed.")
    if setup.component == "pump":
        found.head = (outlet.pressure - inlet.pressure) / (inlet.density * _STANDARD_GRAVITY)
        return
    suction_caution(conditions, outcome, inlet.pressure)
    discharge_cautions(conditions, outcome, outlet.temperature, ratio)


def _too_good(setup: Setup, outcome: Outcome) -> None:
    """Say when an efficiency that was found is above one."""
    for name in ("isentropic_efficiency", "motor_efficiency", "volumetric_efficiency"):
        value = setup.network.known.get(name)
        if value is not None and value > 1 and name in setup.network.followed:
            or_else = ", or heat leaves the shell" if name == "isentropic_efficiency" else ""
            impossible_efficiency(outcome, name, or_else)


def _report_shell(setup: Setup, outcome: Outcome) -> None:
    loss = setup.network.known.get("heat")
    if not loss:
        return
    outcome.findings.heat_rejected = loss
    if setup.loss_wanted:
        outcome.remark("heat_rejected", "left to the shell by power and states")
        if loss < 0:
            outcome.remark("heat_rejected", "negative: the refrigerant gains more than the power typed")
            outcome.caution("The refrigerant gains more than the power typed: one of these readings is wrong.")
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
            outcome.caution("The suction gas leaves warmer than the liquid enters: that cannot be; check the readings.")
