"""Points of saturation: found near a guess, then checked for stable phases and equal fugacities."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

from . import library
from .library import Guesses
from .phases import NoRoot, Phase

BUBBLE = 0
DEW = 1


@dataclass(frozen=True, slots=True)
class Point:
    """A point of a saturation curve, molar units.

    other: mole fractions of the incipient phase, vapour on the bubble and liquid on the dew curve.
    """

    temperature: float
    pressure: float
    liquid_density: float
    vapour_density: float
    other: tuple[float, ...]

    def coordinates(self) -> tuple[float, ...]:
        """The quantities that run smoothly along the curve."""
        return (
            self.temperature,
            math.log(self.pressure),
            math.log(self.liquid_density),
            math.log(self.vapour_density),
            *(math.log(max(x, 1e-300)) for x in self.other),
        )


def point_from(coordinates: Sequence[float]) -> Point:
    """Return the point with these coordinates, its composition made to sum to one."""
    other = [math.exp(x) for x in coordinates[4:]]
    total = sum(other)
    return Point(
        coordinates[0],
        math.exp(coordinates[1]),
        math.exp(coordinates[2]),
        math.exp(coordinates[3]),
        tuple(x / total for x in other),
    )


class Solver(Protocol):
    """Finds one saturation point near a guess and vouches for it."""

    def start(self, temperature: float, side: int) -> Point:
        """Return the point at a temperature [K] without a guess; raises NoRoot."""

    def at_temperature(self, temperature: float, side: int, guess: Point) -> Point:
        """Return the point at a temperature [K]; raises NoRoot."""

    def at_pressure(self, pressure: float, side: int, guess: Point) -> Point:
        """Return the point at a pressure [Pa]; raises NoRoot."""


class PureSolver:
    """Equal pressures and Gibbs energies of the two phases of a pure fluid (Maxwell's criterion)."""

    def __init__(self, liquid: Phase, vapour: Phase, fluid: str) -> None:
        self._liquid = liquid
        self._vapour = vapour
        self._plain = library.open_state(fluid)

    def start(self, temperature: float, side: int) -> Point:
        try:
            self._plain.update(library.TEMPERATURE_QUALITY, 0.0, temperature)
            liquid = self._plain.saturated_liquid_keyed_output(library.D)
            vapour = self._plain.saturated_vapor_keyed_output(library.D)
        except ValueError as error:
            raise NoRoot(str(error)) from error
        return self.at_temperature(temperature, side, Point(temperature, 1.0, liquid, vapour, (1.0,)))

    def at_temperature(self, temperature: float, side: int, guess: Point) -> Point:
        return self._solve(temperature, None, guess)

    def at_pressure(self, pressure: float, side: int, guess: Point) -> Point:
        return self._solve(guess.temperature, pressure, guess)

    def _solve(self, temperature: float, target: float | None, guess: Point) -> Point:
        """Newton's method; with a target pressure the temperature moves along the Clapeyron slope."""
        liquid, vapour = self._liquid.state, self._vapour.state
        dense, thin = guess.liquid_density, guess.vapour_density
        for _ in range(30):
            if not dense > thin > 0.0:
                raise NoRoot("the phases have merged")
            self._liquid.at(dense, temperature)
            self._vapour.at(thin, temperature)
            stiff, soft = self._liquid.stiffness(), self._vapour.stiffness()
            if not (stiff > 0.0 and soft > 0.0):
                raise NoRoot("unstable phase")
            low, high = liquid.p(), vapour.p()
            shrink = 1.0 / dense - 1.0 / thin
            level = (vapour.gibbsmolar() - liquid.gibbsmolar() + low / dense - high / thin) / shrink
            warmer = 0.0
            if target is not None:
                warmer = (target - level) * shrink / (liquid.smolar() - vapour.smolar())
                level = target
            up = (level - low - self._liquid.pressure_slope() * warmer) / stiff
            down = (level - high - self._vapour.pressure_slope() * warmer) / soft
            if abs(up) > 0.3 * dense or abs(down) > 0.7 * thin:
                raise NoRoot("guess too far off")
            dense, thin, temperature = dense + up, thin + down, temperature + warmer
            if abs(up) < 1e-9 * dense and abs(down) < 1e-9 * thin and abs(warmer) < 1e-9 * temperature:
                return Point(temperature, level, dense, thin, (1.0,))
        raise NoRoot("saturation does not settle")


class BlendSolver:
    """The library's guided solver for a blend, each result checked against the equal-fugacity condition."""

    # Newton's method in the library stops near 1e-9; a wrong root is off by orders of magnitude.
    LARGEST_RESIDUAL = 2e-7

    def __init__(self, liquid: Phase, vapour: Phase, fluid: str, mass_fractions: Sequence[float] | None) -> None:
        self._liquid = liquid
        self._vapour = vapour
        self._whole = tuple(liquid.whole)
        self._state = library.open_state(fluid, mass_fractions)
        self._guesses = Guesses()

    def start(self, temperature: float, side: int) -> Point:
        try:
            self._state.update(library.TEMPERATURE_QUALITY, float(side), temperature)
        except ValueError as error:
            raise NoRoot(str(error)) from error
        return self._vouch(side)

    def at_temperature(self, temperature: float, side: int, guess: Point) -> Point:
        return self._solve(library.TEMPERATURE_QUALITY, float(side), temperature, side, guess)

    def at_pressure(self, pressure: float, side: int, guess: Point) -> Point:
        return self._solve(library.PRESSURE_QUALITY, pressure, float(side), side, guess)

    def _solve(self, pair: int, first: float, second: float, side: int, guess: Point) -> Point:
        guesses = self._guesses
        guesses.T = guess.temperature
        guesses.p = guess.pressure
        guesses.rhomolar_liq = guess.liquid_density
        guesses.rhomolar_vap = guess.vapour_density
        guesses.rhomolar = guess.liquid_density if side == BUBBLE else guess.vapour_density
        guesses.x = self._whole if side == BUBBLE else guess.other
        guesses.y = guess.other if side == BUBBLE else self._whole
        try:
            self._state.update_with_guesses(pair, first, second, guesses)
        except ValueError as error:
            raise NoRoot(str(error)) from error
        return self._vouch(side)

    def _vouch(self, side: int) -> Point:
        """Return the point the library arrived at; raises NoRoot when the two phases do not balance."""
        state = self._state
        temperature, pressure = float(state.T()), float(state.p())
        dense = float(state.saturated_liquid_keyed_output(library.D))
        thin = float(state.saturated_vapor_keyed_output(library.D))
        other = state.mole_fractions_vapor() if side == BUBBLE else state.mole_fractions_liquid()
        if not (math.isfinite(temperature) and pressure > 0.0 and dense > 1.0005 * thin > 0.0):
            raise NoRoot("the phases have merged")
        if not all(x > 0.0 for x in other):
            raise NoRoot("negative composition")
        self._liquid.compose(self._whole if side == BUBBLE else other)
        self._vapour.compose(other if side == BUBBLE else self._whole)
        exact_dense = self._liquid.settle(pressure, temperature, dense)
        exact_thin = self._vapour.settle(pressure, temperature, thin)
        if abs(exact_dense - dense) > 1e-5 * dense or abs(exact_thin - thin) > 1e-5 * thin:
            raise NoRoot("the phases differ in pressure")
        pairs = zip(self._liquid.log_fugacities(), self._vapour.log_fugacities(), strict=True)
        if max(abs(a - b) for a, b in pairs) > self.LARGEST_RESIDUAL:
            raise NoRoot("the phases differ in fugacity")
        return Point(temperature, pressure, exact_dense, exact_thin, tuple(other))
