"""States of one refrigerant from any two of the readings a person can have."""

from __future__ import annotations

from functools import cache
from math import isfinite
from typing import NoReturn

from ..errors import NotModelled, OutOfRange, Refusal
from . import library
from .catalogue import Refrigerant
from .curves import Curve
from .datum import shifts
from .dome import Dome, Given, Split
from .limits import MARGIN, Limits, bar, celsius, check_fraction
from .model import Model
from .phases import NoRoot, Phase
from .single import FINEST, Found, OnePhase, Outside
from .solvers import BUBBLE, DEW, Point
from .states import Datum, Region, State

# Between interpolated curves this far from either [pressure ratio] a flash needs no exact point of them.
NEAR_END = 1.0003


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
        self._bubble: Curve = model.bubble
        self._dew: Curve = model.dew
        self._one = OnePhase(model)
        self._dome = Dome(model.liquid, model.vapour)
        self._enthalpy_shift = self._entropy_shift = 0.0
        self.datum_note, enthalpy, entropy = shifts(self, datum)
        self._enthalpy_shift, self._entropy_shift = enthalpy, entropy

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
        self._limits.check_positive(pressure)
        curve = self._curve(side)
        try:
            if not curve.reaches_pressure(pressure):
                if pressure < curve.lowest.pressure:
                    self._limits.too_cold(bar(pressure))
                self._limits.check_saturation_pressure(pressure)
                self._limits.too_near(bar(pressure))
            point = curve.at_pressure(pressure)
        except NoRoot:
            self._no_number(bar(pressure))
        if point.temperature > self.critical_temperature - MARGIN + 1e-7:
            self._limits.too_near(bar(pressure))
        return point

    def _no_number(self, what: str) -> NoReturn:
        raise OutOfRange(
            f"The property model of {self.refrigerant.designation} gives no reliable state at {what}.",
            "Try a reading nearby, or check it.",
        )

    def _evaluate(self, point: Point, side: int) -> tuple[Phase, float]:
        """Evaluate the phase that has the whole composition there; return it and its density [mol/m3]."""
        phase, density = (
            (self._model.liquid, point.liquid_density) if side == BUBBLE else (self._model.vapour, point.vapour_density)
        )
        if self._model.blend:
            phase.compose(phase.whole)
        phase.at(density, point.temperature)
        return phase, density

    def _saturated(self, point: Point, side: int) -> State:
        phase, density = self._evaluate(point, side)
        region = Region.SATURATED_LIQUID if side == BUBBLE else Region.SATURATED_VAPOUR
        return self._state(phase, Found(region, point.pressure, point.temperature, density), float(side))

    def _single(self, found: Found) -> State:
        return self._state(self._one.phase_of(found.region), found, None)

    def _state(self, phase: Phase, found: Found, vapour_fraction: float | None) -> State:
        """Return the state at which a phase has just been evaluated."""
        state = phase.state
        return State(
            found.pressure,
            found.temperature,
            state.hmass() + self._enthalpy_shift,
            state.smass() + self._entropy_shift,
            found.density * phase.molar_mass,
            vapour_fraction,
            found.region,
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
        try:
            region = self._one.region(pressure, temperature)
            if region is Region.TWO_PHASE:
                return self._inside_glide(pressure, temperature)
            return self._single(self._one.at(region, pressure, temperature))
        except NoRoot:
            self._no_number(f"{celsius(temperature)} and {bar(pressure)}")

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
        return self._one_phase(Region.SUPERHEATED, pressure, temperature)

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
        return self._one_phase(Region.SUBCOOLED, pressure, temperature)

    def _one_phase(self, region: Region, pressure: float, temperature: float) -> State:
        self._limits.check_temperature(temperature)
        try:
            return self._single(self._one.at(region, pressure, temperature))
        except NoRoot:
            self._no_number(f"{celsius(temperature)} and {bar(pressure)}")

    # --- along an isobar

    def _on_isobar(self, pressure: float, value: float, given: Given) -> State:
        self._limits.check_pressure(pressure)
        if not isfinite(value):
            raise Refusal("An enthalpy or entropy must be a number.", "Check the reading.")
        wanted = value - (self._enthalpy_shift if given is Given.ENTHALPY else self._entropy_shift)
        try:
            return self._across(pressure, wanted, given)
        except Outside as end:
            self._past_the_end(pressure, end.temperature)
        except NoRoot:
            unit = f"{value / 1e3:.1f} kJ/kg" if given is Given.ENTHALPY else f"{value / 1e3:.4f} kJ/(kg K)"
            self._no_number(f"{bar(pressure)} and {unit}")

    def _across(self, pressure: float, wanted: float, given: Given) -> State:
        """Return the state on an isobar, from compressed liquid across the dome to superheated vapour."""
        coldest, warmest = self.minimum_temperature, self.maximum_temperature
        if self._boils_at(pressure):
            return self._across_dome(pressure, wanted, given)
        if pressure < self._dew.highest.pressure and not self._boils_above(pressure):
            has_dew = self._dew.reaches_pressure(pressure)
            start = self._dew.at_pressure(pressure).temperature if has_dew else coldest
            found = self._one.along(Region.SUPERHEATED, pressure, wanted, given, (start, warmest), start)
        elif pressure < self._model.window.pressure:
            found = self._one.beside_critical(pressure, wanted, given)
        else:
            # Started well above the critical temperature: beside it Newton's method has no slope to follow.
            start = 1.08 * self.critical_temperature
            found = self._one.along(None, pressure, wanted, given, (coldest, warmest), start)
        return self._single(found)

    def _boils_at(self, pressure: float) -> bool:
        """Whether both curves have a point at a pressure [Pa]."""
        if pressure > self.critical_pressure and not self._model.blend:
            return False
        return self._dew.reaches_pressure(pressure) and (
            not self._model.blend or self._bubble.reaches_pressure(pressure)
        )

    def _boils_above(self, pressure: float) -> bool:
        """Whether a pressure [Pa] is above the beginning of the bubble curve."""
        return pressure > self._bubble.lowest.pressure

    def _across_dome(self, pressure: float, wanted: float, given: Given) -> State:
        bubble = self._bubble.at_pressure(pressure)
        dew = self._dew.at_pressure(pressure) if self._model.blend else bubble
        self._evaluate(bubble, BUBBLE)
        low = self._one.measure(Region.SUBCOOLED, given)
        self._evaluate(dew, DEW)
        high = self._one.measure(Region.SUPERHEATED, given)
        slack = 1e-9 * (high - low)
        if abs(wanted - low) <= slack:
            return self._saturated(bubble, BUBBLE)
        if abs(wanted - high) <= slack:
            return self._saturated(dew, DEW)
        if low < wanted < high:
            return self._between(bubble, dew, given, wanted, (wanted - low) / (high - low))
        if wanted < low:
            region, ends, start = Region.SUBCOOLED, (self.minimum_temperature, bubble.temperature), bubble.temperature
            if pressure > self.critical_pressure:
                region = Region.LIQUID_ABOVE_CRITICAL_PRESSURE
        else:
            region, ends, start = Region.SUPERHEATED, (dew.temperature, self.maximum_temperature), dew.temperature
        return self._single(self._one.along(region, pressure, wanted, given, ends, start))

    def _past_the_end(self, pressure: float, temperature: float) -> NoReturn:
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
        """Return the state that pressure and temperature fix between bubble and dew; raises NoRoot."""
        bubble, dew = self._bubble.guess_at_temperature(temperature), self._dew.guess_at_temperature(temperature)
        if not dew.pressure * NEAR_END < pressure < bubble.pressure / NEAR_END:
            bubble, dew = self._bubble.at_temperature(temperature), self._dew.at_temperature(temperature)
        share = (bubble.pressure - pressure) / (bubble.pressure - dew.pressure)
        if share < FINEST:
            return self._saturated(bubble, BUBBLE)
        if share > 1.0 - FINEST:
            return self._saturated(dew, DEW)
        try:
            split = self._dome.split(bubble, dew, Given.BOTH, pressure, share, True)
        except NoRoot:
            bubble, dew = self._bubble.at_pressure(pressure), self._dew.at_pressure(pressure)
            split = self._dome.split_slowly(bubble, dew, Given.BOTH, temperature)
        if not 0.0 < split.vapour_fraction < 1.0:
            raise NoRoot("not between bubble and dew")
        return self._mixed(split)

    def _between(
        self, bubble: Point, dew: Point, given: Given, value: float, share: float, pressure_given: bool = True
    ) -> State:
        if not self._model.blend:
            return self._pure_mixture(bubble, share)
        try:
            try:
                split = self._dome.split(bubble, dew, given, value, share, pressure_given)
            except NoRoot:
                if given is Given.VAPOUR_FRACTION:
                    raise
                split = self._dome.split_slowly(bubble, dew, given, value)
            return self._mixed(split)
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
