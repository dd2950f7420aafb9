"""The atmosphere at the site, from which gauge pressures are counted."""

from __future__ import annotations

from dataclasses import dataclass

from gaugeside.errors import Refusal

STANDARD_ATMOSPHERE = 101325.0
LOWEST_ALTITUDE, HIGHEST_ALTITUDE = -1000.0, 11000.0
# Barometer readings outside are not weather: the sea-level record extremes are 87 and 108.5 kPa, and the
# standard atmosphere at 11 000 m is 22.6 kPa.
LOWEST_BAROMETER, HIGHEST_BAROMETER = 22000.0, 115000.0


@dataclass(frozen=True)
class Site:
    """Atmospheric pressure at the site [Pa] and, in words, where the figure comes from."""

    atmosphere: float = STANDARD_ATMOSPHERE
    source: str = "standard atmosphere at sea level"


SEA_LEVEL = Site()


def standard_atmosphere(altitude: float) -> float:
    """Return the pressure [Pa] of the standard atmosphere at a geopotential altitude [m].

    p = 101325 (1 - 2.25577e-5 H)^5.25588, troposphere. Source: ISO 2533:1975, the constants of
    its equation for a lapse rate of 6.5 K/km. Raises Refusal outside -1000 m to 11 000 m.
    """
    if not LOWEST_ALTITUDE <= altitude <= HIGHEST_ALTITUDE:
        raise Refusal(
            f"An altitude of {altitude:.0f} m is outside the standard atmosphere used here (-1000 m to 11 000 m).",
            "Type the altitude above sea level, for example 640 m or 2100 ft, or a barometer reading.",
        )
    return float(STANDARD_ATMOSPHERE * (1 - 2.25577e-5 * altitude) ** 5.25588)


def site_at_altitude(altitude: float, typed: str) -> Site:
    """Return the site at an altitude [m]; `typed` is how the person wrote it."""
    return Site(standard_atmosphere(altitude), f"altitude {typed}, standard atmosphere ISO 2533")


def site_with_barometer(pressure: float, typed: str) -> Site:
    """Return the site with a barometer reading [Pa absolute]; Refusal when no weather gives it."""
    if not LOWEST_BAROMETER <= pressure <= HIGHEST_BAROMETER:
        raise Refusal(
            f"A barometer reading of {pressure / 1000:.4g} kPa is not an atmospheric pressure (22 to 115 kPa).",
            "Type the absolute pressure at the site, not reduced to sea level, for example 94.1 kPa or 941 mbar.",
        )
    return Site(pressure, f"barometer {typed}")
