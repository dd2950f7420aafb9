"""The usual cautions, shown where they apply. Limits are common practice; local codes come first."""

from __future__ import annotations

from gaugeside.checks.sheet import Conditions, Outcome
from gaugeside.quantities import Kind

# Common practice for single-stage machines; the maker's figures take precedence.
DISCHARGE_CAUTION, DISCHARGE_ALARM = 378.15, 393.15
PRESSURE_RATIO_CAUTION = 8.0

_FLAMMABLE = {
    "A2L": "mildly flammable (A2L)",
    "A2": "flammable (A2)",
    "A3": "highly flammable (A3)",
    "B2L": "toxic and mildly flammable (B2L)",
    "B2": "toxic and flammable (B2)",
    "B3": "toxic and highly flammable (B3)",
    "B1": "toxic (B1)",
}


def refrigerant_caution(conditions: Conditions, outcome: Outcome) -> None:
    """Say once what the safety class asks of a person (ASHRAE 34, ISO 817)."""
    refrigerant = conditions.refrigerant
    words = _FLAMMABLE.get(refrigerant.safety_class)
    if words:
        outcome.caution(f"{refrigerant.designation} is {words}: ventilate, no ignition source, follow local code.")
    elif refrigerant.designation == "R-744":
        outcome.caution("R-744 stands at high pressure and displaces air in closed rooms: vent and enter with care.")
    elif not refrigerant.safety_class:
        outcome.caution(f"No safety class of {refrigerant.designation} is known here: treat it as flammable and toxic.")


def suction_caution(conditions: Conditions, outcome: Outcome, pressure: float) -> None:
    """Say when a suction pressure [Pa] lies below the atmosphere."""
    if pressure < conditions.site.atmosphere:
        outcome.caution(
            "Suction is below the atmosphere ({atmosphere}): a leak draws in air and moisture.",
            atmosphere=(conditions.site.atmosphere, Kind.PRESSURE),
        )


def discharge_cautions(outcome: Outcome, temperature: float | None, ratio: float | None) -> None:
    """Say when a discharge pipe [K] is hot or a single stage's pressure ratio high (common practice)."""
    if temperature is not None and temperature >= DISCHARGE_CAUTION:
        word = "alarm" if temperature >= DISCHARGE_ALARM else "caution"
        limit = DISCHARGE_ALARM if temperature >= DISCHARGE_ALARM else DISCHARGE_CAUTION
        outcome.caution(
            f"Discharge pipe is at or above the usual {word} of {{limit}} (common practice): oil and valves suffer.",
            limit=(limit, Kind.TEMPERATURE),
        )
    if ratio is not None and ratio > PRESSURE_RATIO_CAUTION:
        outcome.caution("Pressure ratio above 8 is high for a single stage (common practice).")


def model_note(conditions: Conditions, outcome: Outcome) -> None:
    """Say how far the property model itself may be off, where that is worth knowing (0.1 K and more)."""
    refrigerant = conditions.refrigerant
    if refrigerant.model_uncertainty >= 0.1:
        outcome.note(
            f"The property model itself is uncertain by about {{model}}: {refrigerant.model_uncertainty_reason}.",
            model=(refrigerant.model_uncertainty, Kind.TEMPERATURE_DIFFERENCE),
        )
