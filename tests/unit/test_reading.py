"""Readings as people type them: what is read, as what, and what is refused with which words."""

from __future__ import annotations

import pytest

from gaugeside.errors import Refusal
from gaugeside.quantities import (
    SEA_LEVEL,
    Dress,
    Kind,
    Sense,
    Site,
    example,
    fold,
    labels,
    read,
    spellings,
    understood,
    unit,
    units,
)
from reference.tables import unit_factors
from unit.reading_tools import ABSOLUTE, ATMOSPHERE, IP, READ_KINDS, SI, refused, understand

BAR, PSI, INHG, KGF = 1e5, 6894.757293168361, 3386.388640341, 98066.5
FACTORS = {(one.kind, one.label): one for one in unit_factors()}

GAUGE = [
    ("185 psig", 185 * PSI), ("185 psi g", 185 * PSI), ("185 psi(g)", 185 * PSI), ("185 PSIG", 185 * PSI),
    ("185psig", 185 * PSI), ("185 psi gauge", 185 * PSI), ("185 psi gage", 185 * PSI), ("185 lbf/in2 g", 185 * PSI),
    ("12.4 barg", 12.4 * BAR), ("12.4 bar g", 12.4 * BAR), ("12.4 bar(g)", 12.4 * BAR), ("12.4 Bar G", 12.4 * BAR),
    ("12.4 bar [g]", 12.4 * BAR), ("12,4 bar g", 12.4 * BAR), ("12,4barg", 12.4 * BAR), ("\t12.4  bar  g ", 12.4 * BAR),
    ("300 kPag", 3e5), ("300 kPa g", 3e5), ("300 KPA G", 3e5), ("0.3 MPa(g)", 3e5), ("0.3 MPag", 3e5),
    ("3 kg/cm2 g", 3 * KGF), ("3 kgf/cm2 g", 3 * KGF), ("3 kgf/cm² g", 3 * KGF), ("3 atg", 3 * KGF),
    ("500 mbar g", 5e4), ("500 hPa g", 5e4), ("5 inHg g", 5 * INHG), ("200 mmHg g", 200 * 133.322387415),
    ("1 atm g", ATMOSPHERE), ("90000 Pa g", 9e4), ("-0.3 bar g", -0.3 * BAR), ("−0.3 bar g", -0.3 * BAR),
]  # fmt: skip
ABSOLUTES = [
    ("200 psia", 200 * PSI), ("200 psi a", 200 * PSI), ("200 psi abs", 200 * PSI), ("200 psi absolute", 200 * PSI),
    ("13.4 bara", 13.4 * BAR), ("13.4 bar a", 13.4 * BAR), ("13.4 bar(a)", 13.4 * BAR), ("400 kPa abs", 4e5),
    ("400 kPaa", 4e5), ("0.4 MPa abs", 4e5), ("4 ata", 4 * KGF), ("29.92 inHg abs", 29.92 * INHG),
    ("760 torr abs", 760 * 133.322387415), ("500 micron", 500 * 0.133322387415), ("500 microns", 500 * 0.133322387415),
    ("500 µmHg", 500 * 0.133322387415), ("2 atm abs", 2 * ATMOSPHERE), ("940 mbar abs", 9.4e4),
]  # fmt: skip
VACUUM = [
    ("10 inHg vac", 10 * INHG), ("10 in Hg vacuum", 10 * INHG), ('10 "Hg vac', 10 * INHG), ("10 inHg v", 10 * INHG),
    ("-10 inHg", 10 * INHG), ("23 inHg vac", 23 * INHG), ("0.5 bar vac", 0.5 * BAR),
    ("300 mmHg vac", 300 * 133.322387415),
    ("40 kPa vac", 4e4), ("5 psi vac", 5 * PSI),
]  # fmt: skip
PRESSURES = [
    *((text, ATMOSPHERE + value) for text, value in GAUGE),
    *ABSOLUTES,
    *((text, ATMOSPHERE - value) for text, value in VACUUM),
]


@pytest.mark.parametrize(("text", "pascal"), PRESSURES)
def test_pressure(text: str, pascal: float) -> None:
    assert understand(text).value == pytest.approx(pascal, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "kind", "value"),
    [
        ("-5°C", Kind.TEMPERATURE, 268.15), ("-5 °C", Kind.TEMPERATURE, 268.15), ("-5C", Kind.TEMPERATURE, 268.15),
        ("−5 º C", Kind.TEMPERATURE, 268.15), ("-5 deg C", Kind.TEMPERATURE, 268.15),
        ("+5 ℃", Kind.TEMPERATURE, 278.15),
        ("5 degrees Celsius", Kind.TEMPERATURE, 278.15), ("28 F", Kind.TEMPERATURE, (28 + 459.67) * 5 / 9),
        ("28°F", Kind.TEMPERATURE, (28 + 459.67) * 5 / 9), ("28 ℉", Kind.TEMPERATURE, (28 + 459.67) * 5 / 9),
        ("28 deg. F", Kind.TEMPERATURE, (28 + 459.67) * 5 / 9), ("20 degrees C", Kind.TEMPERATURE, 293.15),
        ("268.15 K", Kind.TEMPERATURE, 268.15), ("500 degR", Kind.TEMPERATURE, 500 / 1.8),
        ("10 F", Kind.TEMPERATURE_DIFFERENCE, 10 / 1.8), ("10 °F", Kind.TEMPERATURE_DIFFERENCE, 10 / 1.8),
        ("5 K", Kind.TEMPERATURE_DIFFERENCE, 5.0), ("5 °C", Kind.TEMPERATURE_DIFFERENCE, 5.0),
        ("5 ΔK", Kind.TEMPERATURE_DIFFERENCE, 5.0), ("-2 K", Kind.TEMPERATURE_DIFFERENCE, -2.0),
        ("0.14 kg/s", Kind.MASS_FLOW, 0.14), ("0,14 kg/s", Kind.MASS_FLOW, 0.14),
        ("400 lb/h", Kind.MASS_FLOW, 400 * 0.45359237 / 3600), ("400 lbs/hr", Kind.MASS_FLOW, 400 * 0.45359237 / 3600),
        ("21 kW", Kind.POWER, 21e3), ("6 TR", Kind.POWER, 6 * 3516.8528420666665),
        ("6 tons", Kind.POWER, 6 * 3516.8528420666665),
        ("24 kBtu/h", Kind.POWER, 24e3 * 1055.05585262 / 3600), ("24000 BTUH", Kind.POWER, 24e3 * 1055.05585262 / 3600),
        ("24 MBH", Kind.POWER, 24e3 * 1055.05585262 / 3600), ("5 PS", Kind.POWER, 5 * 735.49875),
        ("2 MW", Kind.POWER, 2e6),
        ("14 US gal/min", Kind.VOLUME_FLOW, 14 * 6.30901964e-5), ("14 USGPM", Kind.VOLUME_FLOW, 14 * 6.30901964e-5),
        ("200 cfm", Kind.VOLUME_FLOW, 200 * 4.719474432e-4), ("200 CFM", Kind.VOLUME_FLOW, 200 * 4.719474432e-4),
        ("3 m³/h", Kind.VOLUME_FLOW, 3 / 3600), ("412 kJ/kg", Kind.SPECIFIC_ENTHALPY, 412e3),
        ("177 Btu/lb", Kind.SPECIFIC_ENTHALPY, 177 * 2326.0), ("1.7 kJ/kg-K", Kind.SPECIFIC_ENTROPY, 1700.0),
        ("1.7 kJ/(kg·K)", Kind.SPECIFIC_ENTROPY, 1700.0), ("25 %", Kind.FRACTION, 0.25), ("0.25", Kind.FRACTION, 0.25),
        ("25 pct", Kind.FRACTION, 0.25), ("640 m", Kind.LENGTH, 640.0), ("2100'", Kind.LENGTH, 640.08),
        ("2100 ft", Kind.LENGTH, 640.08), ("1.6 km", Kind.LENGTH, 1600.0), ("0.2 bar", Kind.PRESSURE_DIFFERENCE, 2e4),
        ("30 inH2O", Kind.PRESSURE_DIFFERENCE, 30 * 249.08891), ("3 psi", Kind.PRESSURE_DIFFERENCE, 3 * PSI),
        ("83 kPa", Kind.ABSOLUTE_PRESSURE, 83e3), ("27.8 inHg", Kind.ABSOLUTE_PRESSURE, 27.8 * INHG),
        ("941 mbar abs", Kind.ABSOLUTE_PRESSURE, 94.1e3), ("12 kg/m3", Kind.DENSITY, 12.0),
    ],
)  # fmt: skip
def test_other_kinds(text: str, kind: Kind, value: float) -> None:
    # Factors in the table are written with ten digits where they have more.
    assert understand(text, kind).value == pytest.approx(value, rel=1e-9)


@pytest.mark.parametrize("kind", READ_KINDS)
def test_every_unit_is_read_by_its_own_label_and_written_back(kind: Kind) -> None:
    for label in labels(kind):
        one = unit(kind, label)
        if kind is Kind.ABSOLUTE_PRESSURE and one.sense not in (None, Sense.ABSOLUTE):
            continue
        # Small enough to be a possible vacuum and a possible fraction in every unit.
        number = "400" if kind is Kind.TEMPERATURE else "0.05"
        # Bare, a column of mercury has one meaning only where bare pressures are absolute.
        reading = understand(f"{number} {label}", kind, ABSOLUTE if kind is Kind.PRESSURE else SI)
        assert reading.unit.definition == one.definition, label
        assert reading.complete().startswith(f"{number} {label}"), label


@pytest.mark.parametrize(
    ("text", "number"),
    [
        ("12.4", 12.4), ("12,4", 12.4), ("0,140", 0.14), ("0.140", 0.14), (".5", 0.5), (",5", 0.5), ("5.", 5.0),
        ("1234", 1234.0), ("1 234", 1234.0), ("1\u202f234", 1234.0), ("1\u00a0234,5", 1234.5), ("1'234.5", 1234.5),
        ("1\u2019234", 1234.0), ("1,234.5", 1234.5), ("1.234,5", 1234.5), ("1,234,567", 1234567.0),
        ("1.234.567", 1234567.0), ("12 345.6", 12345.6), ("1,2345", 1.2345), ("1234,567", 1234.567), ("1.234", 1.234),
        ("1e3", 1000.0), ("1.5E2", 150.0), ("5e-3", 0.005), ("+7", 7.0), ("+ 7", 7.0), ("007", 7.0),
    ],
)  # fmt: skip
def test_number(text: str, number: float) -> None:
    assert understand(f"{text} kg/s", Kind.MASS_FLOW).value == number
    assert understand(text, Kind.MASS_FLOW).value == number


@pytest.mark.parametrize("minus", ["-", "−", "–", "‒", "- ", " − "])
def test_every_minus_sign_is_a_minus(minus: str) -> None:
    assert understand(f"{minus}8 C", Kind.TEMPERATURE).value == pytest.approx(265.15, abs=1e-12)


@pytest.mark.parametrize(
    ("text", "kind", "words"),
    [
        ("1,234 kPa", Kind.PRESSURE, ["1.234 or as 1234", "Write 1.234 or 1234"]),
        ("12,345", Kind.MASS_FLOW, ["12.345 or as 12345"]),
        ("-1,234 bar g", Kind.PRESSURE, ["1.234 or as 1234"]),
        ("5 mPa", Kind.PRESSURE, ["millipascal", "MPa"]), ("5 mPag", Kind.PRESSURE, ["millipascal"]),
        ("5 m Pa (g)", Kind.PRESSURE, ["millipascal"]), ("5 Mbar", Kind.PRESSURE, ["megabar", "mbar"]),
        ("5 mW", Kind.POWER, ["milliwatt", "MW"]), ("5 gpm", Kind.VOLUME_FLOW, ["which gallon", "US gal/min"]),
        ("5 gal/min", Kind.VOLUME_FLOW, ["which gallon"]), ("5 GPM", Kind.VOLUME_FLOW, ["which gallon"]),
        ("5 RT", Kind.POWER, ["ton of refrigeration", "TR"]), ("5 MBtu/h", Kind.POWER, ["thousand", "kBtu/h"]),
        ("5 MBTUH", Kind.POWER, ["thousand"]), ("5 mmbtu/h", Kind.POWER, ["thousand"]),
        ("5 R", Kind.TEMPERATURE, ["Rankine", "degR"]), ("5 °R", Kind.TEMPERATURE, ["degR"]),
        ("12 34 bar", Kind.PRESSURE, ["separators"]), ("1.2.3 bar", Kind.PRESSURE, ["separators"]),
        ("1,23,456 bar", Kind.PRESSURE, ["separators"]), ("1 2,3 bar", Kind.PRESSURE, ["separators"]),
        ("1.234,567.8 bar", Kind.PRESSURE, ["separators"]), ("12..4 bar", Kind.PRESSURE, ["separators"]),
    ],
)  # fmt: skip
def test_what_can_be_read_two_ways_is_refused(text: str, kind: Kind, words: list[str]) -> None:
    sentence = refused(text, kind)
    for word in words:
        assert word in sentence


@pytest.mark.parametrize(
    ("text", "kind", "words"),
    [
        ("12 brg", Kind.PRESSURE, ["'brg' is not a unit of pressure", "Did you mean bar g?"]),
        ("5 Celcius", Kind.TEMPERATURE, ["Did you mean °C?"]), ("5 kg/sek", Kind.MASS_FLOW, ["Did you mean kg/s?"]),
        ("5 killowatt", Kind.POWER, ["Did you mean kW?"]), ("5 psii", Kind.PRESSURE, ["Did you mean psi"]),
        ("5 zzz", Kind.PRESSURE, ["Write for example 2.6 bar g"]),
        ("5 K", Kind.PRESSURE, ["is a temperature; this field takes a pressure"]),
        ("5 bar g", Kind.TEMPERATURE, ["is a pressure; this field takes a temperature"]),
        ("5 bar g", Kind.PRESSURE_DIFFERENCE, ["is a pressure; this field takes a pressure difference"]),
        ("5 kg/s", Kind.POWER, ["is a mass flow; this field takes a heat or power"]),
        ("5 barg", Kind.ABSOLUTE_PRESSURE, ["gauge reading; a barometer is absolute"]),
        ("5 inHg vac", Kind.ABSOLUTE_PRESSURE, ["gauge reading; a barometer is absolute"]),
        ("bar g", Kind.PRESSURE, ["does not start with a number"]),
        ("g 5 bar", Kind.PRESSURE, ["not start with a number"]),
        ("--5 C", Kind.TEMPERATURE, ["does not start with a number"]), ("-", Kind.TEMPERATURE, ["number"]),
        ("12-14 bar", Kind.PRESSURE, ["not a unit of pressure"]), ("5 bar 3", Kind.PRESSURE, ["not a unit"]),
        ("2 * 5 bar", Kind.PRESSURE, ["not a unit"]), ("__import__('os')", Kind.PRESSURE, ["number"]),
        ("٣ bar", Kind.PRESSURE, ["does not start with a number"]), ("nan bar", Kind.PRESSURE, ["number"]),
        ("inf bar", Kind.PRESSURE, ["number"]), ("1e999 bar", Kind.PRESSURE, ["too large"]),
        ("1e308 MPa abs", Kind.PRESSURE, ["too large"]), ("0x10 bar", Kind.PRESSURE, ["not a unit"]),
        ("", Kind.PRESSURE, ["empty"]), ("   ", Kind.PRESSURE, ["empty"]), ("\t", Kind.PRESSURE, ["empty"]),
        ("9" * 10_000, Kind.PRESSURE, ["10000 characters"]), (" " * 10_000, Kind.PRESSURE, ["10000 characters"]),
        ("5 bar\x00", Kind.PRESSURE, ["control character (U+0000) at place 6"]), ("5\nbar", Kind.PRESSURE, ["U+000A"]),
        ("\x1b[31m5 bar", Kind.PRESSURE, ["U+001B) at place 1"]), ("5 \u202ebar", Kind.PRESSURE, ["U+202E"]),
        ("5\u200b bar", Kind.PRESSURE, ["U+200B"]), ("5 \ud800", Kind.PRESSURE, ["U+D800"]),
        ("-300 C", Kind.TEMPERATURE, ["absolute zero"]), ("0 K", Kind.TEMPERATURE, ["absolute zero"]),
        ("-500 F", Kind.TEMPERATURE, ["absolute zero"]), ("-1 bar abs", Kind.PRESSURE, ["no pressure is left"]),
        ("0 bar abs", Kind.PRESSURE, ["no pressure is left"]), ("-5 micron", Kind.PRESSURE, ["no pressure is left"]),
        ("-10 inHg vac", Kind.PRESSURE, ["A vacuum counts downward: write 10 inHg vac"]),
        ("-1 kPa", Kind.ABSOLUTE_PRESSURE, ["not above zero absolute pressure"]),
        ("25", Kind.FRACTION, ["not between 0 and 1", "Write 25 % or 0.25, if"]),
        ("101 %", Kind.FRACTION, ["not between", "for example 25 %"]),
        ("-0.1", Kind.FRACTION, ["not between"]),
    ],
)  # fmt: skip
def test_refusal_says_what_why_and_what_instead(text: str, kind: Kind, words: list[str]) -> None:
    sentence = refused(text, kind)
    for word in words:
        assert word in sentence
    assert sentence.isprintable()
    assert len(sentence) < 260


@pytest.mark.parametrize(
    "text", ["10 inHg", "10inHg", '10 "Hg', "+10 in Hg", "0.01 inHg", "300 mmHg", "5 torr", "29,92 inHg"]
)
def test_bare_mercury_is_a_vacuum_to_some_and_refused_with_the_three_ways_to_say_it(text: str) -> None:
    sentence = refused(text)
    assert sentence.startswith(f"'{text}' could be below or above the atmosphere, or absolute. ")
    offered = sentence.split("Write ")[1].removesuffix(".").replace(" or ", ", ").split(", ")
    assert len(offered) == 3
    down, up, absolute = (understand(one).value for one in offered)
    assert ATMOSPHERE - down == pytest.approx(up - ATMOSPHERE, abs=1e-9)
    assert up - absolute == pytest.approx(ATMOSPHERE, abs=1e-9)
    assert understand(text, dress=ABSOLUTE).value == pytest.approx(absolute, rel=1e-12)


def test_bare_mercury_with_one_meaning_is_read() -> None:
    assert understand("0 inHg").value == ATMOSPHERE
    assert understand("-10 mmHg").value == pytest.approx(ATMOSPHERE - 10 * 133.322387415, rel=1e-12)
    assert understand("29.92 inHg", Kind.ABSOLUTE_PRESSURE).value == pytest.approx(29.92 * INHG, rel=1e-12)
    assert understand("2 inHg", Kind.PRESSURE_DIFFERENCE).value == pytest.approx(2 * INHG, rel=1e-12)
    # A field that says "inHg g" says what its bare numbers are; one that says abs, what a bare unit is.
    assert read("10", Kind.PRESSURE, unit(Kind.PRESSURE, "inHg g"), SI, SEA_LEVEL).value == ATMOSPHERE + 10 * INHG
    assert read("10 inHg", Kind.PRESSURE, unit(Kind.PRESSURE, "inHg abs"), SI, SEA_LEVEL).value == 10 * INHG


@pytest.mark.parametrize(
    ("text", "field"), [("10 inHg", "inHg g"), ("10 inHg", "inHg vac"), ("10", "inHg"),
                      ("\t10\u00a0 inHg", "bar g"), ("1" * 40 + " inHg", "bar g")]
)  # fmt: skip
def test_bare_mercury_is_refused_whatever_gauge_unit_the_field_has(text: str, field: str) -> None:
    with pytest.raises(Refusal, match="could be below or above the atmosphere") as refusal:
        read(text, Kind.PRESSURE, unit(Kind.PRESSURE, field), SI, SEA_LEVEL)
    assert refusal.value.hint == "Write 10 inHg vac, 10 inHg g or 10 inHg abs."


@pytest.mark.parametrize(
    ("text", "below"), [("31 inHg vac", "104.98 kPa"), ("-1.2 bar g", "120.00 kPa"), ("2 bar vac", "200.00 kPa")]
)
def test_vacuum_deeper_than_the_atmosphere_names_both_numbers(text: str, below: str) -> None:
    sentence = refused(text)
    assert f"is {below} below the site atmosphere of 101.33 kPa" in sentence
    assert "29.92 inHg" in sentence


def test_the_atmosphere_of_the_site_decides_how_deep_a_vacuum_can_be() -> None:
    high = Site(83_000.0, "altitude 1600 m")
    assert understand("25 inHg vac").value == pytest.approx(ATMOSPHERE - 25 * INHG, rel=1e-12)
    assert "83.00 kPa" in refused("25 inHg vac", site=high)
    assert understand("20 inHg vac", site=high).value == pytest.approx(83_000.0 - 20 * INHG, rel=1e-12)
    assert understand("2 bar g", site=high).value == pytest.approx(283_000.0, rel=1e-12)
    assert understand("2 bar abs", site=high).value == pytest.approx(200_000.0, rel=1e-12)


@pytest.mark.parametrize(
    ("dress", "kind", "number", "value"),
    [
        (SI, Kind.PRESSURE, "2", ATMOSPHERE + 2 * BAR), (IP, Kind.PRESSURE, "30", ATMOSPHERE + 30 * PSI),
        (ABSOLUTE, Kind.PRESSURE, "2", 2 * BAR), (SI, Kind.TEMPERATURE, "-8", 265.15),
        (IP, Kind.TEMPERATURE, "32", 273.15), (IP, Kind.TEMPERATURE_DIFFERENCE, "9", 5.0),
        (SI, Kind.TEMPERATURE_DIFFERENCE, "9", 9.0), (IP, Kind.LENGTH, "1000", 304.8), (SI, Kind.POWER, "21", 21e3),
        (IP, Kind.ABSOLUTE_PRESSURE, "29", 29 * INHG), (SI, Kind.ABSOLUTE_PRESSURE, "83", 83e3),
        (Dress(singles={Kind.PRESSURE: "kPa"}), Kind.PRESSURE, "200", ATMOSPHERE + 2e5),
        (Dress("ip", {Kind.TEMPERATURE: "°C"}), Kind.TEMPERATURE, "0", 273.15),
    ],
)  # fmt: skip
def test_a_bare_number_takes_the_unit_the_field_shows(dress: Dress, kind: Kind, number: str, value: float) -> None:
    reading = understand(number, kind, dress)
    assert reading.bare_number
    assert reading.value == pytest.approx(value, rel=1e-12)
    assert reading.complete() == f"{number} {dress.default(kind).label}"


@pytest.mark.parametrize(
    ("text", "field", "dress", "value"),
    [
        ("2 bar", "bar g", ABSOLUTE, ATMOSPHERE + 2 * BAR), ("2 bar", "bar abs", SI, 2 * BAR),
        ("10 psi", "inHg vac", SI, ATMOSPHERE + 10 * PSI), ("10 psi", "inHg vac", ABSOLUTE, 10 * PSI),
        ("10", "inHg vac", SI, ATMOSPHERE - 10 * INHG), ("500", "micron", SI, 500 * 0.133322387415),
    ],
)  # fmt: skip
def test_a_pressure_without_gauge_or_absolute_is_what_the_field_says(
    text: str, field: str, dress: Dress, value: float
) -> None:
    reading = read(text, Kind.PRESSURE, unit(Kind.PRESSURE, field), dress, SEA_LEVEL)
    assert reading.value == pytest.approx(value, rel=1e-12)
    again = read(reading.complete(), Kind.PRESSURE, unit(Kind.PRESSURE, "psi abs"), IP, SEA_LEVEL)
    assert again.value == reading.value


@pytest.mark.parametrize(
    ("text", "kind", "dress", "shown"),
    [
        ("12.4 bar g", Kind.PRESSURE, SI, ("12.40 bar g", "13.41 bar abs")),
        ("38 psig", Kind.PRESSURE, SI, ("2.62 bar g", "3.63 bar abs")),
        ("38 psig", Kind.PRESSURE, IP, ("38.0 psi g", "52.7 psi abs")),
        ("10 inHg vac", Kind.PRESSURE, SI, ("-0.34 bar g", "0.67 bar abs")),
        ("28 F", Kind.TEMPERATURE, SI, ("-2.2 °C", "")), ("10 F", Kind.TEMPERATURE_DIFFERENCE, SI, ("5.6 K", "")),
        ("83 kPa", Kind.ABSOLUTE_PRESSURE, SI, ("83.0 kPa abs", "")), ("0.25", Kind.FRACTION, SI, ("25.0 %", "")),
        ("-0.04 C", Kind.TEMPERATURE, SI, ("0.0 °C", "")), ("6 TR", Kind.POWER, SI, ("21.10 kW", "")),
    ],
)  # fmt: skip
def test_understood_echoes_in_the_reader_units(text: str, kind: Kind, dress: Dress, shown: tuple[str, str]) -> None:
    assert understood(understand(text, kind, dress), dress, SEA_LEVEL) == shown


@pytest.mark.parametrize("kind", [kind for kind in Kind if kind is not Kind.WORDS])
def test_the_example_that_a_refusal_gives_can_itself_be_typed(kind: Kind) -> None:
    for text in example(kind).split(" or "):
        assert understand(text, kind, ABSOLUTE).kind is kind


def test_a_temperature_and_a_difference_are_two_kinds() -> None:
    assert understand("10 F", Kind.TEMPERATURE).value == pytest.approx(260.927778, abs=1e-6)
    assert understand("10 F", Kind.TEMPERATURE_DIFFERENCE).value == pytest.approx(5.555556, abs=1e-6)


def test_a_difference_is_read_in_every_spelling_of_a_temperature() -> None:
    differences = spellings(Kind.TEMPERATURE_DIFFERENCE)
    for spelling, one in spellings(Kind.TEMPERATURE).items():
        step = FACTORS["temperature", one.label].factor
        assert FACTORS["temperature difference", differences[spelling].label].factor == step


@pytest.mark.parametrize("kind", READ_KINDS)
def test_every_spelling_can_be_typed_and_every_label_leads_to_its_unit(kind: Kind) -> None:
    for label in labels(kind):
        assert unit(kind, label).label == label
    for spelling in spellings(kind):
        # A key that `fold` would change could never be typed.
        assert fold(spelling) == spelling


def test_a_spelling_of_two_units_cannot_enter_the_list(monkeypatch: pytest.MonkeyPatch) -> None:
    lengths = (*units._OTHERS[Kind.LENGTH], ("fathom", "fathom", 2, "m"))
    monkeypatch.setitem(units._OTHERS, Kind.LENGTH, lengths)
    with pytest.raises(ValueError, match="'m' would name both m and fathom"):
        spellings.__wrapped__(Kind.LENGTH)


@pytest.mark.parametrize("kind", [Kind.PRESSURE, Kind.ABSOLUTE_PRESSURE])
def test_no_bare_spelling_with_a_suffix_is_another_unit(kind: Kind) -> None:
    bare = {spelling: one for spelling, one in spellings(kind).items() if one.sense is None}
    suffixes = {Sense.GAUGE: "g gauge gage", Sense.ABSOLUTE: "a abs absolute", Sense.VACUUM: "v vac vacuum"}
    for spelling, one in bare.items():
        for sense, words in suffixes.items():
            for word in words.split():
                found = spellings(kind)[spelling + word]
                assert (found.definition, found.sense) == (one.definition, sense), spelling + word


@pytest.mark.parametrize(("typed", "offer"), [("3 ba", "bar"), ("3 in", "inHg"), ("3 kgf", "kgf/cm2")])
def test_a_unit_not_written_to_its_end_is_offered_whole(typed: str, offer: str) -> None:
    with pytest.raises(Refusal) as refused:
        read(typed, Kind.PRESSURE, SI.default(Kind.PRESSURE), SI, SEA_LEVEL)
    assert f"Did you mean {offer}?" in refused.value.sentence()
