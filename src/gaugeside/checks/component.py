"""One component by its steady-flow energy balance: Q + W = m (h_out - h_in), into the refrigerant positive.

Kinetic and potential energy are neglected. Source: the first law for steady flow, any engineering
thermodynamics text. Whatever single quantity is left blank is solved for.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from gaugeside.checks.component_kinds import KINDS, TITLES, Setup, set_up
from gaugeside.checks.component_report import report
from gaugeside.checks.sheet import Check, Conditions, Outcome, choice, finding, reading, state
from gaugeside.errors import Refusal
from gaugeside.quantities import Kind

Given = Mapping[str, float]
_EXCHANGERS = ("condenser", "gas-cooler", "evaporator", "desuperheater", "liquid-suction")
_MACHINES = ("compressor", "pump")


@dataclass(frozen=True)
class Readings:
    """What is typed; what is wanted stays blank."""

    component: str | None = choice("component", KINDS, ", ".join(KINDS) + ".", positional=True)
    inlet: Given | None = state("inlet", "Pressure and one more: 9.1 bar g, 68 C · SH 5 K · sat vapour · x 0.3.")
    outlet: Given | None = state("outlet", "Like the inlet; the pressure alone when this state is wanted.")
    suction_inlet: Given | None = state(
        "suction gas in", "The vapour side; inlet and outlet above are the liquid side.", only=("liquid-suction",)
    )
    suction_outlet: Given | None = state(
        "suction gas out", "Like the others; blank or pressure alone when wanted.", only=("liquid-suction",)
    )
    mass_flow: float | None = reading(
        "mass flow", Kind.MASS_FLOW, "Refrigerant; blank when it is wanted.", only=(*_EXCHANGERS, *_MACHINES)
    )
    suction_mass_flow: float | None = reading(
        "suction mass flow", Kind.MASS_FLOW, "Only where it differs from the liquid's.", only=("liquid-suction",)
    )
    heat: float | None = reading(
        "heat",
        Kind.POWER,
        "Rejected by a condenser, absorbed by an evaporator, lost by a shell.",
        only=(*_EXCHANGERS, "compressor"),
    )
    power: float | None = reading("power", Kind.POWER, "Power to the refrigerant.", only=_MACHINES)
    isentropic_efficiency: float | None = reading(
        "isentropic effic.", Kind.FRACTION, "Instead of the outlet's temperature.", only=_MACHINES
    )
    electrical_power: float | None = reading("electrical power", Kind.POWER, "What the meter shows.", only=_MACHINES)
    motor_efficiency: float | None = reading(
        "motor efficiency", Kind.FRACTION, "Of motor and drive together; 100 % for a hermetic motor.", only=_MACHINES
    )
    displacement: float | None = reading(
        "displacement", Kind.VOLUME_FLOW, "Swept volume per time, as on the plate.", only=("compressor",)
    )
    volumetric_efficiency: float | None = reading(
        "volumetric effic.", Kind.FRACTION, "Share of the displacement that is filled.", only=("compressor",)
    )


@dataclass
class Findings:
    """What follows, SI."""

    heat_rejected: float | None = finding("heat rejected", Kind.POWER, main=True)
    heat_absorbed: float | None = finding("heat absorbed", Kind.POWER, main=True)
    heat_exchanged: float | None = finding("heat exchanged", Kind.POWER, main=True)
    power_to_refrigerant: float | None = finding("power to refrigerant", Kind.POWER, main=True)
    mass_flow: float | None = finding("mass flow", Kind.MASS_FLOW, main=True)
    electrical_power: float | None = finding("electrical power", Kind.POWER)
    motor_efficiency: float | None = finding("motor efficiency", Kind.FRACTION)
    isentropic_efficiency: float | None = finding("isentropic efficiency", Kind.FRACTION)
    volumetric_efficiency: float | None = finding("volumetric effic.", Kind.FRACTION)
    displacement: float | None = finding("displacement", Kind.VOLUME_FLOW)
    effectiveness: float | None = finding("effectiveness", Kind.FRACTION)
    head: float | None = finding("head", Kind.LENGTH)
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
    inlet_superheat: float | None = finding(
        "inlet superheat", Kind.TEMPERATURE_DIFFERENCE, row="superheat", column="inlet"
    )
    outlet_superheat: float | None = finding(
        "outlet superheat", Kind.TEMPERATURE_DIFFERENCE, row="superheat", column="outlet"
    )
    inlet_subcooling: float | None = finding(
        "inlet subcooling", Kind.TEMPERATURE_DIFFERENCE, row="subcooling", column="inlet"
    )
    outlet_subcooling: float | None = finding(
        "outlet subcooling", Kind.TEMPERATURE_DIFFERENCE, row="subcooling", column="outlet"
    )
    suction_inlet_region: str | None = finding("suction in", Kind.WORDS, row="suction state", column="inlet")
    suction_outlet_region: str | None = finding("suction out", Kind.WORDS, row="suction state", column="outlet")
    suction_inlet_temperature: float | None = finding(
        "suction inlet temperature", Kind.TEMPERATURE, row="suction temperature", column="inlet"
    )
    suction_outlet_temperature: float | None = finding(
        "suction outlet temperature", Kind.TEMPERATURE, row="suction temperature", column="outlet"
    )
    suction_inlet_enthalpy: float | None = finding(
        "suction inlet enthalpy", Kind.SPECIFIC_ENTHALPY, row="suction enthalpy", column="inlet"
    )
    suction_outlet_enthalpy: float | None = finding(
        "suction outlet enthalpy", Kind.SPECIFIC_ENTHALPY, row="suction enthalpy", column="outlet"
    )


def run(conditions: Conditions, readings: Readings) -> Outcome:
    """Return the blank of one component's balance; Refusal where the readings give none."""
    outcome = Outcome(Findings())
    component = readings.component
    if component is None:
        raise Refusal("No component is named.", f"Name one of {', '.join(KINDS)}.", "component")
    _fitting(component, readings)
    setup = set_up(conditions, component, vars(readings), outcome)
    setup.network.solve()
    setup.explain(outcome)
    _say_what_is_missing(setup, outcome)
    report(conditions, setup, outcome)
    return outcome


def _fitting(component: str, readings: Readings) -> None:
    """Refuse amounts that cannot be."""
    for line in CHECK.reading_lines():
        value = getattr(readings, line.name)
        if value is None:
            continue
        if not line.meant(component):
            raise Refusal(
                f"The {TITLES[component]} takes no {line.label} in this balance.", f"Clear the {line.label}.", line.name
            )
        if line.kind in (Kind.MASS_FLOW, Kind.POWER, Kind.VOLUME_FLOW) and value < 0:
            raise Refusal(
                f"The {line.label} is typed with a minus; it is taken as an amount, its direction is "
                f"the {TITLES[component]}'s own.",
                "Type it without the minus, and check which side is the inlet.",
                line.name,
            )
        if line.kind in (Kind.MASS_FLOW, Kind.VOLUME_FLOW, Kind.FRACTION) and value == 0:
            raise Refusal(f"The {line.label} typed is zero.", "Leave it blank when it is wanted.", line.name)


def _say_what_is_missing(setup: Setup, outcome: Outcome) -> None:
    """Set `unresolved` when the balance has blanks left, or had none from the start."""
    blanks = setup.network.blanks(setup.balance)
    if not blanks:
        redundant = all(name not in setup.network.followed for name in setup.balance.solvers)
        if redundant and setup.component != "liquid-suction":
            _nothing_blank(setup, outcome)
        return
    names = [setup.label(name) for name in blanks]
    count = f"{len(names)} are blank: {', '.join(names[:-1])} and {names[-1]}" if names[1:] else f"{names[0]} is blank"
    outcome.unresolved = Refusal(
        f"{count}; one can be solved for." if names[1:] else f"The {count} and does not follow from the rest.",
        "Type all but the one you want to know.",
        next((name for name in blanks if name not in ("inlet", "outlet")), blanks[0]),
    )


def _nothing_blank(setup: Setup, outcome: Outcome) -> None:
    typed, found = setup.balance.sides(setup.network.known)
    if setup.component == "expansion":
        # A percentage of an enthalpy would hang on the datum.
        off = f"{(typed - found) / 1e3:+.2f} kJ/kg"
        message = f"Nothing is left blank: the outlet enthalpy typed is {off} off the inlet's."
    else:
        apart = f"{100 * (typed - found) / found:+.1f} % apart" if found else "apart"
        message = (
            f"Nothing is left blank: mass flow and states give the {setup.label(setup.amount)} already, and the figure "
            f"typed is {apart}."
        )
        setup.network.known[setup.amount] = found
    outcome.unresolved = Refusal(
        message, f"Clear the {setup.label(setup.amount)} to see what the others give, or another to solve for it.",
        setup.amount,
    )  # fmt: skip


CHECK = Check(
    "component",
    "component",
    "Heat or power, mass flow or a state of one component.",
    Readings,
    Findings,
    run,
)
