"""Numbers on the way out, and the units a reader wants them in."""

from __future__ import annotations

import pytest

from gaugeside.errors import Refusal
from gaugeside.preferences import dress_of, read_site, site_of, site_source
from gaugeside.quantities import (
    CHOOSABLE,
    SEA_LEVEL,
    Dress,
    Kind,
    Sense,
    Site,
    bare_labels,
    both_differences,
    checked_single,
    gauge_and_absolute,
    number,
    shown,
)
from gaugeside.settings import Settings


@pytest.mark.parametrize(
    ("value", "decimals", "text"),
    [
        (12.404, 2, "12.40"), (-12.406, 2, "-12.41"), (0.0, 2, "0.00"), (-0.0, 1, "0.0"), (-0.04, 1, "0.0"),
        (0.05678, 2, "0.0568"), (0.00012345, 4, "0.000123"), (1e-15, 2, "0.00"), (-1e-15, 2, "0.00"),
        (1234567.89, 1, "1234567.9"), (float("nan"), 2, "-"), (float("inf"), 2, "-"),
    ],
)  # fmt: skip
def test_number(value: float, decimals: int, text: str) -> None:
    assert number(value, decimals) == text


@pytest.mark.parametrize("kind", CHOOSABLE)
def test_every_unit_offered_as_a_single_can_be_chosen(kind: Kind) -> None:
    for label in bare_labels(kind):
        assert checked_single(kind, label) == label
        assert checked_single(kind, label.upper()) == label
        assert dress_of(Settings(units={kind.value: label})).unit(kind).label == label


@pytest.mark.parametrize(
    ("kind", "label"), [(Kind.PRESSURE, "psig"), (Kind.PRESSURE, "micron"), (Kind.TEMPERATURE, "kW"), (Kind.POWER, "")]
)
def test_what_is_no_single_unit_is_refused_with_the_choices(kind: Kind, label: str) -> None:
    with pytest.raises(Refusal, match="is not a unit of") as refusal:
        checked_single(kind, label)
    assert bare_labels(kind)[0] in refusal.value.hint


def test_a_single_unit_that_is_unknown_is_left_to_the_system() -> None:
    dress = dress_of(Settings(dress="ip", units={"pressure": "cubits", "temperature": "°C"}, bare_pressure="absolute"))
    assert dress.unit(Kind.PRESSURE).label == "psi"
    assert dress.unit(Kind.TEMPERATURE).label == "°C"
    assert dress.default(Kind.PRESSURE).label == "psi abs"
    assert dress.bare is Sense.ABSOLUTE


def test_both_forms_of_a_number() -> None:
    assert gauge_and_absolute(361325.0, Dress(), SEA_LEVEL) == ("2.60 bar g", "3.61 bar abs")
    assert gauge_and_absolute(361325.0, Dress(), Site(83_000.0, "")) == ("2.78 bar g", "3.61 bar abs")
    # 500 micron in inch-pound dress, a deep vacuum in a large unit.
    assert gauge_and_absolute(66.66, Dress("ip"), SEA_LEVEL) == ("-14.7 psi g", "0.00967 psi abs")
    assert both_differences(5.0, Dress(), SEA_LEVEL) == ("5.0 K", "9.0 °F")
    assert both_differences(5.0, Dress("ip"), SEA_LEVEL) == ("9.0 °F", "5.0 K")
    assert shown(83_000.0, Kind.ABSOLUTE_PRESSURE, Dress(), SEA_LEVEL) == "83.0 kPa abs"
    assert shown(361325.0, Kind.PRESSURE, Dress("ip"), SEA_LEVEL) == "52.4 psi abs"


@pytest.mark.parametrize(
    ("text", "source", "pascal"),
    [
        ("640 m", "altitude", 101325.0 * (1 - 0.0065 * 640 / 288.15) ** (9.80665 * 28.9644 / (8314.32 * 0.0065))),
        ("2100 ft", "altitude", 101325.0 * (1 - 0.0065 * 640.08 / 288.15) ** (9.80665 * 28.9644 / (8314.32 * 0.0065))),
        ("94.1 kPa", "barometer", 94_100.0), ("941 mbar", "barometer", 94_100.0),
        ("27.8 inHg", "barometer", 27.8 * 3386.388640341),
    ],
)  # fmt: skip
def test_a_site_is_told_by_its_unit(text: str, source: str, pascal: float) -> None:
    assert site_source(text) == source
    # The altitude formula carries constants of six digits.
    assert read_site(text, source, Dress()).atmosphere == pytest.approx(pascal, rel=1e-6)
    remembered = Settings(site_pressure_text=text, site_pressure_from=source)  # type: ignore[arg-type]
    assert site_of(remembered) == read_site(text, source, Dress())


def test_a_site_without_a_word_is_sea_level_and_without_a_unit_is_refused() -> None:
    assert site_source("  ") == "sea level"
    assert site_of(Settings()) == SEA_LEVEL
    with pytest.raises(Refusal, match="could be an altitude or a barometer reading"):
        site_source("640")
    with pytest.raises(Refusal, match="this field takes an absolute pressure") as refusal:
        site_of(Settings(site_pressure_text="5 C", site_pressure_from="barometer"))
    assert refusal.value.field == "barometer"
    with pytest.raises(Refusal, match="has no unit"):
        read_site("29.92", "barometer", Dress())
