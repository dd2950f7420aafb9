"""A form's lines as typed: what is blank, what a field remembers, what is refused and under whose name."""

from __future__ import annotations

import pytest

from gaugeside.checks import CHECKS
from gaugeside.checks.typed import TypedLine, read_form, read_line, takes
from gaugeside.quantities import SEA_LEVEL, Dress, Kind

SI, IP = Dress(), Dress("ip")
EITHER = CHECKS["saturation"].reading_line("reading")
PRESSURE = CHECKS["superheat"].reading_line("suction_pressure")
COMPONENT = CHECKS["component"].reading_line("component")
STATE = CHECKS["component"].reading_line("inlet")


def typed(line: object, text: str, units: dict[str, str] | None = None, dress: Dress = SI) -> TypedLine:
    return read_line(line, text, units or {}, dress, SEA_LEVEL)  # type: ignore[arg-type]


@pytest.mark.parametrize("line", [EITHER, PRESSURE, COMPONENT, STATE])
def test_a_blank_line_is_neither_read_nor_refused(line: object) -> None:
    for text in ("", "   ", "\t"):
        blank = typed(line, text)
        assert (blank.value, blank.refusal, blank.complete) == (None, None, "")
    assert typed(line, " " * 81).refusal is not None


def test_a_typed_unit_stays_as_the_unit_of_the_field() -> None:
    first = typed(PRESSURE, "38 psig")
    assert first.units == {"pressure": "psi g"}
    later = typed(PRESSURE, "40", dict(first.units))
    assert later.value == pytest.approx(101325 + 40 * 6894.757293168361, rel=1e-12)
    assert later.complete == "40 psi g"
    assert takes(PRESSURE, first.units, SI) == "psi g"


def test_a_refused_line_keeps_its_text_and_the_units_of_the_field() -> None:
    refused = typed(PRESSURE, "38 psgi", {"pressure": "psi g"})
    assert refused.text == "38 psgi"
    assert refused.units == {"pressure": "psi g"}
    assert refused.refusal is not None
    assert refused.refusal.field == "suction_pressure"
    assert refused.value is None


def test_a_field_of_two_kinds_takes_a_bare_number_for_the_kind_typed_last() -> None:
    refusal = typed(EITHER, "5").refusal
    assert refusal is not None
    assert refusal.sentence() == "'5' could be a pressure or a temperature. Write 5 bar g or 5 °C."
    cold = typed(EITHER, "5 C")
    assert cold.value == {"temperature": 278.15}
    assert typed(EITHER, "6", dict(cold.units)).value == {"temperature": 279.15}
    warm = typed(EITHER, "60 psig", dict(cold.units))
    assert typed(EITHER, "0", dict(warm.units)).value == {"pressure": 101325.0}
    assert typed(EITHER, "32 F", dict(warm.units)).value == {"temperature": pytest.approx(273.15)}


def test_a_remembered_unit_that_is_gone_gives_way_to_the_default() -> None:
    assert typed(PRESSURE, "1", {"pressure": "cubits"}).value == pytest.approx(201325.0, rel=1e-12)


@pytest.mark.parametrize(
    ("line", "dress", "shown"),
    [(PRESSURE, SI, "bar g"), (PRESSURE, IP, "psi g"), (EITHER, SI, "bar g or °C"), (EITHER, IP, "psi g or °F"),
     (STATE, SI, "bar g, °C"), (STATE, IP, "psi g, °F")],
)  # fmt: skip
def test_an_empty_field_says_what_a_bare_number_is_taken_in(line: object, dress: Dress, shown: str) -> None:
    assert takes(line, {}, dress) == shown  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("text", "value"),
    [("condenser", "condenser"), ("COND", "condenser"), ("ev", "evaporator"), ("gas cooler", "gas-cooler"),
     ("Gas-Cooler", "gas-cooler"), ("gas", "gas-cooler"), (" expansion ", "expansion")],
)  # fmt: skip
def test_a_choice_is_known_by_its_beginning(text: str, value: str) -> None:
    assert typed(COMPONENT, text).value == value


@pytest.mark.parametrize(("text", "words"), [("co", "could be condenser or compressor"), ("boiler", "is not a choice")])
def test_a_choice_that_is_none_or_two_is_refused(text: str, words: str) -> None:
    refusal = typed(COMPONENT, text).refusal
    assert refusal is not None
    assert words in refusal.message
    assert "expansion" in refusal.hint


def test_a_line_without_meaning_under_the_choice_is_refused_only_when_something_is_typed() -> None:
    lines = read_form(CHECKS["component"], {"component": "evaporator", "power": "5 kW"}, {}, SI, SEA_LEVEL)
    assert lines["power"].refusal is not None
    assert lines["power"].refusal.message == "The evaporator takes no power here."
    assert lines["power"].text == "5 kW"
    blank = read_form(CHECKS["component"], {"component": "evaporator", "power": " "}, {}, SI, SEA_LEVEL)
    assert all(line.refusal is None for line in blank.values())


@pytest.mark.parametrize("check", CHECKS.values(), ids=list(CHECKS))
def test_every_line_of_every_check_survives_what_is_no_reading(check: object) -> None:
    for line in check.reading_lines():  # type: ignore[attr-defined]
        for text in ("\x00", "9" * 10_000, "\u202e5", "5 xyzzy", "-", ",", "1,234 kPa", "²", "#"):
            found = typed(line, text)
            assert found.refusal is not None or line.kind is Kind.WORDS, (line.name, text)
            assert found.text == text
            if found.refusal is not None:
                assert found.refusal.field == line.name
                assert found.refusal.sentence().isprintable()
