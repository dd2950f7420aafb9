"""The standard atmosphere against ISO 2533."""

from __future__ import annotations

import pytest

from gaugeside.errors import Refusal
from gaugeside.quantities import site_at_altitude, site_with_barometer, standard_atmosphere
from reference.tables import rows

TABLE = [(float(row["altitude_m"]), float(row["pressure_Pa"])) for row in rows("atmosphere.csv")]


def from_defining_constants(altitude: float) -> float:
    """6.5 K/km from 288.15 K and 101 325 Pa, g = 9.80665 m/s2, R = 8314.32 J/(kmol K), air of 28.9644 kg/kmol."""
    return float(101325.0 * (1 - 0.0065 * altitude / 288.15) ** (9.80665 * 28.9644 / (8314.32 * 0.0065)))


@pytest.mark.parametrize(("altitude", "published"), TABLE)
def test_published_pressure(altitude: float, published: float) -> None:
    # The formula's two constants carry six digits; at 11 000 m their rounding reaches 1.3e-6.
    assert standard_atmosphere(altitude) == pytest.approx(published, rel=2e-6)


@pytest.mark.parametrize(("altitude", "published"), TABLE)
def test_table_follows_from_the_defining_constants(altitude: float, published: float) -> None:
    assert from_defining_constants(altitude) == pytest.approx(published, abs=0.006)


@pytest.mark.parametrize("altitude", [-1000.0, 0.0, 11000.0])
def test_range_is_closed(altitude: float) -> None:
    assert standard_atmosphere(altitude) == pytest.approx(from_defining_constants(altitude), rel=2e-6)


@pytest.mark.parametrize("altitude", [-1001.0, 11001.0, 1e6, float("nan")])
def test_altitude_outside_the_troposphere_is_refused(altitude: float) -> None:
    with pytest.raises(Refusal, match="outside the standard atmosphere"):
        standard_atmosphere(altitude)


@pytest.mark.parametrize("pressure", [21_900.0, 115_100.0, 760.0])
def test_barometer_that_no_weather_gives_is_refused(pressure: float) -> None:
    with pytest.raises(Refusal, match="is not an atmospheric pressure"):
        site_with_barometer(pressure, "typed")


def test_site_says_where_its_atmosphere_comes_from() -> None:
    assert site_at_altitude(1600.0, "5250 ft").source == "altitude 5250 ft, standard atmosphere ISO 2533"
    assert site_with_barometer(83_000.0, "83 kPa").source == "barometer 83 kPa"
