"""One phase of one refrigerant: its density at a pressure, and what follows from the density."""

from __future__ import annotations

import math
from collections.abc import Sequence

from . import library
from .library import DENSITY_TEMPERATURE, D, P, T

MOST_STEPS = 80


class NoRoot(ArithmeticError):
    """No density, or no saturation, was found that passes the checks."""


class Phase:
    """A liquid or a vapour with its own state of the library, phase imposed; molar units throughout.

    Working in density and temperature leaves the library nothing to search for, so every call is
    a plain evaluation of the equation of state.
    """

    def __init__(self, fluid: str, mass_fractions: Sequence[float] | None, library_phase: int) -> None:
        self.state = library.open_state(fluid, mass_fractions)
        self.state.specify_phase(library_phase)
        self.whole = library.components(self.state)
        self.count = len(self.whole)
        self.gas_constant = float(self.state.gas_constant())
        self.reducing_density = float(self.state.rhomolar_reducing())
        self.molar_mass = float(self.state.molar_mass())

    def compose(self, fractions: Sequence[float]) -> None:
        """Set the composition, mole fractions [mol/mol]."""
        self.state.set_mole_fractions(fractions)

    def at(self, density: float, temperature: float) -> None:
        """Evaluate the equation of state at a molar density [mol/m3] and temperature [K]; raises NoRoot."""
        try:
            self.state.update(DENSITY_TEMPERATURE, density, temperature)
        except ValueError as error:
            raise NoRoot(str(error)) from error

    def stiffness(self) -> float:
        """Slope of pressure over density at constant temperature [Pa m3/mol]; positive where stable."""
        return float(self.state.first_partial_deriv(P, D, T))

    def pressure_slope(self) -> float:
        """Slope of pressure over temperature at constant density [Pa/K]."""
        return float(self.state.first_partial_deriv(P, T, D))

    def log_fugacities(self) -> list[float]:
        """Logarithms of the fugacities of the components [ln Pa].

        Raises NoRoot where the equation gives none.
        """
        try:
            return [math.log(self.state.fugacity(i)) for i in range(self.count)]
        except ValueError as error:
            raise NoRoot("no fugacity there") from error

    def settle(self, pressure: float, temperature: float, density: float) -> float:
        """Return the density at a pressure [Pa] and temperature [K], from a good guess [mol/m3].

        Newton's method without a bracket; raises NoRoot when it meets an unstable density.
        """
        state = self.state
        for _ in range(25):
            self.at(density, temperature)
            slope = state.first_partial_deriv(P, D, T)
            if not slope > 0.0:
                raise NoRoot("unstable density")
            step = (pressure - state.p()) / slope
            if not abs(step) < 0.4 * density:
                raise NoRoot("guess too far off")
            density += step
            if abs(step) < 1e-7 * density:
                self.at(density, temperature)
                return float(density)
        raise NoRoot("density does not settle")

    def search(self, pressure: float, temperature: float, low: float, high: float, guess: float | None = None) -> float:
        """Return the density at a pressure [Pa] and temperature [K] between two bounds [mol/m3].

        Newton's method kept inside a shrinking bracket in which pressure rises with density.
        Raises NoRoot when the bracket holds no root.
        """
        state = self.state
        density = guess if guess is not None and low < guess < high else 0.5 * (low + high)
        for _ in range(MOST_STEPS):
            self.at(density, temperature)
            excess = state.p() - pressure
            slope = state.first_partial_deriv(P, D, T)
            if excess > 0.0:
                high = density
            else:
                low = density
            following = density - excess / slope if slope > 0.0 else math.nan
            if not low < following < high:
                if slope > 0.0 and abs(excess / slope) < 1e-11 * density:
                    return float(density)
                following = 0.5 * (low + high)
            if abs(following - density) < 1e-8 * density and slope > 0.0:
                self.at(following, temperature)
                if abs(state.p() - pressure) > 1e-6 * pressure + 1e-9 * following * slope:
                    raise NoRoot("the bounds hold no density of that pressure")
                return float(following)
            density = following
        raise NoRoot("density does not settle")

    def gas_density(self, pressure: float, temperature: float, high: float) -> float:
        """Return the density of the gas at a pressure [Pa] and temperature [K], below `high` [mol/m3]."""
        ideal = pressure / (self.gas_constant * temperature)
        return self.search(pressure, temperature, 0.0, high, min(ideal, 0.95 * high))
