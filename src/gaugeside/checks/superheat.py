"""Superheat and subcooling from gauge pressures and pipe temperatures.

Superheat counts from the dew point, subcooling from the bubble point, each at the pressure of the place where
the pipe temperature is taken (EN 12900 and AHRI 540 rate compressors at dew points).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from gaugeside.checks.caution import (
    discharge_cautions,
    model_note,
    refrigerant_caution,
    suction_caution,
    uncertain_difference,
)
from gaugeside.checks.sheet import Check, Conditions, Outcome, finding, reading
from gaugeside.errors import OutOfRange, Refusal
from gaugeside.quantities import Kind

if TYPE_CHECKING:
    from gaugeside.refrigerants import Fluid, State


@dataclass(frozen=True)
class Readings:
    """What is typed; each pair is optional."""

    suction_pressure: float | None = reading("suction pressure", Kind.PRESSURE, "At the suction gauge.")
    suction_temperature: float | None = reading(
        "suction pipe", Kind.TEMPERATURE, "At the evaporator outlet; at the compressor for total superheat."
    )
    liquid_pressure: float | None = reading("liquid pressure", Kind.PRESSURE, "At the liquid line or receiver gauge.")
    liquid_temperature: float | None = reading(
        "liquid pipe", Kind.TEMPERATURE, "Liquid line where solid liquid matters, usually before the valve."
    )
    discharge_pressure: float | None = reading("discharge pressure", Kind.PRESSURE, "At the discharge gauge.")
    discharge_temperature: float | None = reading(
        "discharge pipe", Kind.TEMPERATURE, "Pipe close to the compressor's discharge."
    )
    suction_pressure_drop: float | None = reading(
        "suction drop", Kind.PRESSURE_DIFFERENCE, "From the pipe clamp to the suction gauge; added to the gauge."
    )
    liquid_pressure_drop: float | None = reading(
        "liquid drop", Kind.PRESSURE_DIFFERENCE, "From the liquid gauge to the pipe clamp; taken off the gauge."
    )


@dataclass
class Findings:
    """What follows, SI."""

    superheat: float | None = finding("superheat", Kind.TEMPERATURE_DIFFERENCE, main=True)
    subcooling: float | None = finding("subcooling", Kind.TEMPERATURE_DIFFERENCE, main=True)
    saturated_suction_temperature: float | None = finding("saturated suction", Kind.TEMPERATURE)
    saturated_liquid_temperature: float | None = finding("saturated liquid", Kind.TEMPERATURE)
    saturated_discharge_temperature: float | None = finding("saturated discharge", Kind.TEMPERATURE)
    discharge_superheat: float | None = finding("discharge superheat", Kind.TEMPERATURE_DIFFERENCE)
    pressure_ratio: float | None = finding("pressure ratio", Kind.RATIO)


def run(conditions: Conditions, readings: Readings) -> Outcome:
    """Return what the pairs typed give: SH = T - T_dew(p), SC = T_bubble(p) - T, ratio of absolute pressures."""
    if all(value is None for value in vars(readings).values()):
        raise Refusal(
            "No reading is typed.", "Type a pressure and the pipe temperature at the same place.", "suction_pressure"
        )
    outcome = Outcome(Findings())
    for place in (_suction, _liquid, _discharge):
        place(conditions, readings, outcome)
    found: Findings = outcome.findings
    if readings.suction_pressure is not None and readings.discharge_pressure is not None:
        found.pressure_ratio = readings.discharge_pressure / readings.suction_pressure
        outcome.remark("pressure_ratio", "absolute, at the gauges")
        if found.pressure_ratio < 1:
            outcome.caution("Discharge pressure is below suction: swapped?")
    discharge_cautions(conditions, outcome, readings.discharge_temperature, found.pressure_ratio)
    refrigerant_caution(conditions, outcome)
    model_note(conditions, outcome)
    return outcome


def _suction(conditions: Conditions, readings: Readings, outcome: Outcome) -> None:
    pressure = _at_clamp(outcome, readings, "suction", +1)
    if pressure is None:
        return
    # The gauge sits downstream of the clamp, where the pressure is lowest.
    suction_caution(conditions, outcome, min(pressure, readings.suction_pressure or pressure))
    dew = _saturated(conditions.fluid, conditions.fluid.dew_at_pressure, pressure, "suction_pressure", outcome)
    if dew is None:
        return
    found: Findings = outcome.findings
    found.saturated_suction_temperature = dew.temperature
    _say_which(conditions, outcome, "saturated_suction_temperature", "dew", dew, readings.suction_pressure_drop)
    if readings.suction_temperature is not None:
        found.superheat = readings.suction_temperature - dew.temperature
        outcome.remark("superheat", "above the dew point {dew}", dew=(dew.temperature, Kind.TEMPERATURE))
        if found.superheat < 0:
            outcome.remark("superheat", "BELOW the dew point {dew}", dew=(dew.temperature, Kind.TEMPERATURE))
            _impossible(outcome, "Superheat")
        uncertain_difference(conditions, outcome, "superheat", found.superheat)


def _liquid(conditions: Conditions, readings: Readings, outcome: Outcome) -> None:
    pressure = _at_clamp(outcome, readings, "liquid", -1)
    if pressure is None:
        return
    bubble = _saturated(conditions.fluid, conditions.fluid.bubble_at_pressure, pressure, "liquid_pressure", outcome)
    if bubble is None:
        return
    found: Findings = outcome.findings
    found.saturated_liquid_temperature = bubble.temperature
    _say_which(conditions, outcome, "saturated_liquid_temperature", "bubble", bubble, readings.liquid_pressure_drop)
    if readings.liquid_temperature is not None:
        found.subcooling = bubble.temperature - readings.liquid_temperature
        outcome.remark("subcooling", "below the bubble point {bubble}", bubble=(bubble.temperature, Kind.TEMPERATURE))
        if found.subcooling < 0:
            outcome.remark(
                "subcooling", "ABOVE the bubble point {bubble}", bubble=(bubble.temperature, Kind.TEMPERATURE)
            )
            _impossible(outcome, "Subcooling")
        uncertain_difference(conditions, outcome, "subcooling", found.subcooling)


def _discharge(conditions: Conditions, readings: Readings, outcome: Outcome) -> None:
    pressure = _at_clamp(outcome, readings, "discharge", 0)
    if pressure is None:
        return
    dew = _saturated(conditions.fluid, conditions.fluid.dew_at_pressure, pressure, "discharge_pressure", outcome)
    if dew is None:
        return
    found: Findings = outcome.findings
    found.saturated_discharge_temperature = dew.temperature
    _say_which(conditions, outcome, "saturated_discharge_temperature", "dew", dew, None)
    if readings.discharge_temperature is not None:
        found.discharge_superheat = readings.discharge_temperature - dew.temperature
        outcome.remark("discharge_superheat", "above the dew point {dew}", dew=(dew.temperature, Kind.TEMPERATURE))
        if found.discharge_superheat < 0:
            outcome.remark("discharge_superheat", "BELOW the dew point {dew}", dew=(dew.temperature, Kind.TEMPERATURE))
            _impossible(outcome, "Discharge superheat")


def _at_clamp(outcome: Outcome, readings: Readings, place: str, sign: int) -> float | None:
    """Return the absolute pressure [Pa] where the pipe temperature is taken, or None when no pressure is typed."""
    pressure: float | None = getattr(readings, f"{place}_pressure")
    drop: float | None = getattr(readings, f"{place}_pressure_drop", None)
    if pressure is None:
        alone = f"{place}_temperature" if getattr(readings, f"{place}_temperature") is not None else None
        alone = alone or (f"{place}_pressure_drop" if drop is not None else None)
        if alone is not None:
            outcome.unresolved = Refusal(
                f"The {alone.replace('_', ' ')} has no {place} pressure beside it.",
                f"Type the {place} pressure, or clear the {alone.split('_', 1)[1].replace('_', ' ')}.",
                f"{place}_pressure",
            )
        return None
    if drop is None:
        return pressure
    there = pressure + sign * drop
    if there <= 0:
        raise Refusal(
            f"The {place} pressure drop is larger than the pressure itself.",
            "Check the unit of the drop.",
            f"{place}_pressure_drop",
        )
    outcome.note(
        f"{place.capitalize()} pressure at the pipe clamp taken as {{there}}, gauge {'plus' if sign > 0 else 'less'} "
        "the drop typed.",
        there=(there, Kind.PRESSURE),
    )
    return there


def _saturated(
    fluid: Fluid, saturation: Callable[[float], State], pressure: float, name: str, outcome: Outcome
) -> State | None:
    """Return the saturated state, or None after saying why there is none."""
    try:
        return saturation(pressure)
    except OutOfRange as refusal:
        none = refusal
        if pressure >= fluid.critical_pressure and name != "suction_pressure":
            none = OutOfRange(refusal.message, "So there is no subcooling: type suction readings, or take a gas cooler "
                              "as a component, by pressure and outlet temperature.")  # fmt: skip
        outcome.no_finding = outcome.no_finding or none.about(name)
        place = name.split("_", 1)[0].capitalize()
        if pressure >= fluid.critical_pressure:
            what = (
                "so no superheat; check the reading, an evaporator works below it."
                if name == "suction_pressure"
                else "so no subcooling; the high side is a gas cooler, judged by its outlet temperature."
            )
            # Among the cautions, which stand first: whoever reads on looks for a subcooling that cannot be.
            outcome.caution(
                f"{place} pressure {{pressure}} is above the critical {{critical}}: there is no bubble or dew point, "
                f"{what}",
                pressure=(pressure, Kind.PRESSURE),
                critical=(fluid.critical_pressure, Kind.PRESSURE),
            )
            return None
        outcome.caution(f"{place}: {refusal.sentence()}".replace("{", "(").replace("}", ")"))
        return None


def _say_which(
    conditions: Conditions, outcome: Outcome, name: str, point: str, saturated: State, drop: float | None
) -> None:
    """Say which saturation point a temperature is, and for a zeotrope the mean with the other one.

    drop: between gauge and pipe clamp [Pa], None where the two are one place.
    """
    if conditions.refrigerant.nature != "zeotrope":
        outcome.remark(name, "at the pressure typed" if drop is None else "at the pipe clamp")
        return
    other = "bubble" if point == "dew" else "dew"
    find_other = conditions.fluid.bubble_at_pressure if point == "dew" else conditions.fluid.dew_at_pressure
    try:
        mean = (saturated.temperature + find_other(saturated.pressure).temperature) / 2
    except OutOfRange:
        # Beside the critical point one of the two may end before the other.
        outcome.remark(name, point)
        return
    outcome.remark(name, f"{point}; mean with {other} {{mean}}", mean=(mean, Kind.TEMPERATURE))


def _impossible(outcome: Outcome, what: str) -> None:
    outcome.caution(f"{what} < 0 cannot be: two-phase, sensor off, wrong refrigerant, gauge/abs.")


CHECK = Check(
    "superheat",
    "superheat",
    "Superheat, subcooling and saturated temperatures from pressures and pipe temperatures.",
    Readings,
    Findings,
    run,
    places=(
        ("suction_pressure", "suction_temperature", "suction_pressure_drop"),
        ("liquid_pressure", "liquid_temperature", "liquid_pressure_drop"),
        ("discharge_pressure", "discharge_temperature"),
    ),
)
