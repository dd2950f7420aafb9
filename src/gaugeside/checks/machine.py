"""The whole machine: all readings of one running machine on one sheet, every one optional.

A second stage or the upper side of a cascade is a sheet of its own that takes up what a kept sheet rejects.

Q_H = Q_L + W between the heat exchangers; COPs and the reversible limit after Carnot between the cooled space and
the heat sink. What can be computed is; what is missing for the rest is named.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from gaugeside.checks.caution import (
    discharge_cautions,
    impossible_efficiency,
    model_note,
    refrigerant_caution,
    suction_caution,
    uncertain_difference,
)
from gaugeside.checks.machine_circuit import Circuit, trace
from gaugeside.checks.machine_flows import Flows, balance
from gaugeside.checks.sheet import Check, Conditions, Outcome, Table, choice, entry, finding, reading
from gaugeside.errors import Refusal
from gaugeside.quantities import Kind

DRIVES = ("hermetic", "open")


@dataclass(frozen=True)
class Readings:
    """What is typed; every line is optional."""

    suction_pressure: float | None = reading("suction pressure", Kind.PRESSURE, "At the compressor's inlet.")
    suction_temperature: float | None = reading("suction pipe", Kind.TEMPERATURE, "At the compressor's inlet.")
    discharge_pressure: float | None = reading("discharge pressure", Kind.PRESSURE, "At the compressor's outlet.")
    discharge_temperature: float | None = reading("discharge pipe", Kind.TEMPERATURE, "At the compressor's outlet.")
    liquid_pressure: float | None = reading(
        "liquid pressure", Kind.PRESSURE, "Before the valve; blank: taken as the discharge pressure."
    )
    liquid_temperature: float | None = reading(
        "liquid pipe", Kind.TEMPERATURE, "Before the valve; above critical, at the gas cooler's outlet."
    )
    evaporator_pressure: float | None = reading(
        "evaporator pressure", Kind.PRESSURE, "At its outlet; blank: the suction pressure."
    )
    evaporator_outlet_temperature: float | None = reading(
        "evaporator outlet", Kind.TEMPERATURE, "Blank: suction line and evaporator count as one."
    )
    mass_flow: float | None = reading("mass flow", Kind.MASS_FLOW, "Of a flow meter; blank when there is none.")
    electrical_power: float | None = reading("electrical power", Kind.POWER, "Of the compressor's motor.")
    drive: str | None = choice(
        "drive", DRIVES, "Hermetic: all motor power heats the gas. Open: motor efficiency counts."
    )
    motor_efficiency: float | None = reading("motor efficiency", Kind.FRACTION, "Motor and drive of an open machine.")
    shell_loss: float | None = reading("shell loss", Kind.POWER, "Heat the compressor gives to the room; blank: none.")
    displacement: float | None = reading("displacement", Kind.VOLUME_FLOW, "Swept volume per time, as on the plate.")
    volumetric_efficiency: float | None = reading(
        "volumetric effic.", Kind.FRACTION, "Share of the displacement that is filled."
    )
    heat_rejected: float | None = reading(
        "heat rejected", Kind.POWER, "Measured outside the circuit, as on the water side."
    )
    heat_absorbed: float | None = reading(
        "heat absorbed", Kind.POWER, "Measured outside the circuit, as on the air or brine side."
    )
    space_temperature: float | None = reading(
        "cooled space", Kind.TEMPERATURE, "Of the room or product that is cooled, not of the refrigerant."
    )
    sink_temperature: float | None = reading(
        "heat sink", Kind.TEMPERATURE, "Of the air or water that takes the heat, not of the refrigerant."
    )
    stage_below: Mapping[str, float] | None = entry(
        "stage below", "Logbook entry number of the lower machine whose heat is taken up."
    )


@dataclass
class Findings:
    """What follows, SI."""

    heat_absorbed: float | None = finding("heat absorbed", Kind.POWER, main=True)
    heat_rejected: float | None = finding("heat rejected", Kind.POWER, main=True)
    power_to_refrigerant: float | None = finding("power to refrigerant", Kind.POWER, main=True)
    electrical_power: float | None = finding("electrical power", Kind.POWER)
    mass_flow: float | None = finding("mass flow", Kind.MASS_FLOW, main=True)
    cop_refrigerator: float | None = finding("COP, refrigerator", Kind.RATIO, main=True)
    cop_heat_pump: float | None = finding("COP, heat pump", Kind.RATIO)
    heat_balance_closure: float | None = finding("heat balance closure", Kind.FRACTION)
    superheat: float | None = finding("superheat", Kind.TEMPERATURE_DIFFERENCE)
    subcooling: float | None = finding("subcooling", Kind.TEMPERATURE_DIFFERENCE)
    pressure_ratio: float | None = finding("pressure ratio", Kind.RATIO)
    isentropic_efficiency: float | None = finding("isentropic efficiency", Kind.FRACTION)
    volumetric_efficiency: float | None = finding("volumetric effic.", Kind.FRACTION)
    volumetric_capacity: float | None = finding("volumetric capacity", Kind.VOLUMETRIC_CAPACITY)
    flash_fraction: float | None = finding("flash gas after valve", Kind.FRACTION)
    overall_power: float | None = finding("power of both stages", Kind.POWER)
    overall_cop_refrigerator: float | None = finding("COP of both, refrig.", Kind.RATIO)
    reversible_cop_refrigerator: float | None = finding("reversible COP, ref.", Kind.RATIO)
    minimum_power: float | None = finding("minimum power", Kind.POWER)
    second_law_efficiency: float | None = finding("second-law effic.", Kind.FRACTION)


def run(conditions: Conditions, readings: Readings) -> Outcome:
    """Return all that the readings of one machine give; Refusal when none is typed or one cannot be."""
    typed = {
        name: value
        for name, value in vars(readings).items()
        if value is not None and name not in ("drive", "stage_below")
    }
    if not typed:
        raise Refusal("No reading is typed.", "Type any; each adds to what can be said.", "suction_pressure")
    for line in CHECK.reading_lines():
        value = typed.get(line.name)
        if value is not None and value <= 0 and line.kind not in (Kind.PRESSURE, Kind.TEMPERATURE):
            raise Refusal(f"The {line.label} is not above zero.", "Type an amount, or leave it blank.", line.name)
    outcome = Outcome(Findings())
    below = readings.stage_below
    if below is not None:
        _take_up(below, typed, outcome)
    circuit = trace(conditions, typed, outcome)
    flows = balance(conditions, circuit, typed, readings.drive, outcome)
    if below is not None and readings.heat_absorbed is None:
        flows.sources["heat_absorbed"] = "rejected by the stage below"
    _report_circuit(conditions, circuit, flows.shell_loss, outcome)
    _report_flows(flows, circuit, outcome)
    if below is not None:
        _report_both(below, flows, outcome)
    _report_limit(flows, circuit, typed, below, outcome)
    _name_missing(circuit, flows, outcome)
    outcome.note(f"Enthalpies: {conditions.fluid.datum_note}. Steady flow; kinetic and potential energy neglected.")
    model_note(conditions, outcome)
    refrigerant_caution(conditions, outcome)
    outcome.no_finding = Refusal("The readings typed give no finding alone.", "Add a pressure to each temperature.")
    return outcome


def _take_up(below: Mapping[str, float], typed: dict[str, float], outcome: Outcome) -> None:
    """Take the heat rejected by the stage below as what this machine absorbs."""
    if "heat_absorbed" in typed:
        outcome.note("The heat absorbed is typed; it may hold loads beside the stage below.")
    else:
        typed["heat_absorbed"] = below["heat_rejected"]
        outcome.note(
            "Heat absorbed is what the stage below rejects, {heat}: no other load and no loss between the two.",
            heat=(below["heat_rejected"], Kind.POWER),
        )


def _report_both(below: Mapping[str, float], flows: Flows, outcome: Outcome) -> None:
    """Add what both stages do together: heat absorbed below over the power of both."""
    found: Findings = outcome.findings
    for own, name in ((flows.electrical, "electrical_power"), (flows.power, "power_to_refrigerant")):
        if own is not None and name in below:
            found.overall_power = own + below[name]
            found.overall_cop_refrigerator = below["heat_absorbed"] / found.overall_power
            outcome.remark("overall_power", name.replace("_", " "))
            outcome.remark("overall_cop_refrigerator", "of the lower heat absorbed")
            return
    if flows.electrical is None and flows.power is None:
        return
    outcome.note("No power of both stages: one sheet knows the electrical power, the other that to the refrigerant.")


def _report_circuit(conditions: Conditions, circuit: Circuit, shell_loss: float, outcome: Outcome) -> None:
    found: Findings = outcome.findings
    found.superheat, found.subcooling = circuit.superheat, circuit.subcooling
    if circuit.superheat is not None:
        outcome.remark("superheat", "at the compressor")
    for name in ("superheat", "subcooling"):
        uncertain_difference(conditions, outcome, name, getattr(circuit, name))
    _report_efficiency(circuit.isentropic_efficiency(conditions.fluid), shell_loss, outcome)
    suction, discharge = circuit.pressures.get("suction"), circuit.pressures.get("discharge")
    if suction is not None:
        suction_caution(conditions, outcome, suction)
    if suction is not None and discharge is not None:
        found.pressure_ratio = discharge / suction
    at_discharge = circuit.states.get("discharge")
    discharge_cautions(conditions, outcome, at_discharge.temperature if at_discharge else None, found.pressure_ratio)
    after_valve = circuit.states.get("after valve")
    if after_valve is not None and after_valve.vapour_fraction is not None:
        found.flash_fraction = after_valve.vapour_fraction
    if circuit.states:
        outcome.tables.append(_points(circuit))


def _report_efficiency(efficiency: float | None, shell_loss: float, outcome: Outcome) -> None:
    """Add the isentropic efficiency of an adiabatic compression."""
    if efficiency is None:
        return
    if shell_loss:
        outcome.note(
            "With heat lost from the shell no isentropic efficiency is given: the compression is not adiabatic."
        )
        return
    outcome.findings.isentropic_efficiency = efficiency
    if efficiency > 1:
        impossible_efficiency(outcome, "isentropic_efficiency", ", or heat leaves the shell")
    elif efficiency < 0.2:
        outcome.remark("isentropic_efficiency", "not plausible")
        outcome.caution("Isentropic efficiency below 20 % (common practice): a pressure or a temperature is off.")


def _points(circuit: Circuit) -> Table:
    columns = (
        ("place", Kind.WORDS),
        ("pressure", Kind.PRESSURE),
        ("temperature", Kind.TEMPERATURE),
        ("enthalpy", Kind.SPECIFIC_ENTHALPY),
        ("density", Kind.DENSITY),
    )
    rows = tuple((name, s.pressure, s.temperature, s.enthalpy, s.density) for name, s in circuit.states.items())
    return Table("states around the circuit", columns, rows)


def _report_flows(flows: Flows, circuit: Circuit, outcome: Outcome) -> None:
    found: Findings = outcome.findings
    found.mass_flow, found.heat_absorbed, found.heat_rejected = flows.mass_flow, flows.absorbed, flows.rejected
    found.power_to_refrigerant, found.electrical_power = flows.power, flows.electrical
    found.volumetric_efficiency = flows.volumetric_efficiency
    if flows.volumetric_efficiency is not None and flows.volumetric_efficiency > 1:
        impossible_efficiency(outcome, "volumetric_efficiency")
    for name, words in flows.sources.items():
        outcome.remark(name, words)
    work = flows.electrical if flows.electrical is not None else flows.power
    which = "electrical power" if flows.electrical is not None else "power to refrigerant"
    if work:
        if flows.absorbed is not None:
            found.cop_refrigerator = flows.absorbed / work
            outcome.remark("cop_refrigerator", f"over {which}")
        if flows.rejected is not None:
            found.cop_heat_pump = flows.rejected / work
            outcome.remark("cop_heat_pump", f"over {which}")
    if flows.closure is not None:
        found.heat_balance_closure = flows.closure
        outcome.remark("heat_balance_closure", f"{flows.supplied_words} against rejected")
    suction, effect = circuit.states.get("suction"), circuit.refrigerating_effect
    if suction is not None and effect is not None:
        found.volumetric_capacity = effect * suction.density


def _report_limit(
    flows: Flows, circuit: Circuit, typed: Mapping[str, float], below: Mapping[str, float] | None, outcome: Outcome
) -> None:
    """Add the reversible limit between the cooled space and the heat sink (Carnot, temperatures in kelvin).

    With a stage below, the space is that stage's, and the limit holds for both together.
    """
    space, sink = typed.get("space_temperature"), typed.get("sink_temperature")
    found: Findings = outcome.findings
    _not_the_refrigerant(circuit, None if below else space, sink, outcome)
    absorbed, reached = flows.absorbed, found.cop_refrigerator
    if below is not None:
        absorbed, reached = below["heat_absorbed"], found.overall_cop_refrigerator
    if space is None or sink is None:
        return
    if sink <= space:
        outcome.note("The heat sink is not warmer than the cooled space: heat flows by itself, no limit applies.")
        return
    found.reversible_cop_refrigerator = space / (sink - space)
    outcome.remark("reversible_cop_refrigerator", "cooled space to heat sink")
    if absorbed is not None:
        found.minimum_power = absorbed / found.reversible_cop_refrigerator
    if reached is not None:
        found.second_law_efficiency = reached / found.reversible_cop_refrigerator
        if below is not None:
            for name in ("minimum_power", "second_law_efficiency"):
                outcome.remark(name, "of both stages together")
        if found.second_law_efficiency > 1:
            impossible_efficiency(outcome, "second_law_efficiency")


def _not_the_refrigerant(circuit: Circuit, space: float | None, sink: float | None, outcome: Outcome) -> None:
    """Say when the space or the sink cannot be what was typed, as heat would have to flow uphill."""
    evaporating, condensing = circuit.evaporating, circuit.condensing
    if space is not None and evaporating is not None and space <= evaporating + 0.2:
        outcome.caution(
            "The cooled space is not warmer than the refrigerant that evaporates at {there}: type the temperature of "
            "the room or product, not of the refrigerant.",
            there=(evaporating, Kind.TEMPERATURE),
        )
    if sink is not None and condensing is not None and sink >= condensing - 0.2:
        outcome.caution(
            "The heat sink is not colder than the refrigerant that condenses at {there}: type the temperature of the "
            "outside air or water, not of the refrigerant.",
            there=(condensing, Kind.TEMPERATURE),
        )


def _name_missing(circuit: Circuit, flows: Flows, outcome: Outcome) -> None:
    found: Findings = outcome.findings
    missing = [words for words in (circuit.missing_words(), flows.missing_words()) if words]
    if found.heat_absorbed is None or found.heat_rejected is None or found.power_to_refrigerant is None:
        for words in missing:
            outcome.note(words)


CHECK = Check(
    "machine",
    "machine",
    "All readings of one machine; whatever is typed counts.",
    Readings,
    Findings,
    run,
)
