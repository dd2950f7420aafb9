"""The equations of one refrigerant put together: its phases, its curves, its limits."""

from __future__ import annotations

from dataclasses import dataclass

from ..errors import NotModelled
from . import library
from .catalogue import Refrigerant
from .limits import Limits
from .phases import Phase
from .saturation import BUBBLE, DEW, BlendSolver, Curve, PureSolver

# How near the critical temperature the curves are laid [K]; answers are given only farther away.
PURE_END = 0.05
BLEND_END = 0.2
# A blend's own limits are averages of its components'; beyond these no machine runs anyway.
HOTTEST_BLEND = 480.0
HIGHEST_PRESSURE = 100e6


@dataclass(frozen=True, slots=True)
class Window:
    """Around a blend's critical point: below both, above the end of the curves, no phase is certain."""

    pressure: float
    temperature: float


class Model:
    """Phases, curves and limits of one refrigerant. Raises NotModelled when the library refuses it."""

    def __init__(self, refrigerant: Refrigerant) -> None:
        self.blend = refrigerant.is_blend
        fluid = refrigerant.library_fluid
        predefined = not self.blend or fluid.endswith(".mix")
        fractions = None if predefined else [share for _, share in refrigerant.composition]
        try:
            self.liquid = Phase(fluid, fractions, library.LIQUID)
            self.vapour = Phase(fluid, fractions, library.GAS)
            solver = (
                BlendSolver(self.liquid, self.vapour, fluid, fractions)
                if self.blend
                else PureSolver(self.liquid, self.vapour, fluid)
            )
        except ValueError as error:
            raise NotModelled(
                f"{refrigerant.designation} cannot be computed: the property library has no model for it.",
                "A blend needs published mixing parameters for every pair of its components.",
            ) from error
        state = self.liquid.state
        hottest, highest = float(state.Tmax()), min(float(state.pmax()), HIGHEST_PRESSURE)
        critical_temperature = refrigerant.critical_temperature
        critical_pressure = refrigerant.critical_pressure
        self.limits = Limits(
            designation=refrigerant.designation,
            critical_temperature=critical_temperature,
            critical_pressure=critical_pressure,
            minimum_temperature=refrigerant.minimum_temperature,
            maximum_temperature=min(hottest, HOTTEST_BLEND) if self.blend else hottest,
            maximum_pressure=highest,
            pure=not self.blend,
        )
        floor = refrigerant.minimum_temperature
        top = critical_temperature - (BLEND_END if self.blend else PURE_END)
        self.bubble = Curve(solver, BUBBLE, floor, critical_temperature, top)
        self.dew = Curve(solver, DEW, floor, critical_temperature, top) if self.blend else self.bubble
        self.highest_density = 4.2 * self.liquid.reducing_density

    @property
    def critical_density_bound(self) -> float:
        """A density below that of any liquid colder than the critical point [mol/m3]."""
        if self.blend:
            return 0.9 * self.bubble.highest.liquid_density
        return self.liquid.reducing_density

    @property
    def window(self) -> Window | None:
        """Where no phase can be decided: none for a pure fluid but the last hundredths of a kelvin."""
        if not self.blend:
            return Window(self.limits.critical_pressure, self.limits.critical_temperature)
        highest = max(self.limits.critical_pressure, self.bubble.highest.pressure, self.dew.highest.pressure)
        return Window(1.02 * highest, self.limits.critical_temperature + 2.0)


