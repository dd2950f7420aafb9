"""Refrigerants: the catalogue, and the states of each. The only room that knows the property library.

Importing this package reads no property library; opening a fluid does.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from .catalogue import Refrigerant, all_refrigerants, find, search
from .own import load_own
from .states import Datum, Region, State

if TYPE_CHECKING:
    from .fluid import Fluid as Fluid

__all__ = [
    "Datum",
    "Refrigerant",
    "Region",
    "State",
    "all_refrigerants",
    "find",
    "load_own",
    "open_fluid",
    "search",
]


def open_fluid(refrigerant: Refrigerant, datum: Datum = Datum.IIR) -> Fluid:
    """Return the refrigerant ready to be asked, the same object for the same refrigerant and datum.

    Raises NotModelled when no property model is available, OutOfRange when the datum does not exist for it.
    """
    from .fluid import open_fluid as opened  # the property library is loaded here and not before

    return opened(refrigerant, datum)


def __getattr__(name: str) -> Any:
    if name == "Fluid":
        from .fluid import Fluid as Fluid

        return Fluid
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
