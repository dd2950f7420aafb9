"""The one door to the property library: its import, its fluids, its input pairs."""

from __future__ import annotations

import contextlib
import ctypes
import os
from collections.abc import Iterator, Sequence
from typing import Any


def _flush_c_output() -> None:
    """Empty the buffers of C, which hold a line back until the process ends when output goes to a pipe."""
    with contextlib.suppress(OSError, AttributeError, TypeError):
        ctypes.CDLL(None).fflush(None)


@contextlib.contextmanager
def _standard_output_shut() -> Iterator[None]:
    """Send file descriptor 1 nowhere meanwhile.

    The library prints a line from C++ when its tables are off; that line must reach neither the
    screen nor the JSON of a one-shot command. Python's own buffer is not touched.
    """
    try:
        kept = os.dup(1)
    except OSError:  # started with standard output closed
        yield
        return
    nowhere = os.open(os.devnull, os.O_WRONLY)
    _flush_c_output()
    try:
        os.dup2(nowhere, 1)
        yield
    finally:
        _flush_c_output()
        os.dup2(kept, 1)
        os.close(kept)
        os.close(nowhere)


# The tables speed up single saturation calls a thousandth of a second at the price of two seconds at start.
os.environ.setdefault("COOLPROP_DISABLE_SUPERANCILLARIES_ENTIRELY", "1")
with _standard_output_shut():
    import CoolProp
    from CoolProp.CoolProp import PyGuessesStructure as Guesses

_coolprop: Any = CoolProp  # the library carries types only in part

VERSION: str = f"CoolProp {_coolprop.__version__}"

DENSITY_TEMPERATURE: int = _coolprop.DmolarT_INPUTS
TEMPERATURE_QUALITY: int = _coolprop.QT_INPUTS
PRESSURE_QUALITY: int = _coolprop.PQ_INPUTS
PRESSURE_TEMPERATURE: int = _coolprop.PT_INPUTS
ENTHALPY_PRESSURE: int = _coolprop.HmassP_INPUTS
PRESSURE_ENTROPY: int = _coolprop.PSmass_INPUTS
P: int = _coolprop.iP
D: int = _coolprop.iDmolar
T: int = _coolprop.iT
H: int = _coolprop.iHmolar
S: int = _coolprop.iSmolar
GAS: int = _coolprop.iphase_gas
LIQUID: int = _coolprop.iphase_liquid

__all__ = ["VERSION", "Guesses", "components", "open_state"]

Library = Any
"""An AbstractState of the library, which carries no type information."""


def open_state(fluid: str, mass_fractions: Sequence[float] | None = None) -> Library:
    """Return a new state of the library.

    fluid: name in the library, components of a blend joined by `&`.
    mass_fractions: of the components when the library does not know the blend by itself [kg/kg].
    Raises ValueError, with the library's words, when it has no model.
    """
    state = _coolprop.AbstractState("HEOS", fluid)
    if mass_fractions is not None:
        state.set_mass_fractions(list(mass_fractions))
    return state


def components(state: Library) -> list[float]:
    """Return the mole fractions of the components, [1.0] for a pure fluid [mol/mol]."""
    fractions = [float(x) for x in state.get_mole_fractions()]
    return fractions or [1.0]
