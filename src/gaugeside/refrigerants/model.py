"""The equations of one refrigerant put together: its phases, its curves, its limits."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from itertools import combinations

from ..errors import NotModelled
from . import library
from .catalogue import Refrigerant
from .curves import Curve
from .limits import Limits
from .phases import NoRoot, Phase
from .solvers import BUBBLE, DEW, BlendSolver, PureSolver, Solver

# How near the critical temperature the curves are laid [K]; answers are given only farther away.
PURE_END = 0.05
BLEND_END = 0.2
# A blend's own limits are averages of its components'; beyond these no machine runs anyway.
HOTTEST_BLEND = 480.0
HIGHEST_PRESSURE = 100e6
# A blend is offered down to the temperature at which its dew pressure is this.
LOWEST_PRESSURE = 1e3


@dataclass(frozen=True, slots=True)
class Window:
    """Around a blend's critical point: below both, above the end of the curves, no phase is certain."""

    pressure: float
    temperature: float


def traced_ends(solver: Solver, liquid: Phase) -> tuple[float, float, float]:
    """Return critical temperature [K], critical pressure [Pa] and lowest temperature [K] of a blend.

    Found by following the bubble curve until the two phases become alike and the dew curve down to 1 kPa:
    milliseconds, where the library's own search for critical points takes up to half a minute. For the blends
    of the catalogue the two agree within 0.1 K and 0.5 %. Raises NotModelled where no curve can be followed.
    """
    beyond = 1.1 * float(liquid.state.T_reducing())
    coldest = max(float(liquid.state.Tmin()), 0.3 * beyond)
    try:
        temperature, pressure = Curve(solver, BUBBLE, coldest, beyond, beyond).end_of_two_phases()
        dew = Curve(solver, DEW, coldest, temperature, temperature - BLEND_END)
        floor = dew.at_pressure(LOWEST_PRESSURE).temperature if dew.reaches_pressure(LOWEST_PRESSURE) else 0.0
        return temperature, pressure, max(floor, dew.lowest.temperature)
    except NoRoot as error:
        raise NotModelled(
            "The model of this blend has no bubble curve that can be followed to a critical point.",
            "Check its composition.",
        ) from error


def _why_not(fluid: str) -> str:
    """Say which pair of components the library cannot mix, by its own names for them."""
    for one, other in combinations(fluid.split("&"), 2):
        try:
            library.open_state(f"{one}&{other}")
        except ValueError:
            return f"no published mixing model is available for {one} with {other}"
    return "the property library has no model for it"


class Model:
    """Phases, curves and limits of one refrigerant. Raises NotModelled when the library refuses it."""

    def __init__(self, refrigerant: Refrigerant) -> None:
        self.refrigerant = refrigerant
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
                f"{refrigerant.designation} cannot be computed: {_why_not(fluid)}.",
                "A blend needs published mixing parameters for every pair of its components.",
            ) from error
        state = self.liquid.state
        hottest, highest = float(state.Tmax()), min(float(state.pmax()), HIGHEST_PRESSURE)
        critical_temperature = refrigerant.critical_temperature
        critical_pressure = refrigerant.critical_pressure
        floor = refrigerant.minimum_temperature
        if not critical_temperature:
            critical_temperature, critical_pressure, floor = traced_ends(solver, self.liquid)
        self.limits = Limits(
            designation=refrigerant.designation,
            critical_temperature=critical_temperature,
            critical_pressure=critical_pressure,
            minimum_temperature=floor,
            maximum_temperature=min(hottest, HOTTEST_BLEND) if self.blend else hottest,
            maximum_pressure=highest,
            pure=not self.blend,
        )
        top = critical_temperature - (BLEND_END if self.blend else PURE_END)
        self.bubble = Curve(solver, BUBBLE, floor, critical_temperature, top)
        self.dew = Curve(solver, DEW, floor, critical_temperature, top) if self.blend else self.bubble
        self.highest_density = 4.2 * self.liquid.reducing_density

    @cached_property
    def critical_density_bound(self) -> float:
        """A density below that of any liquid colder than the critical point [mol/m3]."""
        if self.blend:
            return 0.9 * self.bubble.highest.liquid_density
        return self.liquid.reducing_density

    @cached_property
    def window(self) -> Window:
        """Where no phase can be decided: for a pure fluid only the last hundredths of a kelvin."""
        if not self.blend:
            return Window(self.limits.critical_pressure, self.limits.critical_temperature)
        highest = max(self.limits.critical_pressure, self.bubble.highest.pressure, self.dew.highest.pressure)
        return Window(1.02 * highest, self.limits.critical_temperature + 2.0)
