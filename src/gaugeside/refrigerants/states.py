"""What a state is, in which region it lies, and from where its enthalpy counts."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Region(StrEnum):
    """Where a state lies, in the trade's words."""

    SUBCOOLED = "subcooled liquid"
    SATURATED_LIQUID = "saturated liquid"
    TWO_PHASE = "saturated, two-phase"
    SATURATED_VAPOUR = "saturated vapour"
    SUPERHEATED = "superheated vapour"
    SUPERCRITICAL = "supercritical fluid"
    LIQUID_ABOVE_CRITICAL_PRESSURE = "liquid above critical"


class Datum(StrEnum):
    """The state at which enthalpy and entropy have an agreed value."""

    IIR = "iir"
    ASHRAE = "ashrae"
    NBP = "nbp"

    @property
    def description(self) -> str:
        """One line that names the values and the state."""
        return {
            Datum.IIR: "IIR: h = 200 kJ/kg, s = 1 kJ/(kg K), saturated liquid at 0 °C",
            Datum.ASHRAE: "ASHRAE: h = 0, s = 0, saturated liquid at -40 °C",
            Datum.NBP: "normal boiling point: h = 0, s = 0, saturated liquid at 101.325 kPa",
        }[self]


@dataclass(frozen=True, slots=True)
class State:
    """A state of a refrigerant; SI units, per kilogram, pressure absolute.

    pressure [Pa], temperature [K], enthalpy [J/kg], entropy [J/(kg K)], density [kg/m3];
    vapour_fraction by mass [kg/kg], None outside the two-phase region;
    isobaric_heat_capacity [J/(kg K)], None between bubble and dew.
    """

    pressure: float
    temperature: float
    enthalpy: float
    entropy: float
    density: float
    vapour_fraction: float | None
    region: Region
    isobaric_heat_capacity: float | None
