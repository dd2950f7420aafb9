"""From where enthalpy and entropy count: the shift between the library's own datum and an agreed one."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from ..errors import OutOfRange
from .limits import MARGIN, celsius
from .states import Datum, State

if TYPE_CHECKING:
    from .fluid import Fluid

NORMAL_PRESSURE = 101_325.0
ICE_POINT = 273.15
# Values of the IIR datum [J/kg] and [J/(kg K)].
IIR_ENTHALPY = 200e3
IIR_ENTROPY = 1e3
IIR_VALUES = "h = 200 kJ/kg, s = 1 kJ/(kg K)"


def shifts(fluid: Fluid, datum: Datum) -> tuple[str, float, float]:
    """Return what the datum is in words, and what to add to enthalpy [J/kg] and entropy [J/(kg K)].

    fluid: as yet in the library's datum. Raises OutOfRange where the datum does not exist for it.
    """
    note = datum.description
    if datum is Datum.NBP:
        why = "its model has no liquid at 101.325 kPa"
        state = _agreed(fluid, datum, lambda: fluid.bubble_at_pressure(NORMAL_PRESSURE), why)
    elif datum is Datum.ASHRAE:
        why = "its model has no liquid at -40 °C"
        state = _agreed(fluid, datum, lambda: fluid.bubble_at_temperature(ICE_POINT - 40.0), why)
    else:
        note, state = _iir(fluid)
        return note, IIR_ENTHALPY - state.enthalpy, IIR_ENTROPY - state.entropy
    return note, -state.enthalpy, -state.entropy


def _iir(fluid: Fluid) -> tuple[str, State]:
    """The IIR datum, moved to where there is liquid for the few fluids that have none at 0 °C."""
    name = fluid.refrigerant.designation
    if fluid.critical_temperature - MARGIN < ICE_POINT:
        note = f"{IIR_VALUES}, saturated liquid at 101.325 kPa: {name} has none at 0 °C"
        return note, fluid.bubble_at_pressure(NORMAL_PRESSURE)
    lowest = fluid.minimum_temperature
    if lowest > ICE_POINT:
        note = f"{IIR_VALUES}, saturated liquid at {celsius(lowest)}, its lowest temperature: {name} has none at 0 °C"
        return note, fluid.bubble_at_temperature(lowest)
    return Datum.IIR.description, fluid.bubble_at_temperature(ICE_POINT)


def _agreed(fluid: Fluid, datum: Datum, state: Callable[[], State], why: str) -> State:
    try:
        return state()
    except OutOfRange as error:
        raise OutOfRange(
            f"The datum “{datum.description}” does not exist for {fluid.refrigerant.designation}: {why}.",
            "Choose the IIR datum.",
        ) from error
