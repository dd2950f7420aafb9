"""One component by its steady-flow energy balance: Q + W = m (h_out - h_in), into the refrigerant positive.

Kinetic and potential energy are neglected. Source: the first law for steady flow, any engineering
thermodynamics text. Whatever of mass flow, heat or power, and one state is left blank is solved for.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from gaugeside.checks.caution import discharge_cautions, model_note, refrigerant_caution
from gaugeside.checks.sheet import Check, Conditions, Outcome, choice, finding, reading, state
from gaugeside.errors import Refusal
from gaugeside.quantities import Kind

if TYPE_CHECKING:
    from gaugeside.refrigerants import Fluid, State

KINDS = ("condenser", "evaporator", "compressor", "expansion")
_TITLES = {
    "condenser": "condenser or gas cooler",
    "evaporator": "evaporator",
    "compressor": "compressor",
    "expansion": "expansion device",
}
Given = Mapping[str, float]


@dataclass(frozen=True)
class Readings:
    """What is typed; what is wanted stays blank."""

    component: str | None = choice(
        "component", KINDS, "condenser (gas cooler too), evaporator, compressor, expansion.", positional=True
    )
    inlet: Given | None = state("inlet", "Pressure and one more: 9.1 bar g, 68 C · SH 5 K · sat vapour · x 0.3.")
    outlet: Given | None = state("outlet", "Like the inlet; the pressure alone when this state is wanted.")
    mass_flow: float | None = reading("mass flow", Kind.MASS_FLOW, "Refrigerant; blank when it is wanted.")
    heat: float | None = reading(
        "heat", Kind.POWER, "Rejected by a condenser, absorbed by an evaporator, lost by a compressor's shell."
    )
    power: float | None = reading("power", Kind.POWER, "Power to the refrigerant, compressor only.")


@dataclass
class Findings:
    """What follows, SI."""

    heat_rejected: float | None = finding("heat rejected", Kind.POWER, main=True)
    heat_absorbed: float | None = finding("heat absorbed", Kind.POWER, main=True)
    power_to_refrigerant: float | None = finding("power to refrigerant", Kind.POWER, main=True)
    mass_flow: float | None = finding("mass flow", Kind.MASS_FLOW, main=True)
    isentropic_efficiency: float | None = finding("isentropic efficiency", Kind.FRACTION)
    inlet_region: str | None = finding("inlet state", Kind.WORDS, row="state", column="inlet")
    outlet_region: str | None = finding("outlet state", Kind.WORDS, row="state", column="outlet")
    inlet_pressure: float | None = finding("inlet pressure", Kind.PRESSURE, row="pressure", column="inlet")
    outlet_pressure: float | None = finding("outlet pressure", Kind.PRESSURE, row="pressure", column="outlet")
    inlet_temperature: float | None = finding("inlet temperature", Kind.TEMPERATURE, row="temperature", column="inlet")
    outlet_temperature: float | None = finding(
        "outlet temperature", Kind.TEMPERATURE, row="temperature", column="outlet"
    )
    inlet_enthalpy: float | None = finding("inlet enthalpy", Kind.SPECIFIC_ENTHALPY, row="enthalpy", column="inlet")
    outlet_enthalpy: float | None = finding("outlet enthalpy", Kind.SPECIFIC_ENTHALPY, row="enthalpy", column="outlet")
    enthalpy_difference: float | None = finding("difference", Kind.SPECIFIC_ENTHALPY, row="enthalpy", column="beside")
    inlet_vapour_fraction: float | None = finding(
        "inlet vapour fraction", Kind.FRACTION, row="vapour fraction", column="inlet"
    )
    outlet_vapour_fraction: float | None = finding(
        "outlet vapour fraction", Kind.FRACTION, row="vapour fraction", column="outlet"
    )


@dataclass
class _Balance:
    """One component while it is being solved; `energy` is its heat or power [W] in the sense of its kind."""

    component: str
    inlet: State | None
    outlet: State | None
    mass_flow: float | None
    energy: float | None
    shell_loss: float = 0.0

    @property
    def sign(self) -> float:
        """+1 where the refrigerant gains enthalpy, -1 for a condenser."""
        return -1.0 if self.component == "condenser" else 1.0


def run(conditions: Conditions, readings: Readings) -> Outcome:
    """Return the blank of one component's balance; Refusal where the readings give none."""
    outcome = Outcome(Findings())
    component = readings.component
    if component is None:
        raise Refusal("No component is named.", f"Name one of {', '.join(KINDS)}.", "component")
    _fitting(component, readings)
    inlet_given, outlet_given = _with_shared_pressure(component, readings, outcome)
    balance = _Balance(
        component,
        _state(conditions.fluid, inlet_given, "inlet"),
        _state(conditions.fluid, outlet_given, "outlet"),
        readings.mass_flow,
        readings.power if component == "compressor" else readings.heat,
        readings.heat or 0.0 if component == "compressor" else 0.0,
    )
    if component == "expansion":
        _expand(conditions.fluid, balance, inlet_given, outlet_given, outcome)
    else:
        _solve(conditions.fluid, balance, inlet_given, outlet_given, outcome)
    _report(conditions, balance, outcome)
    return outcome


def _fitting(component: str, readings: Readings) -> None:
    """Refuse readings that the component cannot have."""
    if component != "compressor" and readings.power is not None:
        raise Refusal(f"The {_TITLES[component]} takes no power in this balance.", "Clear the power.", "power")
    if component == "expansion" and readings.heat is not None:
        raise Refusal("An expansion device exchanges no heat in this balance.", "Clear the heat.", "heat")
    for name in ("mass_flow", "heat", "power"):
        value = getattr(readings, name)
        if value is not None and value < 0:
            raise Refusal(
                f"The {name.replace('_', ' ')} is typed with a minus; it is taken as an amount, its direction is "
                f"the {_TITLES[component]}'s own.",
                "Type it without the minus, and check which side is the inlet.",
                name,
            )
    if readings.mass_flow == 0:
        raise Refusal("The mass flow is zero: nothing flows.", "Leave it blank when it is wanted.", "mass_flow")


def _with_shared_pressure(component: str, readings: Readings, outcome: Outcome) -> tuple[Given, Given]:
    """Return what is given of both states; a heat exchanger's missing pressure is taken from its other side."""
    inlet, outlet = dict(readings.inlet or {}), dict(readings.outlet or {})
    if component in ("condenser", "evaporator"):
        for this, other, name in ((inlet, outlet, "inlet"), (outlet, inlet, "outlet")):
            if "pressure" in other and "pressure" not in this and set(this) != {"temperature", "vapour_fraction"}:
                this["pressure"] = other["pressure"]
                outcome.note(f"The {name} pressure is taken as the other side's: no pressure drop.")
                break
    return inlet, outlet


def _state(fluid: Fluid, given: Given, name: str) -> State | None:
    """Return the state that is fixed by what is given, None when it is not fixed; Refusal naming the field."""
    try:
        pressure, temperature = given.get("pressure"), given.get("temperature")
        if temperature is not None and "vapour_fraction" in given:
            return fluid.state_tx(temperature, given["vapour_fraction"])
        if pressure is None:
            return None
        if temperature is not None:
            return fluid.state_pt(pressure, temperature)
        if "superheat" in given:
            return fluid.state_superheat(pressure, given["superheat"])
        if "subcooling" in given:
            return fluid.state_subcooling(pressure, given["subcooling"])
        if "vapour_fraction" in given:
            return fluid.state_px(pressure, given["vapour_fraction"])
        if "enthalpy" in given:
            return fluid.state_ph(pressure, given["enthalpy"])
    except Refusal as refusal:
        raise refusal.about(name) from None
    return None


def _solve(fluid: Fluid, balance: _Balance, inlet: Given, outlet: Given, outcome: Outcome) -> None:
    """Fill the one blank of condenser, evaporator or compressor, or say in `outcome` why it cannot be."""
    energy_name = {"condenser": "heat rejected", "evaporator": "heat absorbed", "compressor": "power"}
    field = "power" if balance.component == "compressor" else "heat"
    label = energy_name[balance.component]
    blanks = [
        name
        for name, value in (
            ("inlet", balance.inlet),
            ("outlet", balance.outlet),
            ("mass flow", balance.mass_flow),
            (label, balance.energy),
        )
        if value is None
    ]
    if balance.component == "compressor" and balance.shell_loss == 0.0:
        outcome.note("No heat is lost from the compressor's shell, as none is typed.")
    if len(blanks) > 1:
        names = {label: field, "mass flow": "mass_flow"}
        outcome.unresolved = Refusal(
            f"{len(blanks)} are blank: {', '.join(blanks[:-1])} and {blanks[-1]}; one can be solved for.",
            "Type all but the one you want to know.",
            names.get(blanks[0], blanks[0]),
        )
        return
    if not blanks:
        _over_determined(balance, field, label, outcome)
    elif balance.inlet is not None and balance.outlet is not None:
        _solve_flow(balance, label, field, outcome)
    else:
        _solve_state(fluid, balance, inlet, outlet)


def _gain(balance: _Balance) -> float:
    """Return the enthalpy difference [J/kg], positive in the component's own direction."""
    assert balance.inlet is not None
    assert balance.outlet is not None
    return balance.sign * (balance.outlet.enthalpy - balance.inlet.enthalpy)


def _solve_flow(balance: _Balance, label: str, field: str, outcome: Outcome) -> None:
    gain = _gain(balance)
    if balance.energy is None:
        assert balance.mass_flow is not None
        balance.energy = balance.mass_flow * gain + balance.shell_loss
        return
    flowing = balance.energy - balance.shell_loss
    if flowing <= 0:
        raise Refusal(
            f"The {label} does not exceed the shell loss." if balance.shell_loss else f"The {label} is zero.",
            "Check the two figures.",
            field,
        )
    if gain <= 0:
        outcome.unresolved = Refusal(
            f"With these states the {_TITLES[balance.component]} works the wrong way round: "
            f"{_wrong_way(balance.component)}, so no mass flow gives the {label} typed.",
            "Check which side is the inlet, and the pressures.",
            "outlet",
        )
        return
    balance.mass_flow = flowing / gain


def _wrong_way(component: str) -> str:
    return {
        "condenser": "the outlet holds more enthalpy than the inlet",
        "evaporator": "the outlet holds less enthalpy than the inlet",
        "compressor": "the outlet holds less enthalpy than the inlet",
    }[component]


def _over_determined(balance: _Balance, field: str, label: str, outcome: Outcome) -> None:
    assert balance.mass_flow is not None
    assert balance.energy is not None
    from_states = balance.mass_flow * _gain(balance) + balance.shell_loss
    apart = f"{100 * (balance.energy - from_states) / from_states:+.1f} % apart" if from_states else "apart"
    outcome.unresolved = Refusal(
        f"Nothing is left blank: mass flow and states give the {label} already, and the figure typed is {apart}.",
        f"Clear the {label} to see what the others give, or another to solve for it.",
        field,
    )
    balance.energy = from_states


def _solve_state(fluid: Fluid, balance: _Balance, inlet: Given, outlet: Given) -> None:
    """Find the blank state from its pressure and the enthalpy the balance leaves for it."""
    assert balance.mass_flow is not None
    assert balance.energy is not None
    change = balance.sign * (balance.energy - balance.shell_loss) / balance.mass_flow
    wanted, given = ("outlet", outlet) if balance.outlet is None else ("inlet", inlet)
    if "pressure" not in given:
        raise Refusal(
            f"The {wanted} is wanted, but its pressure is not known.",
            f"Type the {wanted} pressure alone, for example 9.0 bar g.",
            wanted,
        )
    try:
        if wanted == "outlet":
            assert balance.inlet is not None
            balance.outlet = fluid.state_ph(given["pressure"], balance.inlet.enthalpy + change)
        else:
            assert balance.outlet is not None
            balance.inlet = fluid.state_ph(given["pressure"], balance.outlet.enthalpy - change)
    except Refusal as refusal:
        raise Refusal(
            f"No {wanted} state fits: {refusal.message}",
            "Check the mass flow and the heat or power, and their units.",
            wanted,
        ) from None


def _expand(fluid: Fluid, balance: _Balance, inlet: Given, outlet: Given, outcome: Outcome) -> None:
    """Fill the outlet (or the inlet) of an expansion device: the enthalpy stays the same."""
    outcome.note("Expansion at constant enthalpy: no heat exchanged, no work done.")
    if balance.inlet is not None and balance.outlet is not None:
        outcome.unresolved = Refusal(
            "Nothing is left blank: an expansion device's outlet follows from its inlet.",
            "Type the outlet's pressure alone, for example 2.0 bar g.",
            "outlet",
        )
        return
    known, wanted, given = (
        (balance.inlet, "outlet", outlet) if balance.inlet is not None else (balance.outlet, "inlet", inlet)
    )
    if known is None:
        raise Refusal(
            "Neither side of the expansion device is a full state.",
            "Type the inlet, for example 14 bar g, SC 4 K, and the outlet pressure.",
            "inlet",
        )
    if "pressure" in given:
        found = fluid.state_ph(given["pressure"], known.enthalpy)
    elif "temperature" in given:
        found = _wet_at_temperature(fluid, given["temperature"], known.enthalpy, wanted)
    else:
        raise Refusal(
            f"The {wanted} pressure is not known.",
            f"Type the {wanted} pressure alone, for example 2.0 bar g.",
            wanted,
        )
    if wanted == "outlet":
        balance.outlet = found
    else:
        balance.inlet = found
    assert balance.inlet is not None
    assert balance.outlet is not None
    if balance.outlet.pressure >= balance.inlet.pressure:
        outcome.note("The outlet pressure is not below the inlet pressure: nothing expands; check which is which.")


def _wet_at_temperature(fluid: Fluid, temperature: float, enthalpy: float, wanted: str) -> State:
    """Return the wet state at a temperature [K] that has this enthalpy [J/kg], by bisection over the fraction."""
    low, high = 0.0, 1.0
    if not (fluid.state_tx(temperature, low).enthalpy <= enthalpy <= fluid.state_tx(temperature, high).enthalpy):
        raise Refusal(
            f"At the {wanted} temperature typed the {wanted} is not wet, so the temperature alone does not fix it.",
            f"Type the {wanted} pressure instead.",
            wanted,
        )
    for _ in range(60):
        middle = (low + high) / 2
        if fluid.state_tx(temperature, middle).enthalpy < enthalpy:
            low = middle
        else:
            high = middle
    return fluid.state_tx(temperature, (low + high) / 2)


def _report(conditions: Conditions, balance: _Balance, outcome: Outcome) -> None:
    found: Findings = outcome.findings
    for name, at in (("inlet", balance.inlet), ("outlet", balance.outlet)):
        if at is not None:
            setattr(found, f"{name}_region", at.region.value)
            setattr(found, f"{name}_pressure", at.pressure)
            setattr(found, f"{name}_temperature", at.temperature)
            setattr(found, f"{name}_enthalpy", at.enthalpy)
            setattr(found, f"{name}_vapour_fraction", at.vapour_fraction)
    found.mass_flow = balance.mass_flow
    if balance.inlet is not None and balance.outlet is not None:
        found.enthalpy_difference = balance.outlet.enthalpy - balance.inlet.enthalpy
    _report_energy(balance, outcome)
    if balance.component == "compressor":
        _report_compressor(conditions.fluid, balance, outcome)
    outcome.note(f"Enthalpies: {conditions.fluid.datum_note}.")
    if balance.component != "expansion":
        outcome.note("Steady flow; kinetic and potential energy neglected.")
    model_note(conditions, outcome)
    refrigerant_caution(conditions, outcome)


def _report_energy(balance: _Balance, outcome: Outcome) -> None:
    found: Findings = outcome.findings
    name = {"condenser": "heat_rejected", "evaporator": "heat_absorbed", "compressor": "power_to_refrigerant"}.get(
        balance.component
    )
    if name is None or balance.energy is None:
        return
    setattr(found, name, balance.energy)
    if balance.energy < 0:
        words = {
            "condenser": "negative: as typed it ABSORBS heat, the wrong way round",
            "evaporator": "negative: as typed it REJECTS heat, the wrong way round",
            "compressor": "negative: as typed it GIVES power, the wrong way round",
        }[balance.component]
        outcome.remark(name, words)
        outcome.note(f"Wrong way round: {_wrong_way(balance.component)}. Check which side is the inlet.")
    if balance.component == "compressor" and balance.shell_loss:
        found.heat_rejected = balance.shell_loss
        outcome.remark("heat_rejected", "lost by the shell, as typed")


def _report_compressor(fluid: Fluid, balance: _Balance, outcome: Outcome) -> None:
    """Add the isentropic efficiency (h2s - h1)/(h2 - h1) and what it says about the readings."""
    inlet, outlet = balance.inlet, balance.outlet
    if inlet is None or outlet is None:
        return
    found: Findings = outcome.findings
    ratio = outlet.pressure / inlet.pressure
    discharge_cautions(outcome, outlet.temperature, ratio)
    if ratio <= 1:
        outcome.note("The outlet pressure is not above the inlet pressure: nothing is compressed.")
        return
    if balance.shell_loss:
        outcome.note("With shell loss no isentropic efficiency is given: the compression is not adiabatic.")
        return
    rise = outlet.enthalpy - inlet.enthalpy
    if rise <= 0:
        return
    found.isentropic_efficiency = (fluid.state_ps(outlet.pressure, inlet.entropy).enthalpy - inlet.enthalpy) / rise
    if found.isentropic_efficiency > 1:
        outcome.remark("isentropic_efficiency", "above 100 % cannot be: a reading is wrong, or the shell loses heat")
    if inlet.vapour_fraction is not None and inlet.vapour_fraction < 1:
        outcome.note("Wet vapour enters the compressor: liquid damages it.")


CHECK = Check(
    "component",
    "component",
    "Heat or power, mass flow or a state of one component.",
    Readings,
    Findings,
    run,
)
