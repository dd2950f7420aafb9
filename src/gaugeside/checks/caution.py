"""The usual cautions, shown where they apply. Limits are common practice; local codes come first."""

from __future__ import annotations

import math

from gaugeside.checks.sheet import Conditions, Outcome, Remark
from gaugeside.quantities import Kind
from gaugeside.refrigerants import Refrigerant

# Common practice for single-stage machines; the maker's figures take precedence.
DISCHARGE_CAUTION, DISCHARGE_ALARM = 378.15, 393.15
PRESSURE_RATIO_CAUTION = 8.0
# Of a pipe clamp, either way [K] (common practice).
CLAMP = 1.0
# Machines for these are often built for a hotter discharge (common practice).
_RUNS_HOT = ("R-717", "R-744")

_HARM = {
    "A2L": "mildly flammable (A2L). Ventilate, no ignition",
    "A2": "flammable (A2). Ventilate, no ignition",
    "A3": "highly flammable (A3). Ventilate, no ignition",
    "B2L": "toxic, mildly flammable (B2L). Ventilate, no ignition",
    "B2": "toxic, flammable (B2). Ventilate, no ignition",
    "B3": "toxic, highly flammable (B3). Ventilate, no ignition",
    "B1": "toxic (B1). Ventilate",
}


def refrigerant_caution(conditions: Conditions, outcome: Outcome) -> None:
    """Say once what the refrigerant itself asks of a person."""
    text, is_urgent = standing_caution(conditions.refrigerant)
    if is_urgent:
        outcome.caution(text)


def standing_caution(refrigerant: Refrigerant) -> tuple[str, bool]:
    """Return what a refrigerant asks of a person whatever is read, and whether that is more than of every one.

    By its safety class (ASHRAE 34, ISO 817); a published designation leaves it within 80 characters.
    """
    name = refrigerant.designation
    harm = _HARM.get(refrigerant.safety_class)
    if harm:
        return f"{name}: {harm}, follow local code.", True
    if name == "R-744":
        return "R-744: very high pressure; displaces air in closed rooms. Enter with care.", True
    if not refrigerant.safety_class:
        return f"{name}: no safety class is known here. Treat it as flammable and toxic.", True
    return f"{name}: displaces air in closed rooms; its liquid freezes skin and eyes.", False


def suction_caution(conditions: Conditions, outcome: Outcome, pressure: float) -> None:
    """Say when a suction pressure [Pa] lies below the atmosphere."""
    if pressure < conditions.site.atmosphere:
        outcome.caution(
            "Suction is below the atmosphere ({atmosphere}): a leak draws in air and moisture.",
            atmosphere=(conditions.site.atmosphere, Kind.PRESSURE),
        )


def discharge_cautions(
    conditions: Conditions, outcome: Outcome, temperature: float | None, ratio: float | None
) -> None:
    """Say when a discharge pipe [K] is hot or a single stage's pressure ratio high (common practice)."""
    if temperature is not None and temperature >= DISCHARGE_CAUTION:
        word = "alarm" if temperature >= DISCHARGE_ALARM else "caution"
        limit = DISCHARGE_ALARM if temperature >= DISCHARGE_ALARM else DISCHARGE_CAUTION
        text = f"Discharge pipe is at or above the usual {word} of {{limit}} (common practice): oil and valves suffer."
        if conditions.refrigerant.designation in _RUNS_HOT:
            name = conditions.refrigerant.designation
            text = f"Discharge at {{limit}} or more (common practice). {name}: maker's limit counts."
        outcome.caution(text, limit=(limit, Kind.TEMPERATURE))
    if ratio is not None and ratio > PRESSURE_RATIO_CAUTION:
        outcome.caution("Pressure ratio above 8 is high for a single stage (common practice).")


def impossible_efficiency(outcome: Outcome, name: str, or_else: str = "") -> None:
    """Say of an efficiency above one that it cannot be; or_else: what there may be instead of a wrong reading."""
    words = name.replace("_", " ").replace("second law", "second-law").capitalize()
    outcome.remark(name, "above 100 % cannot be")
    outcome.caution(f"{words} above 100 %: a reading is wrong{or_else}.")


def uncertain_difference(conditions: Conditions, outcome: Outcome, name: str, difference: float | None) -> None:
    """Say when a superheat or subcooling [K] is no larger than clamp and property model together may be off.

    Root of the sum of squares of both, JCGM 100:2008. A value below zero has words of its own.
    """
    doubt = math.hypot(CLAMP, conditions.refrigerant.model_uncertainty)
    if difference is None or not 0 <= difference <= doubt:
        return
    what = "vapour" if name == "subcooling" else "liquid"
    outcome.caution(
        f"{name.capitalize()} within clamp and model, ±{{doubt}} (common practice): {what} possible.",
        doubt=(doubt, Kind.TEMPERATURE_DIFFERENCE),
    )


def model_note(conditions: Conditions, outcome: Outcome) -> None:
    """Say how far the property model itself may be off, where that is worth knowing."""
    remark = model_remark(conditions.refrigerant)
    if remark is not None:
        outcome.notes.append(remark)


def model_remark(refrigerant: Refrigerant) -> Remark | None:
    """Return how far the property model of a refrigerant may be off, from 0.1 K on."""
    if refrigerant.model_uncertainty < 0.1:
        return None
    return Remark(
        f"The model itself is uncertain by about {{model}}: {refrigerant.model_uncertainty_reason}.",
        {"model": (refrigerant.model_uncertainty, Kind.TEMPERATURE_DIFFERENCE)},
    )
