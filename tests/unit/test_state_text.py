"""States as people type them: two properties, in any order, words or numbers."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gaugeside.errors import Refusal
from gaugeside.quantities import PROPERTIES, SEA_LEVEL, Dress, StateReading, read_state, understood_state
from unit.reading_tools import ABSOLUTE, ATMOSPHERE, IP, SI

PSI, INHG = 6894.757293168361, 3386.388640341
NINE = ATMOSPHERE + 9e5


def understand(text: str, dress: Dress = SI) -> StateReading:
    return read_state(text, {name: dress.default(kind) for name, kind in PROPERTIES.items()}, dress, SEA_LEVEL)


def refused(text: str) -> str:
    with pytest.raises(Refusal) as refusal:
        understand(text)
    assert refusal.value.hint
    return refusal.value.sentence()


@pytest.mark.parametrize(
    ("text", "values"),
    [
        ("9.1 bar g, 68 C", {"pressure": ATMOSPHERE + 9.1e5, "temperature": 341.15}),
        ("9,1 bar g, 68 C", {"pressure": ATMOSPHERE + 9.1e5, "temperature": 341.15}),
        ("9,1 bar g,68 C", {"pressure": ATMOSPHERE + 9.1e5, "temperature": 341.15}),
        ("9.1 bar g; 68,5 C", {"pressure": ATMOSPHERE + 9.1e5, "temperature": 341.65}),
        ("68 C, 9.1 bar g", {"pressure": ATMOSPHERE + 9.1e5, "temperature": 341.15}),
        ("p = 9 bar g, t = 68 C", {"pressure": NINE, "temperature": 341.15}),
        ("185 psig, 50 F", {"pressure": ATMOSPHERE + 185 * PSI, "temperature": 283.15}),
        ("10 inHg vac, −5°C", {"pressure": ATMOSPHERE - 10 * INHG, "temperature": 268.15}),
        ("1 234 kPa abs, 5 C", {"pressure": 1.234e6, "temperature": 278.15}),
        ("9.0 bar g, SC 4 K", {"pressure": NINE, "subcooling": 4.0}),
        ("9 bar g, sc4k", {"pressure": NINE, "subcooling": 4.0}),
        ("9 bar g, 4 K SC", {"pressure": NINE, "subcooling": 4.0}),
        ("9 bar g, 4 K subcooled", {"pressure": NINE, "subcooling": 4.0}),
        ("9 bar g, subcooling 9 F", {"pressure": NINE, "subcooling": 5.0}),
        ("9 bar g, SH 9 °F", {"pressure": NINE, "superheat": 5.0}),
        ("9 bar g, 5 K of superheat", {"pressure": NINE, "superheat": 5.0}),
        ("9 bar g, superheat of 5 K", {"pressure": NINE, "superheat": 5.0}),
        ("9 bar g, 5 K superheated", {"pressure": NINE, "superheat": 5.0}),
        ("9 bar g, x 0.3", {"pressure": NINE, "vapour_fraction": 0.3}),
        ("9 bar g, x=0,3", {"pressure": NINE, "vapour_fraction": 0.3}),
        ("9 bar g, 30 %", {"pressure": NINE, "vapour_fraction": 0.3}),
        ("9 bar g, vapour fraction 30 %", {"pressure": NINE, "vapour_fraction": 0.3}),
        ("9 bar g, quality .3", {"pressure": NINE, "vapour_fraction": 0.3}),
        ("9 bar g, 256 kJ/kg", {"pressure": NINE, "enthalpy": 256e3}),
        ("9 bar g, h 256", {"pressure": NINE, "enthalpy": 256e3}),
        ("9 bar g, h 100 Btu/lb", {"pressure": NINE, "enthalpy": 232.6e3}),
        ("-10 C, sat vapour", {"temperature": 263.15, "vapour_fraction": 1.0}),
        ("-10 C, sat. vapor", {"temperature": 263.15, "vapour_fraction": 1.0}),
        ("9 bar g, saturated liquid", {"pressure": NINE, "vapour_fraction": 0.0}),
        ("9 bar g, sat liq", {"pressure": NINE, "vapour_fraction": 0.0}),
        ("dew point, 9 bar g", {"pressure": NINE, "vapour_fraction": 1.0}),
        ("9 bar g, bubble", {"pressure": NINE, "vapour_fraction": 0.0}),
    ],
)
def test_whole_state(text: str, values: dict[str, float]) -> None:
    state = understand(text)
    assert state.values == pytest.approx(values, rel=1e-12)
    assert state.fixed


@pytest.mark.parametrize(
    ("text", "values"),
    [
        ("9 bar g", {"pressure": NINE}), ("9 bar g,", {"pressure": NINE}), ("9", {"pressure": NINE}),
        ("9,5", {"pressure": NINE + 5e4}), ("68 C", {"temperature": 341.15}), ("x 0.5", {"vapour_fraction": 0.5}),
        ("sat vapour", {"vapour_fraction": 1.0}), ("SC 4 K", {"subcooling": 4.0}),
    ],
)  # fmt: skip
def test_half_a_state_is_read_and_known_to_be_half(text: str, values: dict[str, float]) -> None:
    state = understand(text)
    assert state.values == pytest.approx(values, rel=1e-12)
    assert not state.fixed


@pytest.mark.parametrize(
    ("dress", "values"),
    [
        (SI, {"pressure": NINE, "temperature": 341.15}),
        (IP, {"pressure": ATMOSPHERE + 9 * PSI, "temperature": (68 + 459.67) / 1.8}),
        (ABSOLUTE, {"pressure": 9e5, "temperature": 341.15}),
    ],
)
def test_bare_numbers_are_pressure_then_temperature_in_the_field_units(dress: Dress, values: dict[str, float]) -> None:
    for text in ("9, 68", "9;68", "9 ,68"):
        assert understand(text, dress).values == pytest.approx(values, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", ["The state is empty"]), (" , ", ["The state is empty"]),
        ("9 bar g, 8 bar g", ["gives the pressure twice"]), ("9 bar g, x 1, sat vapour", ["3 parts"]),
        ("68 C, SH 4 K", ["temperature and superheat", "do not fix a state"]),
        ("x 0.3, h 200 kJ/kg", ["vapour fraction and enthalpy"]), ("68 C, 200 kJ/kg", ["do not fix a state"]),
        ("9 bar g, SH -2 K", ["superheat below zero", "vapour fraction"]),
        ("9 bar g, SC -2 K", ["subcooling below zero"]),
        ("9 bar g, x 1.2", ["not between 0 and 1"]), ("9 bar g, x 30", ["not between 0 and 1"]),
        ("9 bar g, saturated", ["'saturated' is not a word for a state", "sat liquid or sat vapour"]),
        ("9 bar g, SH", ["'SH' is not a word"]), ("9 bar g, gas", ["'gas' is not a word"]),
        ("1,234 kPa, 5 C", ["1.234 or as 1234"]), ("9 bar g, 5 R", ["degR"]), ("9 bar g, 5 kW", ["is a heat or power"]),
        ("9,1 bar 68,5 c", ["no comma between", "Write 9,1 bar, 68,5 c."]), ("9 bar\tsc 4", ["Write 9 bar, sc 4."]),
        ("9 bar g / 68 C", ["is not a unit of pressure"]), ("9.1,68", ["separators"]),
        ("40 inHg vac, 5 C", ["no pressure is left"]), ("9 bar g, -300 C", ["absolute zero"]),
        ("9 bar g, SC 4 bar", ["is a pressure; this field takes a temperature difference"]),
        ("9 bar g, h 5 kW", ["takes a specific enthalpy"]), ("9" * 10_000, ["10000 characters"]),
        ("9 bar g, " + " " * 80 + "5\u202e C", ["U+202E) at place 91"]), ("9 bar g, 5\x1b C", ["U+001B) at place 11"]),
    ],
)  # fmt: skip
def test_refusal_says_what_why_and_what_instead(text: str, words: list[str]) -> None:
    sentence = refused(text)
    for word in words:
        assert word in sentence
    assert sentence.isprintable()


@pytest.mark.parametrize(
    ("text", "complete", "shown"),
    [
        ("9, 68", "9 bar g, 68 °C", "9.00 bar g = 10.01 bar abs, 68.0 °C"),
        ("9 bar, sc 4", "9 bar g, SC 4 K", "9.00 bar g = 10.01 bar abs, SC 4.0 K"),
        ("-10 C, Sat Vapour", "-10 C, Sat Vapour", "-10.0 °C, saturated vapour"),
        ("130 psig, x 0.3", "130 psig, x 0.3 kg/kg", "8.96 bar g = 9.98 bar abs, x 30.0 %"),
    ],
)
def test_echo_and_completed_text(text: str, complete: str, shown: str) -> None:
    state = understand(text)
    assert state.complete() == complete
    assert understood_state(state, SI, SEA_LEVEL) == shown


PARTS = st.sampled_from(
    ["9", "9,1", "9.1 bar g", "185 psig", "68 C", "-10 °C", "SC 4 K", "sh 5", "x 0.3", "30 %", "sat vapour", "sat",
     "h 256", "256 kJ/kg", "1,234 kPa", ",", ";", " ", ", ", "of", "x", "bubble", "\x00", "p=9", "5 R", "²"]
)  # fmt: skip


@settings(max_examples=1000, derandomize=True, deadline=None)
@given(st.text(max_size=170) | st.lists(PARTS, max_size=6).map("".join) | st.lists(PARTS, max_size=4).map(", ".join))
def test_any_text_is_read_or_refused_and_what_is_read_reads_back_the_same(text: str) -> None:
    try:
        state = understand(text)
    except Refusal:
        assert refused(text).isprintable()
        return
    assert state.values
    assert understand(state.complete(), IP).values == state.values
    assert understand(state.complete(), ABSOLUTE).values == state.values
