"""Where a refrigerant's numbers end, and the sentences that say so."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NoReturn

from ..errors import OutOfRange, Refusal

DRY_ICE = "R-744"
DEEPEST_VACUUM = 1e-3  # [Pa]; a good pump leaves a hundred times as much


def celsius(temperature: float) -> str:
    """Write a temperature [K] for a sentence."""
    return f"{temperature - 273.15:.2f} °C"


def bar(pressure: float) -> str:
    """Write a pressure [Pa] for a sentence."""
    value = pressure / 1e5
    return f"{value:.2f} bar abs" if value >= 1.0 else f"{value:.3g} bar abs"


# Nearer the critical temperature than this [K] the curves bend so sharply that a reading fixes nothing.
MARGIN = 1.0


@dataclass(frozen=True, slots=True)
class Limits:
    """The range of one refrigerant; temperatures [K], pressures absolute [Pa]."""

    designation: str
    critical_temperature: float
    critical_pressure: float
    minimum_temperature: float
    maximum_temperature: float
    maximum_pressure: float
    pure: bool

    @property
    def critical_point(self) -> str:
        """The critical point in words."""
        return f"{celsius(self.critical_temperature)} and {bar(self.critical_pressure)}"

    def above_critical(self, what: str) -> NoReturn:
        """Refuse saturation above the critical point; `what` is the offending number in words."""
        raise OutOfRange(
            f"{self.designation} has no saturation above its critical point, {self.critical_point}; {what}.",
            "Give pressure and temperature: above it there is a supercritical fluid, without bubble or dew point.",
        )

    def too_near(self, what: str) -> NoReturn:
        """Refuse saturation, or a state, beside the critical point."""
        raise OutOfRange(
            f"{what} is too near the critical point of {self.designation}, {self.critical_point}: "
            f"there liquid and vapour become alike and no reliable number can be given.",
            f"Stay at least {MARGIN:g} K away from it.",
        )

    def too_cold(self, what: str) -> NoReturn:
        """Refuse what lies below the lowest temperature."""
        if self.designation == DRY_ICE:
            raise OutOfRange(
                f"{what} is below the triple point of R-744, {celsius(self.minimum_temperature)} and 5.18 bar abs: "
                f"there it is dry ice and vapour, without a liquid.",
                "Give a reading above the triple point.",
            )
        kind = "triple point or the lowest temperature of the equation" if self.pure else "range of the model"
        raise OutOfRange(
            f"{what} is below the {kind} of {self.designation}, {celsius(self.minimum_temperature)}.",
            "Check the unit and the sign of the reading.",
        )

    def check_temperature(self, temperature: float) -> None:
        """Refuse a temperature [K] outside the equation."""
        if not temperature > 0.0:
            raise OutOfRange("A temperature must be above absolute zero.", "Check the reading.")
        if temperature < self.minimum_temperature:
            self.too_cold(celsius(temperature))
        if temperature > self.maximum_temperature:
            raise OutOfRange(
                f"{celsius(temperature)} is above {celsius(self.maximum_temperature)}, the highest temperature "
                f"for which the equation of {self.designation} is valid.",
                "Check the unit of the reading.",
            )

    def check_positive(self, pressure: float) -> None:
        """Refuse an absolute pressure [Pa] of zero or less."""
        if not pressure > 0.0:
            raise OutOfRange("An absolute pressure must be above zero.", "Check the reading and its reference.")
        if pressure < DEEPEST_VACUUM:
            raise OutOfRange("No vacuum pump reaches so low a pressure.", "Check the unit of the reading.")

    def check_pressure(self, pressure: float) -> None:
        """Refuse a pressure [Pa] outside the equation."""
        self.check_positive(pressure)
        if pressure > self.maximum_pressure:
            raise OutOfRange(
                f"{bar(pressure)} is above {bar(self.maximum_pressure)}, the highest pressure for which the "
                f"equation of {self.designation} is valid.",
                "Check the unit of the reading.",
            )

    def check_saturation_temperature(self, temperature: float) -> None:
        """Refuse a temperature [K] that has no saturation, or none that can be trusted."""
        if not temperature > 0.0:
            self.check_temperature(temperature)
        if temperature < self.minimum_temperature - 1e-9:
            self.too_cold(celsius(temperature))
        if temperature > self.critical_temperature:
            self.above_critical(f"{celsius(temperature)} is above it")
        if temperature > self.critical_temperature - MARGIN + 1e-9:
            self.too_near(celsius(temperature))

    def check_saturation_pressure(self, pressure: float) -> None:
        """Refuse a pressure [Pa] above the critical one."""
        if pressure > self.critical_pressure:
            self.above_critical(f"{bar(pressure)} is above it")


def check_fraction(vapour_fraction: float) -> None:
    """Refuse a vapour fraction outside 0 to 1."""
    if not 0.0 <= vapour_fraction <= 1.0:
        raise Refusal(
            f"A vapour fraction of {vapour_fraction:g} is impossible: it runs from 0 (liquid) to 1 (vapour).",
            "Write it between 0 and 1.",
        )
