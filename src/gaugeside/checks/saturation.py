"""Saturation: one pressure or one temperature gives the other, and what belongs to it."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from gaugeside.checks.caution import model_note, refrigerant_caution
from gaugeside.checks.sheet import Check, Conditions, Outcome, Table, either, finding
from gaugeside.errors import OutOfRange, Refusal
from gaugeside.quantities import Kind

if TYPE_CHECKING:
    from gaugeside.refrigerants import Fluid, State


@dataclass(frozen=True)
class Readings:
    """What is typed."""

    reading: Mapping[str, float] | None = either(
        "pressure or temp.",
        (Kind.PRESSURE, Kind.TEMPERATURE),
        "A pressure gives temperatures; a temperature, pressures.",
        positional=True,
    )


@dataclass
class Findings:
    """What follows, SI."""

    bubble_temperature: float | None = finding(
        "bubble temperature", Kind.TEMPERATURE, main=True, row="temperature", column="bubble"
    )
    dew_temperature: float | None = finding(
        "dew temperature", Kind.TEMPERATURE, main=True, row="temperature", column="dew"
    )
    glide: float | None = finding("glide", Kind.TEMPERATURE_DIFFERENCE, row="temperature", column="beside")
    bubble_pressure: float | None = finding(
        "bubble pressure", Kind.PRESSURE, main=True, row="pressure", column="bubble"
    )
    dew_pressure: float | None = finding("dew pressure", Kind.PRESSURE, main=True, row="pressure", column="dew")
    mean_temperature: float | None = finding("mean", Kind.TEMPERATURE, row="pressure", column="beside")
    liquid_density: float | None = finding("liquid density", Kind.DENSITY, row="density", column="bubble")
    vapour_density: float | None = finding("vapour density", Kind.DENSITY, row="density", column="dew")
    liquid_enthalpy: float | None = finding("liquid enthalpy", Kind.SPECIFIC_ENTHALPY, row="enthalpy", column="bubble")
    vapour_enthalpy: float | None = finding("vapour enthalpy", Kind.SPECIFIC_ENTHALPY, row="enthalpy", column="dew")
    latent_heat: float | None = finding("latent heat", Kind.SPECIFIC_ENTHALPY, row="enthalpy", column="beside")


def run(conditions: Conditions, readings: Readings) -> Outcome:
    """Return saturation at the pressure or the temperature given; Refusal where there is none.

    At a pressure: the bubble and dew temperatures there, glide = dew - bubble. At a temperature: the bubble
    and dew pressures there; glide, mean and latent heat then belong to the dew pressure.
    """
    given = readings.reading
    if not given:
        raise Refusal("Nothing is typed.", "Type one pressure or one temperature.", "reading")
    outcome = Outcome(Findings())
    try:
        bubble, dew, bubble_there = _saturated(conditions.fluid, given)
    except Refusal as refusal:
        raise refusal.about("reading") from None
    _fill(outcome, bubble, dew, bubble_there)
    _explain(conditions, outcome, "pressure" in given)
    outcome.tables.append(_neighbours(conditions, dew.temperature))
    refrigerant_caution(conditions, outcome)
    return outcome


def _saturated(fluid: Fluid, given: Mapping[str, float]) -> tuple[State, State, State]:
    """Return bubble and dew point, and the bubble point at the dew point's pressure."""
    if "pressure" in given:
        bubble = fluid.bubble_at_pressure(given["pressure"])
        return bubble, fluid.dew_at_pressure(given["pressure"]), bubble
    temperature = given["temperature"]
    bubble, dew = fluid.bubble_at_temperature(temperature), fluid.dew_at_temperature(temperature)
    return bubble, dew, fluid.bubble_at_pressure(dew.pressure)


def _fill(outcome: Outcome, bubble: State, dew: State, bubble_there: State) -> None:
    found: Findings = outcome.findings
    found.bubble_temperature, found.dew_temperature = bubble.temperature, dew.temperature
    found.bubble_pressure, found.dew_pressure = bubble.pressure, dew.pressure
    found.glide = dew.temperature - bubble_there.temperature
    found.mean_temperature = (dew.temperature + bubble_there.temperature) / 2
    found.latent_heat = dew.enthalpy - bubble_there.enthalpy
    found.liquid_density, found.vapour_density = bubble.density, dew.density
    found.liquid_enthalpy, found.vapour_enthalpy = bubble.enthalpy, dew.enthalpy


def _explain(conditions: Conditions, outcome: Outcome, by_pressure: bool) -> None:
    found: Findings = outcome.findings
    if conditions.refrigerant.nature == "zeotrope":
        outcome.note("Count subcooling from the bubble point, superheat from the dew point; the mean is for coils.")
        if not by_pressure:
            for name in ("glide", "mean_temperature", "latent_heat"):
                outcome.remark(name, "at the dew pressure")
    elif abs(found.glide or 0.0) < 1e-6:
        found.glide = 0.0
    outcome.note(f"Enthalpies: {conditions.fluid.datum_note}.")
    model_note(conditions, outcome)


def _neighbours(conditions: Conditions, temperature: float) -> Table:
    """Return the table's rows around a temperature [K] at whole degrees of the reader's scale."""
    origin, step = conditions.grid
    nearest = round((temperature - origin) / step)
    rows = []
    for offset in (-2, -1, 0, 1, 2):
        at = origin + (nearest + offset) * step
        bubble = _or_nan(conditions.fluid.bubble_at_temperature, at)
        dew = _or_nan(conditions.fluid.dew_at_temperature, at)
        if not math.isnan(bubble) and not math.isnan(dew):
            rows.append((at, bubble, dew))
    marked = next((i for i, row in enumerate(rows) if abs(row[0] - temperature) < 0.005), None)
    columns = (("temperature", Kind.TEMPERATURE), ("bubble", Kind.PRESSURE), ("dew", Kind.PRESSURE))
    return Table("neighbouring rows", columns, tuple(rows), marked)


def _or_nan(saturation: Callable[[float], State], temperature: float) -> float:
    try:
        return saturation(temperature).pressure
    except OutOfRange:
        return math.nan


CHECK = Check(
    "saturation",
    "saturation",
    "One pressure or one temperature gives the other.",
    Readings,
    Findings,
    run,
)
