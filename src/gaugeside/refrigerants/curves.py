"""Bubble and dew curves by continuation: nodes along each curve, and points polished between them.

The library's own saturation calls have holes for blends and now and then meet a wrong root. Starting
from one point that passed the checks and going on in small steps, each from a guess extrapolated from
the points before it, closes the holes. A root away from its neighbours is not taken.
"""

from __future__ import annotations

import math
from bisect import bisect_left
from collections.abc import Callable, Sequence

from .phases import NoRoot
from .solvers import Point, Solver, point_from

WIDEST_STEP = 5.0
NARROWEST_STEP = 0.004
REFINEMENTS = 6
# Starting points, as parts of the critical temperature: where most blends converge without help.
STARTS = (0.70, 0.72, 0.68, 0.75, 0.65, 0.78, 0.62, 0.80, 0.58, 0.84)


def lagrange(abscissas: Sequence[float], at: float) -> list[float]:
    """Weights of the values at these abscissas in the polynomial through them, evaluated at `at`."""
    weights = []
    for i, own in enumerate(abscissas):
        weight = 1.0
        for j, other in enumerate(abscissas):
            if i != j:
                weight *= (at - other) / (own - other)
        weights.append(weight)
    return weights


class Curve:
    """One saturation curve of one refrigerant, its nodes laid as they are asked for."""

    def __init__(self, solver: Solver, side: int, floor: float, critical_temperature: float, top: float) -> None:
        """floor, top: lowest and highest temperature laid [K]."""
        self._solver = solver
        self._side = side
        self._floor = floor
        self._critical = critical_temperature
        self._top = top
        self._nodes: list[tuple[float, ...]] = []
        self._temperatures: list[float] = []
        self._log_pressures: list[float] = []
        self._ended = {-1: False, 1: False}
        self._step = {-1: 2.0, 1: 2.0}

    # --- what there is

    @property
    def lowest(self) -> Point:
        """The last point below, laying all nodes down to it."""
        self._lay(-1, until=lambda: False)
        return point_from(self._nodes[0])

    @property
    def highest(self) -> Point:
        """The last point above, laying all nodes up to it."""
        self._lay(1, until=lambda: False)
        return point_from(self._nodes[-1])

    def reaches(self, temperature: float) -> bool:
        """Whether the curve has a point at a temperature [K]."""
        axis = self._temperatures
        if not (axis and axis[1] < temperature < axis[-2]):
            self._reach(temperature, axis)
        return axis[0] - 1e-9 <= temperature <= axis[-1] + 1e-9

    def reaches_pressure(self, pressure: float) -> bool:
        """Whether the curve has a point at a pressure [Pa]."""
        log = math.log(pressure)
        self._reach(log, self._log_pressures)
        return self._log_pressures[0] - 1e-12 <= log <= self._log_pressures[-1] + 1e-12

    def around(self, temperature: float) -> tuple[float, tuple[float, ...], tuple[float, ...]]:
        """Return the nodes below and above a temperature [K] on the curve, and the place between them."""
        axis = self._temperatures
        place = min(max(bisect_left(axis, temperature), 1), len(axis) - 1)
        below, above = self._nodes[place - 1], self._nodes[place]
        return (temperature - below[0]) / (above[0] - below[0]), below, above

    # --- points

    def guess_at_temperature(self, temperature: float) -> Point:
        """Return an interpolated point, good to about 1e-5; raises NoRoot outside the curve."""
        self._reach(temperature, self._temperatures)
        return point_from(self._interpolate(temperature, self._temperatures))

    def guess_log_pressure(self, temperature: float) -> float:
        """Return the interpolated logarithm of the pressure at a temperature [K] on the curve, good to 1e-5."""
        first, weights = self._weights(temperature, self._temperatures)
        return sum(weight * self._log_pressures[first + i] for i, weight in enumerate(weights))

    def at_temperature(self, temperature: float) -> Point:
        """Return the point at a temperature [K]; raises NoRoot outside the curve."""
        self._reach(temperature, self._temperatures)
        return self._polished(self._solver.at_temperature, temperature, temperature, self._temperatures)

    def at_pressure(self, pressure: float) -> Point:
        """Return the point at a pressure [Pa]; raises NoRoot outside the curve."""
        log = math.log(pressure)
        self._reach(log, self._log_pressures)
        try:
            return self._polished(self._solver.at_pressure, pressure, log, self._log_pressures)
        except NoRoot:
            return self._at_pressure_by_temperature(log)

    def _at_pressure_by_temperature(self, log: float) -> Point:
        """Find a pressure by its temperature, which works where the curve runs nearly level (bisection)."""
        place = min(max(bisect_left(self._log_pressures, log), 1), len(self._log_pressures) - 1)
        low, high = self._temperatures[place - 1], self._temperatures[place]
        while high - low > 1e-10 * high:
            middle = 0.5 * (low + high)
            point = self.at_temperature(middle)
            low, high = (low, middle) if math.log(point.pressure) > log else (middle, high)
        return self.at_temperature(high)

    def _polished(
        self, solve: Callable[[float, int, Point], Point], value: float, place: float, axis: list[float]
    ) -> Point:
        """Solve from an interpolated guess; where that fails, lay nodes between and try again."""
        for _ in range(REFINEMENTS):
            guess = point_from(self._interpolate(place, axis))
            try:
                point = solve(value, self._side, guess)
                self._near(point, guess)
                return point
            except NoRoot:
                self._refine(guess.temperature)
        raise NoRoot("no point on the curve there")

    def _refine(self, temperature: float) -> None:
        """Lay a node halfway between a temperature [K] and the nearer of its neighbours."""
        share, below, above = self.around(temperature)
        nearer = below[0] if share < 0.5 else above[0]
        middle = 0.5 * (temperature + nearer)
        if abs(middle - nearer) < NARROWEST_STEP:
            raise NoRoot("no point on the curve there")
        guess = point_from(self._interpolate(middle, self._temperatures))
        point = self._solver.at_temperature(middle, self._side, guess)
        self._near(point, guess)
        place = bisect_left(self._temperatures, middle)
        if not self._log_pressures[place - 1] < math.log(point.pressure) < self._log_pressures[place]:
            raise NoRoot("off the curve")
        self._insert(point, place)

    @staticmethod
    def _near(point: Point, guess: Point) -> None:
        """A root away from its neighbours is a wrong one, however well it balances."""
        if (
            abs(math.log(point.pressure / guess.pressure)) > 0.005
            or abs(point.temperature - guess.temperature) > 0.3
            or abs(math.log(point.vapour_density / guess.vapour_density)) > 0.1
        ):
            raise NoRoot("off the curve")

    # --- nodes

    def _reach(self, wanted: float, axis: list[float]) -> None:
        """Lay nodes until `axis` covers a value with a spare node on each side, or the curve ends."""
        if not self._nodes:
            self._begin()
        if wanted >= axis[-2]:
            self._lay(1, until=lambda: axis[-2] > wanted)
        if wanted <= axis[1]:
            self._lay(-1, until=lambda: axis[1] < wanted)

    def _begin(self) -> None:
        for part in STARTS:
            temperature = max(part * self._critical, self._floor + 1.0)
            if temperature >= self._top:
                continue
            try:
                first = self._solver.start(temperature, self._side)
                second = self._solver.at_temperature(temperature + 0.5, self._side, first)
            except NoRoot:
                continue
            slope = math.log(second.pressure / first.pressure) / 0.5
            # ln p of any fluid rises by 6 to 9 per unit of ln T around 0.7 of the critical temperature
            # and more below; a root outside this is not a saturation state.
            if 3.0 < slope * temperature < 60.0:
                self._insert(first, 0)
                self._insert(second, 1)
                return
        raise NoRoot("no starting point found")

    def _insert(self, point: Point, place: int) -> None:
        self._nodes.insert(place, point.coordinates())
        self._temperatures.insert(place, point.temperature)
        self._log_pressures.insert(place, math.log(point.pressure))

    def _lay(self, direction: int, until: Callable[[], bool]) -> None:
        if not self._nodes:
            self._begin()
        while not self._ended[direction] and not until():
            self._advance(direction)

    def _advance(self, direction: int) -> None:
        """Lay one more node, or note that the curve ends here."""
        edge = self._temperatures[-1 if direction > 0 else 0]
        limit = self._top if direction > 0 else self._floor
        room = abs(limit - edge)
        if room < 1e-7:
            self._ended[direction] = True
            return
        step = min(self._step[direction], WIDEST_STEP, room)
        if direction > 0 and self._critical > edge:
            step = min(step, max(0.25 * (self._critical - edge), 0.02))
        if room - step < 0.3 * step:
            step = room if room < 1.3 * step else step
        while step > NARROWEST_STEP or step == room:
            try:
                following = self._following(edge + direction * step, direction)
            except NoRoot:
                step *= 0.5
                continue
            self._insert(following, len(self._nodes) if direction > 0 else 0)
            self._step[direction] = 1.6 * step
            return
        self._ended[direction] = True

    def _following(self, temperature: float, direction: int) -> Point:
        count = min(4, len(self._nodes))
        near = self._nodes[-count:] if direction > 0 else self._nodes[:count]
        weights = lagrange([n[0] for n in near], temperature)
        guess = point_from([sum(w * n[i] for w, n in zip(weights, near, strict=True)) for i in range(len(near[0]))])
        point = self._solver.at_temperature(temperature, self._side, guess)
        edge = self._log_pressures[-1 if direction > 0 else 0]
        if (math.log(point.pressure) - edge) * direction <= 0.0:
            raise NoRoot("pressure falls with temperature")
        if abs(math.log(point.pressure / guess.pressure)) > 0.02:
            raise NoRoot("off the curve")
        if (
            abs(math.log(point.vapour_density / guess.vapour_density)) > 0.05
            or abs(math.log(point.liquid_density / guess.liquid_density)) > 0.02
        ):
            raise NoRoot("off the curve")
        return point

    def _weights(self, wanted: float, axis: list[float]) -> tuple[int, list[float]]:
        if not axis[0] - 1e-9 <= wanted <= axis[-1] + 1e-9:
            raise NoRoot("outside the curve")
        count = min(4, len(axis))
        first = min(max(bisect_left(axis, wanted) - 2, 0), len(axis) - count)
        return first, lagrange(axis[first : first + count], wanted)

    def _interpolate(self, wanted: float, axis: list[float]) -> list[float]:
        first, weights = self._weights(wanted, axis)
        near = self._nodes[first : first + len(weights)]
        return [sum(w * n[i] for w, n in zip(weights, near, strict=True)) for i in range(len(near[0]))]

    def end_of_two_phases(self) -> tuple[float, float]:
        """Return the temperature [K] and pressure [Pa] at which both phases would have one density.

        The last nodes are continued to equal densities; on the bubble curve that is the critical point.
        Raises NoRoot when the curve does not come near it.
        """
        self._lay(1, until=lambda: False)
        last = self._nodes[-3:]
        ratios = [node[2] - node[3] for node in last]
        if len(last) < 3 or not 0.0 < ratios[-1] < 0.5:
            raise NoRoot("the curve does not reach its critical point")
        weights = lagrange(ratios, 0.0)
        temperature, log_pressure = (sum(w * n[i] for w, n in zip(weights, last, strict=True)) for i in (0, 1))
        return temperature, math.exp(log_pressure)
