"""States of one refrigerant from any two of the readings a person can have."""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import cache
from typing import NoReturn

from ..errors import NotModelled, OutOfRange, Refusal
from . import library
from .catalogue import Refrigerant
from .dome import Dome, Given, Split
from .limits import NEAREST, Limits, bar, celsius, check_fraction
from .model import Model
from .phases import NoRoot, Phase
from .saturation import BUBBLE, DEW, Curve, Point
from .states import Datum, Region, State

NORMAL_PRESSURE = 101_325.0
ICE_POINT = 273.15
# Pressure and temperature this close to saturation do not tell liquid from vapour [K].
SAME_TEMPERATURE = 1e-3


class Fluid:
    """One refrigerant ready to be asked; all SI, per kilogram, pressures absolute.

    Not to be shared between threads: the library's states underneath are changed by every call.
    """

    def __init__(self, refrigerant: Refrigerant, datum: Datum) -> None:
        self.refrigerant = refrigerant
        self.datum = datum
        self.library_version = library.VERSION
        self._model = model = Model(refrigerant)
        self._limits: Limits = model.limits
        self._liquid: Phase = model.liquid
        self._vapour: Phase = model.vapour
        self._bubble: Curve = model.bubble
        self._dew: Curve = model.dew
        self._dome = Dome(model.liquid, model.vapour)
        self._enthalpy_shift = self._entropy_shift = 0.0
        self.datum_note = datum.description
        self._set_datum()

    # --- limits

    @property
    def minimum_temperature(self) -> float:
        """Lowest temperature offered [K]."""
        return self._limits.minimum_temperature

    @property
    def maximum_temperature(self) -> float:
        """Highest temperature of the equation [K]."""
        return self._limits.maximum_temperature

    @property
    def maximum_pressure(self) -> float:
        """Highest pressure of the equation [Pa]."""
        return self._limits.maximum_pressure

    @property
    def critical_temperature(self) -> float:
        """Critical temperature of the model [K]."""
        return self._limits.critical_temperature

    @property
    def critical_pressure(self) -> float:
        """Critical pressure of the model [Pa]."""
        return self._limits.critical_pressure

    # --- saturation

    def bubble_at_temperature(self, temperature: float) -> State:
        """Return saturated liquid at a temperature [K]. Raises OutOfRange."""
        return self._saturated(self._point_at_temperature(BUBBLE, temperature), BUBBLE)

    def dew_at_temperature(self, temperature: float) -> State:
        """Return saturated vapour at a temperature [K]. Raises OutOfRange."""
        return self._saturated(self._point_at_temperature(DEW, temperature), DEW)

    def bubble_at_pressure(self, pressure: float) -> State:
        """Return saturated liquid at a pressure [Pa]. Raises OutOfRange."""
        return self._saturated(self._point_at_pressure(BUBBLE, pressure), BUBBLE)

    def dew_at_pressure(self, pressure: float) -> State:
        """Return saturated vapour at a pressure [Pa]. Raises OutOfRange."""
        return self._saturated(self._point_at_pressure(DEW, pressure), DEW)

    def _curve(self, side: int) -> Curve:
        return self._bubble if side == BUBBLE else self._dew

    def _point_at_temperature(self, side: int, temperature: float) -> Point:
        self._limits.check_saturation_temperature(temperature)
        try:
            return self._curve(side).at_temperature(temperature)
        except NoRoot:
            self._no_number(celsius(temperature))

    def _point_at_pressure(self, side: int, pressure: float) -> Point:
        self._limits.check_saturation_pressure(pressure)
        curve = self._curve(side)
        try:
            if not curve.reaches_pressure(pressure):
                if pressure < curve.lowest.pressure:
                    self._limits.too_cold(bar(pressure))
                self._limits.too_near(bar(pressure))
            point = curve.at_pressure(pressure)
        except NoRoot:
            self._no_number(bar(pressure))
        if point.temperature > self.critical_temperature - NEAREST + 1e-7:
            self._limits.too_near(bar(pressure))
        return point

    def _no_number(self, what: str) -> NoReturn:
        raise OutOfRange(
            f"The property model of {self.refrigerant.designation} gives no reliable state at {what}.",
            "Try a reading nearby, or check it.",
        )

    def _saturated(self, point: Point, side: int) -> State:
        if side == BUBBLE:
            return self._state(
                self._liquid, point.pressure, point.temperature, point.liquid_density, Region.SATURATED_LIQUID, 0.0
            )
        return self._state(
            self._vapour, point.pressure, point.temperature, point.vapour_density, Region.SATURATED_VAPOUR, 1.0
        )

    def _state(
        self,
        phase: Phase,
        pressure: float,
        temperature: float,
        density: float,
        region: Region,
        vapour_fraction: float | None = None,
    ) -> State:
        """Return the single-phase state at a molar density [mol/m3]."""
        state = phase.state
        if self._model.blend:
            phase.compose(phase.whole)
        phase.at(density, temperature)
        return State(
            pressure,
            temperature,
            state.hmass() + self._enthalpy_shift,
            state.smass() + self._entropy_shift,
            density * phase.molar_mass,
            vapour_fraction,
            region,
            state.cpmass(),
        )

    # --- states from two readings

    def state_pt(self, pressure: float, temperature: float) -> State:
        """Return the state at a pressure [Pa] and temperature [K].

        Inside the glide of a blend they fix the vapour fraction. On the saturation line of a pure fluid or
        an azeotrope they fix no state: raises Refusal. Raises OutOfRange.
        """
        self._limits.check_temperature(temperature)
        self._limits.check_pressure(pressure)
        region = self._region(pressure, temperature)
        if region is Region.TWO_PHASE:
            return self._inside_glide(pressure, temperature)
        return self._single(region, pressure, temperature)

    def state_ph(self, pressure: float, enthalpy: float) -> State:
        """Return the state at a pressure [Pa] and specific enthalpy [J/kg]. Raises OutOfRange."""
        return self._on_isobar(pressure, enthalpy, Given.ENTHALPY)

    def state_ps(self, pressure: float, entropy: float) -> State:
        """Return the state at a pressure [Pa] and specific entropy [J/(kg K)]. Raises OutOfRange."""
        return self._on_isobar(pressure, entropy, Given.ENTROPY)

    def state_px(self, pressure: float, vapour_fraction: float) -> State:
        """Return the state at a pressure [Pa] and vapour fraction by mass [kg/kg]. Raises OutOfRange, Refusal."""
        check_fraction(vapour_fraction)
        if vapour_fraction == 0.0:
            return self.bubble_at_pressure(pressure)
        if vapour_fraction == 1.0:
            return self.dew_at_pressure(pressure)
        bubble = self._point_at_pressure(BUBBLE, pressure)
        dew = self._point_at_pressure(DEW, pressure)
        return self._between(bubble, dew, Given.VAPOUR_FRACTION, vapour_fraction, vapour_fraction)

    def state_tx(self, temperature: float, vapour_fraction: float) -> State:
        """Return the state at a temperature [K] and vapour fraction by mass [kg/kg]. Raises OutOfRange, Refusal."""
        check_fraction(vapour_fraction)
        if vapour_fraction == 0.0:
            return self.bubble_at_temperature(temperature)
        if vapour_fraction == 1.0:
            return self.dew_at_temperature(temperature)
        bubble = self._point_at_temperature(BUBBLE, temperature)
        dew = self._point_at_temperature(DEW, temperature)
        return self._between(bubble, dew, Given.VAPOUR_FRACTION, vapour_fraction, vapour_fraction, False)

    def state_superheat(self, pressure: float, superheat: float) -> State:
        """Return vapour at a pressure [Pa], warmer than its dew point by the superheat [K].

        Raises OutOfRange, or Refusal when the superheat is negative.
        """
        if not superheat >= 0.0:
            raise Refusal(
                f"A superheat of {superheat:g} K is impossible: vapour is never colder than its dew point.",
                "Write zero or more, or give a vapour fraction.",
            )
        dew = self.dew_at_pressure(pressure)
        if superheat == 0.0:
            return dew
        temperature = dew.temperature + superheat
        self._limits.check_temperature(temperature)
        return self._single(Region.SUPERHEATED, pressure, temperature)

    def state_subcooling(self, pressure: float, subcooling: float) -> State:
        """Return liquid at a pressure [Pa], colder than its bubble point by the subcooling [K].

        Raises OutOfRange, or Refusal when the subcooling is negative.
        """
        if not subcooling >= 0.0:
            raise Refusal(
                f"A subcooling of {subcooling:g} K is impossible: liquid is never warmer than its bubble point.",
                "Write zero or more, or give a vapour fraction.",
            )
        bubble = self.bubble_at_pressure(pressure)
        if subcooling == 0.0:
            return bubble
        temperature = bubble.temperature - subcooling
        self._limits.check_temperature(temperature)
        return self._single(Region.SUBCOOLED, pressure, temperature)

    # --- which region

    def _region(self, pressure: float, temperature: float) -> Region:
        """Decide the region from the curves; raises Refusal where nothing can be decided."""
        try:
            covered = self._bubble.reaches(temperature) and self._dew.reaches(temperature)
        except NoRoot:
            self._no_number(celsius(temperature))
        if not covered:
            return self._region_beyond(pressure, temperature)
        if pressure > 1.0005 * self._bubble.guess_pressure(temperature):
            return self._liquid_region(pressure)
        if pressure < 0.9995 * self._dew.guess_pressure(temperature):
            return Region.SUPERHEATED
        try:
            bubble = self._bubble.at_temperature(temperature)
            dew = self._dew.at_temperature(temperature) if self._model.blend else bubble
        except NoRoot:
            self._no_number(f"{celsius(temperature)} and {bar(pressure)}")
        blur = 1e-9
        if self.refrigerant.nature != "zeotrope":
            warmer = self._bubble.guess_pressure(min(temperature, self._top) - 0.5)
            blur = max(1e-6, 2.0 * SAME_TEMPERATURE * abs(math.log(bubble.pressure / warmer)))
        if pressure > bubble.pressure * (1.0 + blur):
            return self._liquid_region(pressure)
        if pressure < dew.pressure * (1.0 - blur):
            return Region.SUPERHEATED
        if self.refrigerant.nature != "zeotrope":
            raise Refusal(
                f"{bar(pressure)} and {celsius(temperature)} lie on the saturation line of "
                f"{self.refrigerant.designation}: they do not tell how much of it is vapour.",
                "Give the vapour fraction, or saturated liquid or saturated vapour.",
            )
        return Region.TWO_PHASE

    @property
    def _top(self) -> float:
        return min(self._bubble.highest.temperature, self._dew.highest.temperature)

    def _liquid_region(self, pressure: float) -> Region:
        if pressure > self.critical_pressure:
            return Region.LIQUID_ABOVE_CRITICAL_PRESSURE
        return Region.SUBCOOLED

    def _region_beyond(self, pressure: float, temperature: float) -> Region:
        """The region above the end of the curves, or below their beginning."""
        if temperature < self._bubble.lowest.temperature + 1e-6:
            return Region.SUPERHEATED if pressure < self._dew.lowest.pressure else Region.SUBCOOLED
        if pressure < 0.999 * self._dew.highest.pressure:
            return Region.SUPERHEATED
        window = self._model.window
        if window is not None and pressure < window.pressure and temperature < window.temperature:
            self._limits.too_near(f"{celsius(temperature)} with {bar(pressure)}")
        if temperature > self.critical_temperature:
            return Region.SUPERCRITICAL if pressure > self.critical_pressure else Region.SUPERHEATED
        return self._liquid_region(pressure)

    # --- one phase

    def _single(self, region: Region, pressure: float, temperature: float) -> State:
        phase = self._phase_of(region)
        try:
            density = self._density(region, pressure, temperature)
        except NoRoot:
            self._no_number(f"{celsius(temperature)} and {bar(pressure)}")
        return self._state(phase, pressure, temperature, density, region)

    def _phase_of(self, region: Region) -> Phase:
        return self._vapour if region in (Region.SUPERHEATED, Region.SUPERCRITICAL) else self._liquid

    def _density(self, region: Region, pressure: float, temperature: float) -> float:
        """Return the molar density of one phase [mol/m3]; raises NoRoot."""
        phase = self._phase_of(region)
        if self._model.blend:
            phase.compose(phase.whole)
        highest = self._model.highest_density
        covered = self._bubble.reaches(temperature) and self._dew.reaches(temperature)
        if region is Region.SUPERHEATED:
            if covered:
                highest = 1.001 * self._dew.guess_at_temperature(temperature).vapour_density
            return phase.gas_density(pressure, temperature, highest)
        if region is Region.SUPERCRITICAL:
            ideal = pressure / (phase.gas_constant * temperature)
            return phase.search(pressure, temperature, 0.0, highest, min(ideal, phase.reducing_density))
        if covered:
            saturated = self._bubble.guess_at_temperature(temperature).liquid_density
            return phase.search(pressure, temperature, 0.999 * saturated, highest, saturated)
        low = self._model.critical_density_bound
        return phase.search(pressure, temperature, low, highest, 1.3 * low)

    # --- along an isobar

    def _on_isobar(self, pressure: float, value: float, given: Given) -> State:
        self._limits.check_pressure(pressure)
        shift = self._enthalpy_shift if given is Given.ENTHALPY else self._entropy_shift
        wanted = value - shift
        try:
            below = pressure <= self.critical_pressure or self._model.blend
            has_bubble = below and self._bubble.reaches_pressure(pressure)
            has_dew = below and self._dew.reaches_pressure(pressure)
            if has_bubble and has_dew:
                return self._across_dome(pressure, wanted, given)
            if has_dew or pressure < self._dew.lowest.pressure:
                start = self._dew.at_pressure(pressure).temperature if has_dew else self.minimum_temperature
                return self._along(Region.SUPERHEATED, pressure, wanted, given, start, self.maximum_temperature)
            return self._along(
                Region.SUPERCRITICAL, pressure, wanted, given, self.minimum_temperature, self.maximum_temperature
            )
        except NoRoot:
            unit = f"{value / 1e3:.1f} kJ/kg" if given is Given.ENTHALPY else f"{value / 1e3:.4f} kJ/(kg K)"
            self._no_number(f"{bar(pressure)} and {unit}")

    def _across_dome(self, pressure: float, wanted: float, given: Given) -> State:
        bubble = self._bubble.at_pressure(pressure)
        dew = self._dew.at_pressure(pressure) if self._model.blend else bubble
        low = self._measure(self._liquid, bubble.liquid_density, bubble.temperature, given)
        high = self._measure(self._vapour, dew.vapour_density, dew.temperature, given)
        slack = 1e-9 * (high - low)
        if abs(wanted - low) <= slack:
            return self._saturated(bubble, BUBBLE)
        if abs(wanted - high) <= slack:
            return self._saturated(dew, DEW)
        if wanted < low:
            return self._along(
                self._liquid_region(pressure), pressure, wanted, given, self.minimum_temperature, bubble.temperature,
                (bubble.temperature, bubble.liquid_density),
            )
        if wanted > high:
            return self._along(
                Region.SUPERHEATED, pressure, wanted, given, dew.temperature, self.maximum_temperature,
                (dew.temperature, dew.vapour_density),
            )
        return self._between(bubble, dew, given, wanted, (wanted - low) / (high - low))

    def _measure(self, phase: Phase, density: float, temperature: float, given: Given) -> float:
        """Enthalpy or entropy of the whole composition in the library's datum."""
        if self._model.blend:
            phase.compose(phase.whole)
        phase.at(density, temperature)
        return float(phase.state.hmass() if given is Given.ENTHALPY else phase.state.smass())

    def _along(
        self,
        region: Region,
        pressure: float,
        wanted: float,
        given: Given,
        coldest: float,
        warmest: float,
        start: tuple[float, float] | None = None,
    ) -> State:
        """Find the temperature between two bounds [K] at which one phase has the wanted value."""
        whole_isobar = region is Region.SUPERCRITICAL
        density: float | None = None
        if start is None:
            temperature = min(max(self.critical_temperature, coldest), warmest)
        else:
            temperature, density = start
        low, high = coldest, warmest
        for _ in range(100):
            here = self._region(pressure, temperature) if whole_isobar else region
            phase = self._phase_of(here)
            density = self._near_density(here, pressure, temperature, None if whole_isobar else density)
            excess = (phase.state.hmass() if given is Given.ENTHALPY else phase.state.smass()) - wanted
            low, high = (low, temperature) if excess > 0.0 else (temperature, high)
            slope = phase.state.cpmass() / (1.0 if given is Given.ENTHALPY else temperature)
            following = temperature - excess / slope
            if abs(following - temperature) < 1e-9 * temperature and coldest - 1e-6 < following < warmest + 1e-6:
                return self._finished(here, pressure, following)
            if not low < following < high:
                following = 0.5 * (low + high)
            if high - low < 1e-9 * temperature:
                break
            temperature = following
        return self._past_the_end(pressure, temperature, coldest, warmest)

    def _finished(self, region: Region, pressure: float, temperature: float) -> State:
        self._limits.check_temperature(temperature)
        density = self._near_density(region, pressure, temperature, None)
        return self._state(self._phase_of(region), pressure, temperature, density, region)

    def _near_density(self, region: Region, pressure: float, temperature: float, guess: float | None) -> float:
        phase = self._phase_of(region)
        if guess is not None:
            if self._model.blend:
                phase.compose(phase.whole)
            try:
                return phase.settle(pressure, temperature, guess)
            except NoRoot:
                pass
        density = self._density(region, pressure, temperature)
        phase.at(density, temperature)
        return density

    def _past_the_end(self, pressure: float, temperature: float, coldest: float, warmest: float) -> NoReturn:
        if abs(temperature - self.maximum_temperature) < 1e-3:
            raise OutOfRange(
                f"At {bar(pressure)} this state is hotter than {celsius(self.maximum_temperature)}, the highest "
                f"temperature for which the equation of {self.refrigerant.designation} is valid.",
                "Check the readings.",
            )
        if abs(temperature - self.minimum_temperature) < 1e-3:
            self._limits.too_cold(f"At {bar(pressure)} this state")
        self._no_number(f"{bar(pressure)} and {celsius(temperature)}")

    # --- between bubble and dew

    def _inside_glide(self, pressure: float, temperature: float) -> State:
        try:
            bubble = self._bubble.at_temperature(temperature)
            dew = self._dew.at_temperature(temperature)
            share = (bubble.pressure - pressure) / max(bubble.pressure - dew.pressure, 1e-12)
            if share < 1e-9:
                return self._saturated(bubble, BUBBLE)
            if share > 1.0 - 1e-9:
                return self._saturated(dew, DEW)
            ends = [
                Point(temperature, pressure, p.liquid_density, p.vapour_density, p.other) for p in (bubble, dew)
            ]
            split = self._dome.split(ends[0], ends[1], Given.BOTH, 0.0, share, True)
            if not 0.0 < split.vapour_fraction < 1.0:
                raise NoRoot("not between bubble and dew")
        except NoRoot:
            self._no_number(f"{bar(pressure)} and {celsius(temperature)}")
        return self._mixed(split)

    def _between(
        self, bubble: Point, dew: Point, given: Given, value: float, share: float, pressure_given: bool = True
    ) -> State:
        if not self._model.blend:
            return self._pure_mixture(bubble, share)
        try:
            return self._mixed(self._dome.split(bubble, dew, given, value, share, pressure_given))
        except NoRoot:
            self._no_number(f"{bar(bubble.pressure)} and {celsius(bubble.temperature)}")

    def _pure_mixture(self, point: Point, share: float) -> State:
        liquid = self._saturated(point, BUBBLE)
        vapour = self._saturated(point, DEW)

        def mean(low: float, high: float) -> float:
            return (1.0 - share) * low + share * high

        return State(
            point.pressure,
            point.temperature,
            mean(liquid.enthalpy, vapour.enthalpy),
            mean(liquid.entropy, vapour.entropy),
            1.0 / mean(1.0 / liquid.density, 1.0 / vapour.density),
            share,
            Region.TWO_PHASE,
            None,
        )

    def _mixed(self, split: Split) -> State:
        return State(
            split.pressure,
            split.temperature,
            split.enthalpy + self._enthalpy_shift,
            split.entropy + self._entropy_shift,
            split.density,
            split.vapour_fraction,
            Region.TWO_PHASE,
            None,
        )

    # --- datum

    def _set_datum(self) -> None:
        """Shift enthalpy and entropy so that they have the agreed values at the agreed state."""
        enthalpy, entropy = 0.0, 0.0
        if self.datum is Datum.IIR:
            enthalpy, entropy = 200e3, 1e3
        state = self._datum_state()
        self._enthalpy_shift = enthalpy - state.enthalpy
        self._entropy_shift = entropy - state.entropy

    def _datum_state(self) -> State:
        name = self.refrigerant.designation
        if self.datum is Datum.NBP:
            return self._agreed(lambda: self.bubble_at_pressure(NORMAL_PRESSURE), "it has no liquid at 101.325 kPa")
        if self.datum is Datum.ASHRAE:
            return self._agreed(lambda: self.bubble_at_temperature(ICE_POINT - 40.0), "it has no liquid at -40 °C")
        if ICE_POINT > self.critical_temperature - NEAREST:
            self.datum_note = f"h = 200 kJ/kg, s = 1 kJ/(kg K) for saturated liquid at 101.325 kPa: {name} has none at 0 °C"
            return self.bubble_at_pressure(NORMAL_PRESSURE)
        if self.minimum_temperature > ICE_POINT:
            lowest = self.minimum_temperature
            self.datum_note = (
                f"h = 200 kJ/kg, s = 1 kJ/(kg K) for saturated liquid at {celsius(lowest)}, "
                f"the lowest temperature of {name}, which has no liquid at 0 °C"
            )
            return self.bubble_at_temperature(lowest)
        return self.bubble_at_temperature(ICE_POINT)

    def _agreed(self, state: Callable[[], State], why: str) -> State:
        try:
            return state()
        except OutOfRange as error:
            raise OutOfRange(
                f"The datum “{self.datum.description}” does not exist for {self.refrigerant.designation}: {why}.",
                "Choose the IIR datum.",
            ) from error


@cache
def open_fluid(refrigerant: Refrigerant, datum: Datum = Datum.IIR) -> Fluid:
    """Return the refrigerant ready to be asked, the same object for the same refrigerant and datum.

    Raises NotModelled when no property model is available, OutOfRange when the datum does not exist for it.
    """
    if not refrigerant.modelled:
        raise NotModelled(
            f"{refrigerant.designation} is known, but its properties cannot be computed: {refrigerant.reason}",
            "Use the maker's pressure-temperature table for it.",
        )
    return Fluid(refrigerant, datum)
