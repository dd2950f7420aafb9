"""The pocket table: bubble and dew over a range of temperatures or pressures."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gaugeside.errors import Refusal
from gaugeside.quantities import Kind
from gaugeside.refrigerants import find

MOST_ROWS = 20_000
# How far past the end, as a part of the step, a last row may lie through rounding alone.
_ROUNDING = 1e-9


@dataclass(frozen=True)
class PocketTable:
    """Rows of SI numbers: the temperature [K] or pressure [Pa] asked for, then bubble and dew of the other kind.

    by: Kind.TEMPERATURE or Kind.PRESSURE, the kind of the first column.
    """

    refrigerant: str
    by: Kind
    rows: tuple[tuple[float, float, float], ...]

    @property
    def names(self) -> tuple[str, str, str]:
        """Names of the columns, as in JSON."""
        if self.by is Kind.TEMPERATURE:
            return "temperature", "bubble_pressure", "dew_pressure"
        return "pressure", "bubble_temperature", "dew_temperature"

    @property
    def other(self) -> Kind:
        """Kind of the second and third column."""
        return Kind.PRESSURE if self.by is Kind.TEMPERATURE else Kind.TEMPERATURE


def pocket_table(refrigerant: str, by: Kind, first: float, last: float, step: float) -> PocketTable:
    """Return the table from `first` to `last` [K or Pa] by `step`; Refusal naming the field where it cannot be.

    Every row is solved; a row beyond the critical or the lowest point of the model refuses the whole table, so that
    none is missing unsaid.
    """
    # Imported here: it brings the property library.
    from gaugeside.refrigerants import open_fluid

    if step <= 0 or not math.isfinite(step):
        raise Refusal("The step is not above zero.", "Write for example 0.5 K, 1 °F or 0.5 bar.", "step")
    if last < first:
        raise Refusal("The end lies below the start.", "Write the lower one first.", "to")
    count = math.floor((last - first) / step + _ROUNDING) + 1
    if count > MOST_ROWS:
        raise Refusal(f"That makes {count} rows; {MOST_ROWS} is the most.", "Take a wider step.", "step")
    fluid = open_fluid(find(refrigerant))
    rows = []
    for place in range(count):
        at = first + place * step
        try:
            if by is Kind.TEMPERATURE:
                bubble, dew = fluid.bubble_at_temperature(at).pressure, fluid.dew_at_temperature(at).pressure
            else:
                bubble, dew = fluid.bubble_at_pressure(at).temperature, fluid.dew_at_pressure(at).temperature
        except Refusal as refusal:
            raise refusal.about("from" if place < count / 2 else "to") from None
        rows.append((at, bubble, dew))
    return PocketTable(fluid.refrigerant.designation, by, tuple(rows))
