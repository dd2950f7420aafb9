"""Mass flow, heats and power of a whole machine: from which reading each comes, and whether they agree."""

from __future__ import annotations

import statistics
from collections.abc import Mapping
from dataclasses import dataclass, field

from gaugeside.checks.compressor_map import SUPERHEAT_FACTOR, CompressorMap
from gaugeside.checks.machine_circuit import Circuit
from gaugeside.checks.sheet import Conditions, Outcome, Remark
from gaugeside.errors import Refusal
from gaugeside.quantities import Kind

# Of the heat balance (common practice).
CLOSURE_LIMIT = 0.1


@dataclass
class Flows:
    """Mass flow [kg/s], heats and powers [W] of a machine.

    sources: finding -> the words for where it came from. closure: (Q_L + W - Q_H) / Q_H of redundant readings.
    supplied: the Q_L + W of the closure [W], with what else enters and leaves; supplied_words: its parts in words.
    estimates: mass flow by source, each from readings of its own.
    """

    mass_flow: float | None = None
    absorbed: float | None = None
    rejected: float | None = None
    power: float | None = None
    electrical: float | None = None
    shell_loss: float = 0.0
    volumetric_efficiency: float | None = None
    closure: float | None = None
    supplied: float = 0.0
    supplied_words: str = ""
    sources: dict[str, str] = field(default_factory=dict)
    estimates: dict[str, float] = field(default_factory=dict)
    lacking: list[str] = field(default_factory=list)

    def missing_words(self) -> str:
        """Return what would fix the mass flow, as a sentence; empty when it is known."""
        if self.mass_flow is not None:
            return ""
        return (
            "No mass flow: type a flow meter's reading, the electrical power with its drive, displacement with "
            "volumetric efficiency, or a heat measured outside the circuit."
        )


def balance(
    conditions: Conditions, circuit: Circuit, typed: Mapping[str, float], drive: str | None, outcome: Outcome
) -> Flows:
    """Return the flows that the readings give; assumptions become notes of `outcome`, disagreements cautions."""
    flows = Flows(electrical=typed.get("electrical_power"), shell_loss=typed.get("shell_loss", 0.0))
    _power(flows, typed, drive, outcome)
    _estimate(conditions, flows, circuit, typed, outcome)
    _choose(flows, circuit, typed)
    _from_flow(flows, circuit, typed)
    _from_pairs(flows, typed, circuit, outcome)
    _electrical(flows, typed, drive)
    _volumetric(flows, circuit, typed)
    _closure(flows, circuit, typed)
    _disagreements(flows, outcome)
    return flows


def _power(flows: Flows, typed: Mapping[str, float], drive: str | None, outcome: Outcome) -> None:
    """Find the power that reaches the refrigerant from the electrical power and the drive."""
    electrical, efficiency = typed.get("electrical_power"), typed.get("motor_efficiency")
    if efficiency is not None and drive != "open":
        raise Refusal(
            "A motor efficiency counts only for an open drive; a hermetic motor's losses enter the refrigerant.",
            "Choose the open drive, or clear the motor efficiency.",
            "motor_efficiency",
        )
    if electrical is None:
        return
    if drive is None:
        raise Refusal(
            "The electrical power alone does not say how much of it reaches the refrigerant.",
            "Name the drive: hermetic, or open with its motor efficiency.",
            "drive",
        )
    if drive == "hermetic":
        flows.power = electrical
        flows.sources["power_to_refrigerant"] = "all of the electrical power"
        outcome.note("Hermetic: the motor's electrical power enters the refrigerant whole.")
    elif efficiency is not None:
        flows.power = electrical * efficiency
        flows.sources["power_to_refrigerant"] = "electrical x motor efficiency"
    else:
        outcome.note("Open drive without a motor efficiency: how much power reaches the refrigerant is not known.")
    if flows.power is not None and flows.shell_loss >= flows.power:
        raise Refusal("The shell loss is not below the power.", "Check both figures and their units.", "shell_loss")


def _estimate(
    conditions: Conditions, flows: Flows, circuit: Circuit, typed: Mapping[str, float], outcome: Outcome
) -> None:
    """Collect every mass flow the readings give, the most trusted first."""
    suction = circuit.states.get("suction")

    def divided(source: str, amount: float | None, difference: float | None) -> None:
        if amount is not None and difference is not None and amount > 0:
            if difference > 0:
                flows.estimates[source] = amount / difference
            else:
                outcome.caution(f"No mass flow from the {source}: the enthalpies there run the wrong way round.")

    if "mass_flow" in typed:
        flows.estimates["flow meter"] = typed["mass_flow"]
    divided("heat absorbed", typed.get("heat_absorbed"), circuit.refrigerating_effect)
    divided("heat rejected", typed.get("heat_rejected"), circuit.heating_effect)
    divided("power", None if flows.power is None else flows.power - flows.shell_loss, circuit.work)
    displacement, efficiency = typed.get("displacement"), typed.get("volumetric_efficiency")
    if suction is not None and displacement is not None and efficiency is not None:
        flows.estimates["displacement"] = displacement * efficiency * suction.density
    if conditions.compressor is not None:
        _by_polynomial(conditions, conditions.compressor, flows, circuit, outcome)


def _by_polynomial(
    conditions: Conditions, machine: CompressorMap, flows: Flows, circuit: Circuit, outcome: Outcome
) -> None:
    """Add the mass flow of the machine's own polynomial, corrected for its suction gas."""
    if circuit.evaporating is None or circuit.condensing is None:
        return
    low, high = circuit.evaporating, circuit.condensing
    if machine.outside(low, high):
        outcome.caution(f"The dew temperatures lie outside the range of the polynomial of {machine.tag}.")
    if not machine.mass_flow:
        return
    rated = machine.rated_mass_flow(low, high)
    suction = circuit.states.get("suction")
    warm = machine.rated_suction_temperature
    if warm is None and machine.rated_superheat is not None:
        warm = low + machine.rated_superheat
    if suction is not None and warm is not None and warm > low:
        at_rating = conditions.fluid.state_pt(suction.pressure, warm)
        rated *= 1 + SUPERHEAT_FACTOR * (suction.density / at_rating.density - 1)
        outcome.note(
            "Polynomial mass flow corrected from the rated suction gas {rated} by density with a factor of 0.75 "
            "(Dabiri and Rice 1981).",
            rated=(warm, Kind.TEMPERATURE),
        )
    else:
        outcome.note("Polynomial mass flow without correction: its rated suction gas or the suction state is missing.")
    flows.estimates["polynomial"] = rated


_WORDS = {
    "flow meter": "as typed",
    "heat absorbed": "from the heat absorbed",
    "heat rejected": "from the heat rejected",
    "power": "from power and enthalpy rise",
    "displacement": "from the displacement",
    "polynomial": "from the polynomial",
}


def _choose(flows: Flows, circuit: Circuit, typed: Mapping[str, float]) -> None:
    for source, value in flows.estimates.items():
        flows.mass_flow = value
        flows.sources["mass_flow"] = _WORDS[source]
        return


def _from_flow(flows: Flows, circuit: Circuit, typed: Mapping[str, float]) -> None:
    """Fill heats and power: as typed where typed, else mass flow times enthalpy difference."""
    flows.absorbed, flows.rejected = typed.get("heat_absorbed"), typed.get("heat_rejected")
    for name, finding in (("absorbed", "heat_absorbed"), ("rejected", "heat_rejected")):
        if finding in typed:
            flows.sources[finding] = "as typed"
        difference = circuit.refrigerating_effect if name == "absorbed" else circuit.heating_effect
        if getattr(flows, name) is None and flows.mass_flow is not None and difference is not None:
            setattr(flows, name, flows.mass_flow * difference)
            flows.sources[finding] = "flow times enthalpy change"
    if flows.power is None and flows.mass_flow is not None and circuit.work is not None:
        flows.power = flows.mass_flow * circuit.work + flows.shell_loss
        flows.sources["power_to_refrigerant"] = "flow times enthalpy change"


def _from_pairs(flows: Flows, typed: Mapping[str, float], circuit: Circuit, outcome: Outcome) -> None:
    """Fill the last of Q_H = Q_L + W from the other two, less what the shell loses, plus what the line gains."""
    gain = (flows.mass_flow or 0.0) * circuit.line_gain
    extra = gain - flows.shell_loss
    words = "balance, Q_H = Q_L + W"
    before = (flows.absorbed, flows.rejected, flows.power)
    if flows.absorbed is None and flows.rejected is not None and flows.power is not None:
        effect, entering = circuit.refrigerating_effect or 0.0, flows.rejected - flows.power + flows.shell_loss
        if flows.mass_flow is None and min(effect, effect + circuit.line_gain, entering) > 0:
            # Evaporator and suction line share what enters, in the ratio of their enthalpy changes.
            flows.mass_flow = entering / (effect + circuit.line_gain)
            flows.sources["mass_flow"] = "from the balance"
            extra = flows.mass_flow * circuit.line_gain - flows.shell_loss
        flows.absorbed = flows.rejected - flows.power - extra
        flows.sources["heat_absorbed"] = words
    elif flows.rejected is None and flows.absorbed is not None and flows.power is not None:
        flows.rejected = flows.absorbed + flows.power + extra
        flows.sources["heat_rejected"] = words
    elif flows.power is None and flows.absorbed is not None and flows.rejected is not None:
        flows.power = flows.rejected - flows.absorbed - extra
        flows.sources["power_to_refrigerant"] = words
    if before != (flows.absorbed, flows.rejected, flows.power):
        outcome.note("Balance of the whole machine: no other heat flows than those typed.")
        if min(flows.absorbed or 0.0, flows.rejected or 0.0, flows.power or 0.0) < 0:
            outcome.caution("One of the three comes out below zero: the readings typed contradict each other.")


def _electrical(flows: Flows, typed: Mapping[str, float], drive: str | None) -> None:
    if flows.electrical is None and flows.power is not None:
        if drive == "hermetic":
            flows.electrical = flows.power
            flows.sources["electrical_power"] = "as hermetic, the same power"
        elif drive == "open" and "motor_efficiency" in typed:
            flows.electrical = flows.power / typed["motor_efficiency"]
            flows.sources["electrical_power"] = "power over motor efficiency"
    elif flows.electrical is not None:
        flows.sources["electrical_power"] = "as typed"


def _volumetric(flows: Flows, circuit: Circuit, typed: Mapping[str, float]) -> None:
    suction, displacement = circuit.states.get("suction"), typed.get("displacement")
    if suction is not None and displacement is not None and flows.mass_flow is not None:
        flows.volumetric_efficiency = flows.mass_flow / (displacement * suction.density)


def _closure(flows: Flows, circuit: Circuit, typed: Mapping[str, float]) -> None:
    """Compare Q_L + W with Q_H where the three do not follow from each other (form of AHRI 550/590)."""
    independent = {name for name in ("heat_absorbed", "heat_rejected", "electrical_power") if name in typed}
    if flows.power is None or flows.absorbed is None or flows.rejected is None or not flows.rejected:
        return
    from_balance = [name for name, words in flows.sources.items() if words.startswith("balance")]
    if from_balance or not independent or (len(flows.estimates) < 2 and len(independent) < 3):
        return
    gain = (flows.mass_flow or 0.0) * circuit.line_gain
    flows.supplied = flows.absorbed + gain + flows.power - flows.shell_loss
    flows.supplied_words = (
        f"absorbed{' + suction line' if gain else ''} + power{' less shell loss' if flows.shell_loss else ''}"
    )
    flows.closure = (flows.supplied - flows.rejected) / flows.rejected


def _disagreements(flows: Flows, outcome: Outcome) -> None:
    """Say how far heats and mass flows of different readings are apart, and which one fits worst."""
    apart = _apart(flows, outcome)
    if flows.closure is None or flows.rejected is None or abs(flows.closure) <= CLOSURE_LIMIT:
        if apart:
            outcome.caution(apart)
        return
    told = (
        f"The heat balance does not close within {100 * CLOSURE_LIMIT:.0f} % (common practice), a reading is wrong: "
        f"{flows.supplied_words} {{supplied}}, rejected {{rejected}}: off by {100 * abs(flows.closure):.0f} %."
    )
    values = {"supplied": (flows.supplied, Kind.POWER), "rejected": (flows.rejected, Kind.POWER)}
    # Before all others: whatever else the sheet says rests on these readings.
    outcome.cautions.insert(0, Remark(f"{told} {apart}".rstrip(), values))


def _apart(flows: Flows, outcome: Outcome) -> str:
    """Note the mass flow of every reading; return which one is off, as a sentence, empty where they agree."""
    if len(flows.estimates) < 2:
        return ""
    middle = statistics.median(flows.estimates.values())
    apart = {source: 100 * (value - middle) / middle for source, value in flows.estimates.items()}
    for source, value in flows.estimates.items():
        outcome.note(f"Mass flow {_WORDS[source]}: {{value}}.", value=(value, Kind.MASS_FLOW))
    source = max(apart, key=lambda name: abs(apart[name]))
    spread = max(flows.estimates.values()) / min(flows.estimates.values()) - 1
    if spread <= 0.05:
        return ""
    if len(flows.estimates) == 2:
        return f"The two mass flows are {100 * spread:.0f} % apart; two alone do not show which is wrong."
    return f"Fits worst with the rest: the {source}, {apart[source]:+.0f} % from the middle."
