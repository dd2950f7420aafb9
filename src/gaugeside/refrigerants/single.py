"""One phase alone: in which region a state lies, how dense it is there, how it changes along an isobar.

The phase is decided from the bubble and dew curves and imposed, so that the library has nothing to guess.
Molar densities; enthalpy and entropy in the library's own datum.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from ..errors import Refusal
from .dome import Given
from .limits import bar, celsius
from .model import Model
from .phases import NoRoot, Phase
from .states import Region

# Pressure and temperature this close to saturation do not tell liquid from vapour [K].
SAME_TEMPERATURE = 1e-3
# A blend with less glide than this [K] behaves as an azeotrope: no thermometer resolves its vapour fraction.
LEAST_GLIDE = 0.02
# Interpolated curves are better than this in the logarithm of pressure; nearer than this the exact point decides.
INTERPOLATION_ERROR = 3e-4
FINEST = 1e-9


@dataclass(frozen=True, slots=True)
class Found:
    """A state of one phase, at which that phase of the model has just been evaluated."""

    region: Region
    pressure: float
    temperature: float
    density: float


class Outside(ArithmeticError):
    """The wanted state lies beyond the temperatures [K] at hand; `temperature` is the end that was met."""

    def __init__(self, temperature: float) -> None:
        super().__init__(temperature)
        self.temperature = temperature


class OnePhase:
    """The single-phase regions of one refrigerant."""

    def __init__(self, model: Model) -> None:
        self._model = model
        self._blend = model.blend
        self._bubble, self._dew = model.bubble, model.dew
        self._critical_pressure = model.limits.critical_pressure
        self._critical_temperature = model.limits.critical_temperature

    # --- region

    def region(self, pressure: float, temperature: float) -> Region:
        """Return the region at a pressure [Pa] and temperature [K].

        Raises Refusal where they fix no state, OutOfRange beside a critical point, NoRoot when the model fails.
        """
        if not self._covers(temperature):
            return self._region_beyond(pressure, temperature)
        log = math.log(pressure)
        if log > self._bubble.around(temperature)[2][1]:
            return self._liquid(pressure)
        if log < self._dew.around(temperature)[1][1]:
            return Region.SUPERHEATED
        return self._region_beside(pressure, temperature)

    def _covers(self, temperature: float) -> bool:
        return self._bubble.reaches(temperature) and (not self._blend or self._dew.reaches(temperature))

    def _liquid(self, pressure: float) -> Region:
        if pressure > self._critical_pressure:
            return Region.LIQUID_ABOVE_CRITICAL_PRESSURE
        return Region.SUBCOOLED

    def _region_beside(self, pressure: float, temperature: float) -> Region:
        """Decide near saturation: from interpolated curves, and beside one of them from its exact point."""
        log, slope = math.log(pressure), self._slope(temperature)
        bubble = self._bubble.guess_log_pressure(temperature)
        dew = self._dew.guess_log_pressure(temperature) if self._blend else bubble
        if min(abs(log - bubble), abs(log - dew)) < INTERPOLATION_ERROR:
            bubble = math.log(self._bubble.at_temperature(temperature).pressure)
            dew = math.log(self._dew.at_temperature(temperature).pressure) if self._blend else bubble
        fixed = self._model.refrigerant.nature == "zeotrope" and (bubble - dew) / slope > LEAST_GLIDE
        blur = 0.0 if fixed else max(1e-6, SAME_TEMPERATURE * slope)
        if log > bubble + blur:
            return self._liquid(pressure)
        if log < dew - blur:
            return Region.SUPERHEATED
        if fixed:
            return Region.TWO_PHASE
        raise Refusal(
            f"{bar(pressure)} and {celsius(temperature)} lie on the saturation line of "
            f"{self._model.refrigerant.designation}: they do not tell how much of it is vapour.",
            "Give the vapour fraction, or saturated liquid or saturated vapour.",
        )

    def _slope(self, temperature: float) -> float:
        """Relative slope of the saturation pressure over temperature [1/K]."""
        _, below, above = self._bubble.around(temperature)
        return (above[1] - below[1]) / (above[0] - below[0])

    def _region_beyond(self, pressure: float, temperature: float) -> Region:
        """The region above the end of the curves, or below their beginning."""
        if temperature < self._bubble.lowest.temperature + 1e-6:
            return Region.SUPERHEATED if pressure < self._dew.lowest.pressure else Region.SUBCOOLED
        if pressure < 0.999 * self._dew.highest.pressure:
            return Region.SUPERHEATED
        window = self._model.window
        if pressure < window.pressure and temperature < window.temperature:
            self._model.limits.too_near(f"{celsius(temperature)} with {bar(pressure)}")
        if temperature > self._critical_temperature:
            return Region.SUPERCRITICAL if pressure > self._critical_pressure else Region.SUPERHEATED
        return self._liquid(pressure)

    # --- density

    def phase_of(self, region: Region) -> Phase:
        """The phase of the model that answers for a region."""
        if region is Region.SUPERHEATED or region is Region.SUPERCRITICAL:
            return self._model.vapour
        return self._model.liquid

    def at(self, region: Region, pressure: float, temperature: float, guess: float | None = None) -> Found:
        """Return the state of one phase at a pressure [Pa] and temperature [K]; raises NoRoot.

        guess: molar density to start from [mol/m3].
        """
        phase = self.phase_of(region)
        try:
            start, low, high = self._guess(region, phase, pressure, temperature, guess)
            self._whole(phase)
            density = phase.settle(pressure, temperature, start)
            if not low < density < high:  # some equations have a second, spurious root
                raise NoRoot("beyond saturation")
        except NoRoot:
            density = self._bracketed(region, phase, pressure, temperature)
        return Found(region, pressure, temperature, density)

    def _whole(self, phase: Phase) -> None:
        """Give a phase the whole composition; laying nodes of a curve leaves another one behind."""
        if self._blend:
            phase.compose(phase.whole)

    def _guess(
        self, region: Region, phase: Phase, pressure: float, temperature: float, guess: float | None
    ) -> tuple[float, float, float]:
        """A density to start from and the bounds it may not leave; raises NoRoot where there is none."""
        if region is Region.SUPERCRITICAL or not self._covers(temperature):
            if guess is None:
                raise NoRoot("no curve at this temperature")
            return guess, 0.0, self._model.highest_density
        if region is Region.SUPERHEATED:
            share, below, above = self._dew.around(temperature)
            saturated = math.exp(below[1] + share * (above[1] - below[1]))
            density = math.exp(below[3] + share * (above[3] - below[3]))
            gas = phase.gas_constant * temperature
            shortfall = 1.0 - saturated / (density * gas)
            start = pressure / gas / (1.0 - shortfall * min(pressure / saturated, 1.0))
            return start, 0.0, 1.001 * math.exp(above[3])
        share, below, above = self._bubble.around(temperature)
        return math.exp(below[2] + share * (above[2] - below[2])), 0.999 * math.exp(above[2]), math.inf

    def _bracketed(self, region: Region, phase: Phase, pressure: float, temperature: float) -> float:
        """The density between bounds that hold one root only; raises NoRoot."""
        highest = self._model.highest_density
        covered = self._covers(temperature)
        if region is Region.SUPERHEATED:
            if covered:
                highest = 1.001 * self._dew.guess_at_temperature(temperature).vapour_density
            self._whole(phase)
            return phase.gas_density(pressure, temperature, highest)
        if region is Region.SUPERCRITICAL:
            ideal = pressure / (phase.gas_constant * temperature)
            self._whole(phase)
            return phase.search(pressure, temperature, 0.0, highest, min(ideal, phase.reducing_density))
        if covered:
            saturated = self._bubble.guess_at_temperature(temperature).liquid_density
            self._whole(phase)
            return phase.search(pressure, temperature, 0.999 * saturated, highest, saturated)
        low = self._model.critical_density_bound
        self._whole(phase)
        return phase.search(pressure, temperature, low, highest, 1.3 * low)

    # --- along an isobar

    def measure(self, region: Region, given: Given) -> float:
        """Enthalpy [J/kg] or entropy [J/(kg K)] of a phase as last evaluated."""
        state = self.phase_of(region).state
        return float(state.hmass() if given is Given.ENTHALPY else state.smass())

    def beside_critical(self, pressure: float, wanted: float, given: Given) -> Found:
        """Return the state on an isobar [Pa] that passes the critical point too near to decide every phase there.

        Raises OutOfRange where the state itself is too near, Outside, NoRoot.
        """
        limits = self._model.limits
        warm = self._model.window.temperature
        region = Region.SUPERCRITICAL if pressure > self._critical_pressure else Region.SUPERHEATED
        self.at(region, pressure, warm)
        if wanted >= self.measure(region, given):
            return self.along(region, pressure, wanted, given, (warm, limits.maximum_temperature), warm)
        if self._bubble.reaches_pressure(pressure):
            cold = self._bubble.at_pressure(pressure).temperature
        else:
            cold = min(self._bubble.highest.temperature, self._dew.highest.temperature)
        region = self._liquid(pressure)
        self.at(region, pressure, cold)
        if wanted > self.measure(region, given):
            limits.too_near(f"This state at {bar(pressure)}")
        return self.along(region, pressure, wanted, given, (limits.minimum_temperature, cold), cold)

    def along(
        self,
        region: Region | None,
        pressure: float,
        wanted: float,
        given: Given,
        ends: tuple[float, float],
        start: float,
    ) -> Found:
        """Return the state on an isobar [Pa] with a wanted enthalpy or entropy.

        region: of the whole stretch, None to decide it at every temperature; ends: coldest and warmest temperature
        [K]; start: temperature to begin at [K]. Newton's method kept between the ends. Raises Outside, NoRoot.
        """
        low, high = ends
        temperature, density = min(max(start, low), high), None
        while True:
            here = region or self.region(pressure, temperature)
            found = self.at(here, pressure, temperature, density)
            state = self.phase_of(here).state
            slope = state.cpmass() if given is Given.ENTHALPY else state.cpmass() / temperature
            excess = self.measure(here, given) - wanted
            if not slope > 0.0:
                raise NoRoot("negative heat capacity")
            following = temperature - excess / slope
            if abs(following - temperature) < FINEST * temperature and ends[0] - 1e-6 < following < ends[1] + 1e-6:
                return self.at(here, pressure, following, found.density)
            low, high = (low, temperature) if excess > 0.0 else (temperature, high)
            if high - low < FINEST * temperature:
                raise Outside(temperature)
            if not low < following < high:
                following = 0.5 * (low + high)
            temperature, density = following, found.density
