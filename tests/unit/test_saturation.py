"""Saturation as a person asks for it: what belongs together, what is beside the numbers, where there is none."""

from __future__ import annotations

from itertools import pairwise

import pytest

from gaugeside.checks.caution import standing_caution
from gaugeside.checks.view import every_pressure
from gaugeside.quantities import SEA_LEVEL, Dress, Site, standard_atmosphere
from gaugeside.refrigerants import search
from unit.check_tools import ask, number, refusal, said

ZERO = 273.15
# Ordinary summer condensing temperatures, where plain flashes of blends fail.
SUMMER = [
    ("R-410A", 45), ("R-407C", 55), ("R-454B", 57), ("R-448A", 65), ("R-404A", 40), ("R-404A", 60), ("R-407A", 50),
    ("R-407F", 52), ("R-407H", 48), ("R-417A", 62), ("R-422D", 58), ("R-427A", 54), ("R-442A", 46), ("R-449A", 66),
    ("R-450A", 64), ("R-452A", 56), ("R-452B", 51), ("R-454A", 49), ("R-454C", 47), ("R-455A", 53), ("R-507A", 59),
    ("R-513A", 61), ("R-502", 63), ("R-466A", 44),
]  # fmt: skip


@pytest.mark.parametrize(("refrigerant", "celsius"), SUMMER)
def test_summer_condensing_temperatures_have_bubble_and_dew(refrigerant: str, celsius: int) -> None:
    by_temperature = ask("saturation", refrigerant, reading=f"{celsius} C")
    assert number(by_temperature, "bubble_pressure") >= number(by_temperature, "dew_pressure") > 0
    # Typed back as pressures, they give the temperature again.
    for point in ("bubble", "dew"):
        pressure = number(by_temperature, f"{point}_pressure")
        by_pressure = ask("saturation", refrigerant, reading=f"{pressure!r} Pa abs")
        assert number(by_pressure, f"{point}_temperature") == pytest.approx(celsius + ZERO, abs=1e-6)


@pytest.mark.parametrize("refrigerant", ["R-134a", "R-717", "R-744", "R-507A", "R-410A", "R-448A", "R-455A"])
@pytest.mark.parametrize("reading", ["12.4 bar g", "-8 C"])
def test_findings_belong_together(refrigerant: str, reading: str) -> None:
    found = ask("saturation", refrigerant, reading=reading)
    bubble, dew = number(found, "bubble_temperature"), number(found, "dew_temperature")
    glide, mean = number(found, "glide"), number(found, "mean_temperature")
    assert glide >= 0
    assert mean == pytest.approx(dew - glide / 2, abs=1e-6)
    if "bar" in reading:
        assert glide == pytest.approx(dew - bubble, abs=1e-6)
        assert number(found, "latent_heat") == pytest.approx(
            number(found, "vapour_enthalpy") - number(found, "liquid_enthalpy"), rel=1e-9
        )
        assert number(found, "bubble_pressure") == pytest.approx(12.4e5 + 101325, rel=1e-9)
    else:
        assert bubble == pytest.approx(dew, abs=1e-9)
    assert number(found, "liquid_density") > number(found, "vapour_density") > 0


@pytest.mark.parametrize("refrigerant", ["R-134a", "R-717", "R-22", "R-290"])
def test_latent_heat_obeys_clapeyron(refrigerant: str) -> None:
    """dp/dT = h_fg / (T (v_g - v_f)) for a pure refrigerant, the slope by central difference."""
    step = 0.05
    low, middle, high = (ask("saturation", refrigerant, reading=f"{10 + offset} C") for offset in (-step, 0, step))
    slope = (number(high, "dew_pressure") - number(low, "dew_pressure")) / (2 * step)
    volume = 1 / number(middle, "vapour_density") - 1 / number(middle, "liquid_density")
    # The difference's own error is of second order: (0.05 K)^2 times a curvature of 1e-3 per K2.
    assert number(middle, "latent_heat") == pytest.approx(slope * (10 + ZERO) * volume, rel=1e-5)


def test_zeotrope_says_which_point_is_for_what_and_where_glide_is_counted() -> None:
    text = said(ask("saturation", "R-448A", reading="-8 C"))
    assert "Count subcooling from the bubble point, superheat from the dew point; the mean is for coils." in text
    assert text.count("at the dew pressure") == 3
    assert "model itself is uncertain by about 0.5 K" in text
    pure = ask("saturation", "R-134a", reading="-8 C")
    assert number(pure, "glide") == 0.0
    assert "bubble point" not in said(pure)


@pytest.mark.parametrize(
    ("refrigerant", "words"),
    [
        ("R-454C", "R-454C: mildly flammable (A2L). Ventilate"), ("R-290", "R-290: highly flammable (A3)"),
        ("R-717", "R-717: toxic, mildly flammable (B2L)"), ("R-123", "R-123: toxic (B1)"),
        ("R-744", "displaces air in closed rooms"),
    ],
)  # fmt: skip
def test_caution_of_the_safety_class(refrigerant: str, words: str) -> None:
    answer = ask("saturation", refrigerant, reading="-5 C")
    assert [words in caution.text for caution in answer.cautions] == [True]
    assert ask("saturation", "R-134a", reading="-5 C").cautions == ()


def test_what_every_refrigerant_asks_of_a_person_fits_a_line() -> None:
    for refrigerant in search(""):
        text, is_urgent = standing_caution(refrigerant)
        assert text.startswith(f"{refrigerant.designation}: ")
        assert len(text) <= 80, text
        assert is_urgent == (refrigerant.safety_class != "A1" or refrigerant.designation == "R-744")


@pytest.mark.parametrize(
    ("refrigerant", "reading", "words"),
    [
        ("R-744", "35 C", ["no saturation above its critical point", "30.98 °C and 73.77 bar abs", "supercritical"]),
        ("R-744", "80 bar abs", ["no saturation above its critical point", "80.00 bar abs is above it"]),
        ("R-744", "-60 C", ["below the triple point", "-56.56 °C", "dry ice"]),
        ("R-744", "4 bar abs", ["below the triple point", "5.18 bar abs", "dry ice"]),
        ("R-134a", "100.9 C", ["too near the critical point", "Stay at least 1 K away"]),
        ("R-134a", "-150 C", ["below", "Check the unit and the sign"]),
    ],
)
def test_no_saturation_is_said_in_a_sentence(refrigerant: str, reading: str, words: list[str]) -> None:
    refused = refusal("saturation", refrigerant, reading=reading)
    assert refused.field == "reading"
    for word in words:
        assert word in refused.sentence()


def test_nothing_typed_is_refused_by_name() -> None:
    assert refusal("saturation", "R-134a", reading="").field == "reading"


@pytest.mark.parametrize(
    ("dress", "reading", "first", "step", "marked"),
    [
        (Dress(), "30 C", 28 + ZERO, 1.0, 2), (Dress(), "30.3 C", 28 + ZERO, 1.0, None),
        (Dress("ip"), "86 F", (82 + 459.67) / 1.8, 2 / 1.8, 2),
        (Dress("ip"), "12.4 bar g", None, 2 / 1.8, None),
    ],
)  # fmt: skip
def test_neighbouring_rows_stand_at_whole_degrees(
    dress: Dress, reading: str, first: float | None, step: float, marked: int | None
) -> None:
    (table,) = ask("saturation", "R-454C", reading=reading, dress=dress).tables
    temperatures = [row[0] for row in table.rows]
    assert len(temperatures) == 5
    assert [b - a for a, b in pairwise(temperatures)] == pytest.approx([step] * 4)
    if first is not None:
        assert temperatures[0] == pytest.approx(first, abs=1e-9)
    assert table.marked == marked
    for at, bubble, dew in table.rows:
        row = ask("saturation", "R-454C", reading=f"{at!r} K")
        assert (bubble, dew) == pytest.approx((number(row, "bubble_pressure"), number(row, "dew_pressure")), rel=1e-9)


def test_neighbouring_rows_end_where_saturation_ends() -> None:
    (table,) = ask("saturation", "R-744", reading="29.5 C").tables
    assert [round(row[0] - ZERO) for row in table.rows] == [28, 29]


def test_pressure_in_every_unit_gauge_and_absolute() -> None:
    site = Site(standard_atmosphere(1600.0), "altitude 1600 m")
    shown = every_pressure(ask("saturation", "R-134a", reading="2 bar g", site=site), Dress(), site)
    assert shown is not None
    assert shown.headings == ("unit", "gauge", "abs")
    rows = {row[0]: [float(cell) for cell in row[1:]] for row in shown.rows}
    assert rows["bar"] == pytest.approx([2.0, 2.0 + site.atmosphere / 1e5], abs=0.005)
    # 2e5 Pa divided by the published factors.
    assert rows["psi"][0] == pytest.approx(29.0, abs=0.05)
    assert rows["inHg"][0] == pytest.approx(59.06, abs=0.005)
    assert rows["kgf/cm2"][0] == pytest.approx(2.039, abs=0.0005)
    blend = every_pressure(ask("saturation", "R-454C", reading="2 C"), Dress(), SEA_LEVEL)
    assert blend is not None
    assert blend.headings == ("unit", "bubble gauge", "bubble abs", "dew gauge", "dew abs")


def test_datum_moves_enthalpies_and_not_their_difference() -> None:
    by_datum = {name: ask("saturation", "R-134a", datum=name, reading="2 bar g") for name in ("iir", "ashrae", "nbp")}
    assert len({round(number(found, "liquid_enthalpy")) for found in by_datum.values()}) == 3
    latent = number(by_datum["iir"], "latent_heat")
    for found in by_datum.values():
        assert number(found, "latent_heat") == pytest.approx(latent, rel=1e-9)


@pytest.mark.parametrize(
    ("datum", "celsius", "enthalpy"), [("iir", "0 C", 200e3), ("ashrae", "-40 C", 0.0), ("nbp", "101325 Pa abs", 0.0)]
)
def test_datum_is_where_it_says(datum: str, celsius: str, enthalpy: float) -> None:
    found = ask("saturation", "R-404A", datum=datum, reading=celsius)
    assert number(found, "liquid_enthalpy") == pytest.approx(enthalpy, abs=1e-3)
    assert "Enthalpies: " in said(found)
