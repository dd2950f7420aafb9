"""Superheat and subcooling: from which point they count, at which pressure, and what a strange value means."""

from __future__ import annotations

import math

import pytest

from gaugeside.checks.sheet import Answer
from gaugeside.checks.view import ascii_only, sentence
from gaugeside.quantities import SEA_LEVEL, Dress, Site
from unit.check_tools import ask, number, refusal, said

ZERO = 273.15


def superheat(refrigerant: str, site: Site = SEA_LEVEL, **texts: str) -> Answer:
    return ask("superheat", refrigerant, site=site, **texts)


def saturated(refrigerant: str, point: str, pascal: float) -> float:
    """Return a saturation temperature [K] as the saturation pane gives it."""
    return number(ask("saturation", refrigerant, reading=f"{pascal!r} Pa abs"), f"{point}_temperature")


@pytest.mark.parametrize(
    ("refrigerant", "pressure", "published", "tolerance"),
    [
        # Saturation temperatures of Cengel and Boles, table A-12; another equation of state, 0.02 K apart.
        ("R-134a", "120 kPa abs", -22.32, 0.03), ("R-134a", "800 kPa abs", 31.31, 0.03),
        # NIST Chemistry WebBook 2007; pressures printed to 0.1 kPa.
        ("R-744", "2648.7 kPa abs", -10.0, 0.005), ("R-744", "3485.1 kPa abs", 0.0, 0.005),
        # Saturated ammonia table of the kind printed in Borgnakke and Sonntag, table B.2; 0.02 K apart.
        ("R-717", "429.6 kPa abs", 0.0, 0.03), ("R-717", "190.2 kPa abs", -20.0, 0.03),
    ],
)  # fmt: skip
def test_pure_refrigerants_against_published_saturation(
    refrigerant: str, pressure: str, published: float, tolerance: float
) -> None:
    found = superheat(
        refrigerant,
        suction_pressure=pressure, suction_temperature=f"{published + 6} C",
        liquid_pressure=pressure, liquid_temperature=f"{published - 4} C",
    )  # fmt: skip
    assert number(found, "superheat") == pytest.approx(6.0, abs=tolerance)
    assert number(found, "subcooling") == pytest.approx(4.0, abs=tolerance)
    assert number(found, "saturated_suction_temperature") - ZERO == pytest.approx(published, abs=tolerance)


@pytest.mark.parametrize("refrigerant", ["R-407C", "R-448A", "R-454C", "R-455A"])
def test_superheat_counts_from_dew_and_subcooling_from_bubble(refrigerant: str) -> None:
    suction, liquid = 3.6e5, 15.1e5
    found = superheat(
        refrigerant,
        suction_pressure=f"{suction} Pa abs", suction_temperature="2 C",
        liquid_pressure=f"{liquid} Pa abs", liquid_temperature="20 C",
        discharge_pressure=f"{liquid} Pa abs", discharge_temperature="80 C",
    )  # fmt: skip
    dew, bubble = saturated(refrigerant, "dew", suction), saturated(refrigerant, "bubble", liquid)
    hot = saturated(refrigerant, "dew", liquid)
    assert number(found, "superheat") == pytest.approx(2 + ZERO - dew, abs=1e-6)
    assert number(found, "subcooling") == pytest.approx(bubble - 20 - ZERO, abs=1e-6)
    assert number(found, "discharge_superheat") == pytest.approx(80 + ZERO - hot, abs=1e-6)
    assert number(found, "saturated_discharge_temperature") == pytest.approx(hot, abs=1e-6)
    # The other point is the whole glide away, 4 K and more for these.
    assert dew - saturated(refrigerant, "bubble", suction) > 4
    assert hot - bubble > 4
    assert "above the dew point" in said(found)
    assert "below the bubble point" in said(found)
    assert "dew; mean with bubble" in said(found)


def test_pressure_of_the_place_counts() -> None:
    """At 1600 m the same gauge stands for a lower absolute pressure; ISO 2533 gives 83.52 kPa there."""
    atmosphere = 101325.0 * (1 - 0.0065 * 1600 / 288.15) ** (9.80665 * 28.9644 / (8314.32 * 0.0065))
    typed = {"suction_pressure": "2.6 bar g", "suction_temperature": "2 C"}
    low = superheat("R-448A", **typed)
    high = superheat("R-448A", Site(atmosphere, "altitude 1600 m"), **typed)
    shift = saturated("R-448A", "dew", 2.6e5 + 101325.0) - saturated("R-448A", "dew", 2.6e5 + atmosphere)
    assert number(high, "superheat") - number(low, "superheat") == pytest.approx(shift, abs=1e-6)
    assert shift > 1


@pytest.mark.parametrize(
    ("texts", "finding", "words"),
    [
        (
            {"suction_pressure": "2 bar g", "suction_temperature": "-5 C"},
            "superheat", ["BELOW the dew point", "Superheat < 0 cannot be", "two-phase"],
        ),
        (
            {"liquid_pressure": "8 bar g", "liquid_temperature": "45 C"},
            "subcooling", ["ABOVE the bubble point", "Subcooling < 0 cannot be", "sensor"],
        ),
        (
            {"discharge_pressure": "8 bar g", "discharge_temperature": "20 C"},
            "discharge_superheat", ["BELOW the dew point", "Discharge superheat < 0 cannot be", "gauge/abs"],
        ),
    ],
)  # fmt: skip
def test_negative_value_is_shown_and_explained(texts: dict[str, str], finding: str, words: list[str]) -> None:
    found = superheat("R-134a", **texts)
    assert number(found, finding) < 0
    for word in words:
        assert word in said(found)


@pytest.mark.parametrize(
    ("with_drop", "without", "finding"),
    [
        (
            {"suction_pressure": "2 bar g", "suction_temperature": "10 C", "suction_pressure_drop": "0.2 bar"},
            {"suction_pressure": "2.2 bar g", "suction_temperature": "10 C"}, "superheat",
        ),
        (
            {"liquid_pressure": "12 bar g", "liquid_temperature": "20 C", "liquid_pressure_drop": "0.4 bar"},
            {"liquid_pressure": "11.6 bar g", "liquid_temperature": "20 C"}, "subcooling",
        ),
    ],
)  # fmt: skip
def test_pressure_drop_moves_the_pressure_to_the_clamp(
    with_drop: dict[str, str], without: dict[str, str], finding: str
) -> None:
    dropped = superheat("R-407C", **with_drop)
    assert number(dropped, finding) == pytest.approx(number(superheat("R-407C", **without), finding), abs=1e-6)
    assert "pressure at the pipe clamp taken as" in said(dropped)


def test_pressure_ratio_is_of_absolute_pressures_at_the_gauges() -> None:
    found = superheat(
        "R-134a", suction_pressure="2 bar abs", discharge_pressure="10 bar abs", suction_pressure_drop="0.5 bar"
    )
    assert number(found, "pressure_ratio") == pytest.approx(5.0, rel=1e-12)
    swapped = superheat("R-134a", suction_pressure="10 bar abs", discharge_pressure="2 bar abs")
    assert number(swapped, "pressure_ratio") == pytest.approx(0.2, rel=1e-12)
    assert swapped.cautions[0].text == "Discharge pressure is below suction: swapped?"


def test_pressures_alone_give_saturated_temperatures() -> None:
    found = superheat("R-454C", suction_pressure="2 bar g", liquid_pressure="14 bar g")
    assert set(found.findings) == {"saturated_suction_temperature", "saturated_liquid_temperature"}
    assert number(found, "saturated_liquid_temperature") == pytest.approx(
        saturated("R-454C", "bubble", 14e5 + 101325), abs=1e-6
    )


@pytest.mark.parametrize(
    ("texts", "field", "words"),
    [
        ({}, "suction_pressure", "No reading is typed"),
        ({"suction_temperature": "2 C"}, "suction_pressure", "suction temperature has no suction pressure beside it"),
        ({"liquid_temperature": "2 C"}, "liquid_pressure", "liquid temperature has no liquid pressure beside it"),
        ({"discharge_temperature": "70 C"}, "discharge_pressure", "no discharge pressure beside it"),
        ({"suction_pressure_drop": "0.1 bar"}, "suction_pressure", "suction pressure drop has no suction pressure"),
        (
            {"suction_pressure": "2 bar g", "suction_temperature": "9 C", "liquid_temperature": "20 C"},
            "liquid_pressure", "liquid temperature has no liquid pressure",
        ),
        (
            {"liquid_pressure": "2 bar abs", "liquid_temperature": "2 C", "liquid_pressure_drop": "3 bar"},
            "liquid_pressure_drop", "larger than the pressure itself",
        ),
        ({"suction_pressure": "2 bar g", "suction_temperature": "2 bar"}, "suction_temperature", "takes a temperature"),
        (
            {"suction_pressure": "2 bar g", "suction_pressure_drop": "2 K"}, "suction_pressure_drop",
            "pressure difference",
        ),
    ],
)  # fmt: skip
def test_missing_partner_and_misfits_are_refused_by_field(texts: dict[str, str], field: str, words: str) -> None:
    refused = refusal("superheat", "R-134a", **texts)
    assert refused.field == field
    assert words in refused.sentence()


def test_a_pair_that_is_whole_is_answered_beside_one_that_is_not() -> None:
    found = superheat("R-134a", suction_pressure="2 bar g", suction_temperature="9 C", liquid_temperature="20 C")
    assert found.unresolved is not None
    assert number(found, "superheat") > 0


def test_transcritical_high_side_is_said_in_words_and_the_suction_answered() -> None:
    found = superheat(
        "R-744", suction_pressure="26 bar g", suction_temperature="0 C", liquid_pressure="90 bar g",
        liquid_temperature="35 C", discharge_pressure="90 bar g", discharge_temperature="110 C",
    )  # fmt: skip
    assert set(found.findings) == {"superheat", "saturated_suction_temperature", "pressure_ratio"}
    text = said(found)
    assert "is above the critical 73.77 bar abs: there is no bubble or dew point, so no subcooling" in text
    assert "gas cooler, judged by its outlet temperature" in text
    alone = refusal("superheat", "R-744", liquid_pressure="90 bar g", liquid_temperature="35 C")
    assert alone.field == "liquid_pressure"
    assert "no saturation above its critical point" in alone.sentence()
    assert "no subcooling" in alone.sentence()
    assert "take a gas cooler as a component" in alone.sentence()


def test_below_the_triple_point_is_said_in_words() -> None:
    found = superheat("R-744", suction_pressure="3 bar g", liquid_pressure="20 bar g", liquid_temperature="-30 C")
    assert "dry ice" in said(found)
    assert "saturated_suction_temperature" not in found.findings
    assert number(found, "subcooling") > 0


@pytest.mark.parametrize("refrigerant", ["R-454C", "R-448A", "R-407C", "R-455A"])
def test_beside_the_critical_point_subcooling_needs_no_dew_point(refrigerant: str) -> None:
    """Just below the critical pressure the bubble point is still far enough from the end, the dew point is not."""
    critical = {"R-454C": 43.70e5, "R-448A": 46.05e5, "R-407C": 46.39e5, "R-455A": 46.02e5}[refrigerant]
    found = superheat(refrigerant, liquid_pressure=f"{0.975 * critical} Pa abs", liquid_temperature="60 C")
    assert number(found, "subcooling") > 10
    assert "mean with" not in said(found)


@pytest.mark.parametrize(
    ("texts", "words"),
    [
        ({"suction_pressure": "-0.2 bar g"}, ["below the atmosphere (1.01 bar abs): a leak draws in air"]),
        ({"discharge_pressure": "12 bar g", "discharge_temperature": "106 C"}, ["usual caution of 105.0 °C"]),
        ({"discharge_pressure": "12 bar g", "discharge_temperature": "121 C"}, ["usual alarm of 120.0 °C"]),
        (
            {"suction_pressure": "1 bar abs", "discharge_pressure": "9 bar abs"},
            ["Pressure ratio above 8", "leak draws"],
        ),
        ({"suction_pressure": "2 bar g", "discharge_pressure": "9 bar g", "discharge_temperature": "80 C"}, []),
    ],
)  # fmt: skip
def test_cautions_stand_where_they_apply(texts: dict[str, str], words: list[str]) -> None:
    found = superheat("R-134a", **texts)
    assert len(found.cautions) == len(words)
    for word in words:
        assert word in said(found)


@pytest.mark.parametrize(("refrigerant", "pressure"), [("R-717", "12 bar g"), ("R-744", "60 bar g")])
@pytest.mark.parametrize(("pipe", "limit"), [("104 C", ""), ("106 C", "105.0 °C"), ("121 C", "120.0 °C")])
def test_for_machines_built_for_a_hot_discharge_the_maker_has_the_word(
    refrigerant: str, pressure: str, pipe: str, limit: str
) -> None:
    found = [
        sentence(remark, Dress(), SEA_LEVEL)
        for remark in superheat(refrigerant, discharge_pressure=pressure, discharge_temperature=pipe).cautions
    ]
    hot = f"Discharge at {limit} or more (common practice). {refrigerant}: maker's limit counts."
    assert [text for text in found if "ischarge" in text] == ([hot] if limit else [])
    assert len(hot) < 79


def test_the_maker_has_the_word_for_a_compressor_and_a_machine_too() -> None:
    hot = "R-717: maker's limit counts"
    ends = {"inlet": "3 bar g, -2 C", "outlet": "12 bar g, 125 C"}
    assert hot in said(ask("component", "R-717", component="compressor", mass_flow="0.1 kg/s", **ends))
    readings = {"suction_pressure": "3 bar g", "suction_temperature": "-2 C", "discharge_pressure": "12 bar g"}
    machine = ask("machine", "R-717", discharge_temperature="125 C", liquid_temperature="30 C", **readings)
    assert hot in said(machine)


def test_differences_are_given_in_kelvin_and_fahrenheit() -> None:
    """10 °F of superheat is 5.56 K and never -12.2 °C."""
    dew = saturated("R-134a", "dew", 2e5 + 101325.0)
    pipe = (dew * 1.8 - 459.67) + 10
    found = ask(
        "superheat", "R-134a", dress=Dress("ip"), suction_pressure="2 bar g", suction_temperature=f"{pipe:.9f} F"
    )
    assert number(found, "superheat") == pytest.approx(10 / 1.8, abs=1e-6)


@pytest.mark.parametrize(
    ("refrigerant", "doubt"),
    # Clamp ±1 K (common practice); how far the model may be off as the catalogue says it.
    [("R-134a", math.hypot(1, 0.05)), ("R-454C", math.hypot(1, 0.6))],
)
@pytest.mark.parametrize("check", ["superheat", "machine"])
def test_a_difference_that_clamp_and_model_could_make_is_no_proof(refrigerant: str, doubt: float, check: str) -> None:
    dew, bubble = saturated(refrigerant, "dew", 3e5), saturated(refrigerant, "bubble", 14e5)
    for difference, told in ((doubt - 0.01, True), (0.0, True), (doubt + 0.01, False), (-0.5, False)):
        found = ask(
            check, refrigerant, suction_pressure="3e5 Pa abs", suction_temperature=f"{dew + difference!r} K",
            liquid_pressure="14e5 Pa abs", liquid_temperature=f"{bubble - difference!r} K",
        )  # fmt: skip
        texts = [sentence(remark, Dress(), SEA_LEVEL) for remark in found.cautions]
        within = f"within clamp and model, ±{doubt:.1f} K (common practice):"
        for text in (f"Superheat {within} liquid possible.", f"Subcooling {within} vapour possible."):
            assert (text in texts) is told
            assert len(text) < 79


def test_the_doubt_of_a_difference_is_told_in_the_readers_unit() -> None:
    found = ask("superheat", "R-134a", dress=Dress("ip"), liquid_pressure="8 bar g", liquid_temperature="35.3 C")
    (remark,) = found.cautions
    assert "±1.8 °F" in sentence(remark, Dress("ip"), SEA_LEVEL)
    assert "+/-1.8 F" in ascii_only(sentence(remark, Dress("ip"), SEA_LEVEL))
