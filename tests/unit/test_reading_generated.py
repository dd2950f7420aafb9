"""Readings over generated text: never anything but a number or a refusal, and never another number than was meant."""

from __future__ import annotations

import re
from fractions import Fraction

import pytest
from hypothesis import example as also
from hypothesis import given, settings
from hypothesis import strategies as st

from gaugeside.errors import Refusal
from gaugeside.quantities import SEA_LEVEL, Dress, Kind, Sense, read, spellings, understood
from reference.tables import unit_factors
from unit.reading_tools import ABSOLUTE, ATMOSPHERE, IP, READ_KINDS, SI, refused, understand

FACTORS = {(one.kind, one.label): one for one in unit_factors()}


QUICK = settings(max_examples=300, derandomize=True, deadline=None)
MANY = settings(max_examples=1500, derandomize=True, deadline=None)
PIECES = st.sampled_from(
    ["1", "23", "456", "0", ".", ",", " ", "'", "-", "−", "+", "e", "E3", "bar", "g", "abs", "psi", "kPa", "inHg",
     "vac", "K", "°", "C", "F", "kg/s", "%", "mPa", "kW", "(", ")", "\u00a0", "\u202f", "²", "/", "\x00", "R", "TR"]
)  # fmt: skip
TEXTS = st.text(max_size=90) | st.lists(PIECES, max_size=12).map("".join)
PLAIN_NUMBERS = st.decimals(0, 99999, places=3).map(str) | st.integers(0, 99999).map(str)


@MANY
@given(TEXTS, st.sampled_from(READ_KINDS), st.sampled_from([SI, IP, ABSOLUTE]))
@also("5 " + "²" * 70, Kind.PRESSURE, SI)
@also("1e308 t/h", Kind.MASS_FLOW, SI)
def test_any_text_is_read_or_refused_and_nothing_else(text: str, kind: Kind, dress: Dress) -> None:
    try:
        reading = understand(text, kind, dress)
    except Refusal:
        assert refused(text, kind, dress).isprintable()
        return
    # What was understood, written out, means exactly the same in any other field.
    other = IP if dress is SI else SI
    assert understand(reading.complete(), kind, other).value == reading.value
    assert read(reading.complete(), kind, other.default(kind), ABSOLUTE, SEA_LEVEL).value == reading.value


@MANY
@given(st.text("0123456789 .,'", min_size=1, max_size=14), st.sampled_from(["", "-", "+", "−"]))
def test_digits_and_separators_give_the_one_number_they_can_mean_or_none(digits: str, sign: str) -> None:
    try:
        value = understand(f"{sign}{digits} K", Kind.TEMPERATURE_DIFFERENCE).value
    except Refusal:
        return
    # A point that stands alone before the unit belongs to the unit, where points are dropped ("deg. F").
    bare = re.sub(r"\s[\s.]*\Z", "", digits.strip())
    groups = re.split(r"[ .,']", bare)
    negative = sign in ("-", "−")
    whole = Fraction("".join(groups))
    meanings = set()
    if (all(len(group) == 3 for group in groups[1:]) and 1 <= len(groups[0]) <= 3) or len(groups) == 1:
        meanings.add(whole)
    last = max(bare.rfind("."), bare.rfind(","))
    if last >= 0 and re.fullmatch(r"[0-9]*", bare[last + 1 :]):
        meanings.add(whole / 10 ** len(bare[last + 1 :]))
    assert abs(value) in {float(meaning) for meaning in meanings}
    assert value == 0 or (value < 0) == negative
    assert not re.fullmatch(r"[1-9][0-9]{0,2},[0-9]{3}", bare), "could be a decimal or a thousand"


@st.composite
def well_formed(draw: st.DrawFn) -> tuple[str, Kind, Fraction]:
    """A reading as a careful person writes it, with its value by exact arithmetic on the published factors."""
    kind = draw(st.sampled_from([kind for kind in READ_KINDS if kind is not Kind.ABSOLUTE_PRESSURE]))
    spelling = draw(st.sampled_from(sorted(spellings(kind))))
    one = spellings(kind)[spelling]
    number = draw(PLAIN_NUMBERS)
    written = number.replace(".", ",") if len(number.partition(".")[2]) != 3 and draw(st.booleans()) else number
    negative = draw(st.booleans())
    bare = one.label.rsplit(" ", 1)[0] if one.sense else one.label
    factor = FACTORS[kind.value, bare]
    exact = Fraction(number) * (-1 if negative else 1)
    value = exact * factor.factor + factor.zero
    sense = one.sense or (Sense.GAUGE if kind is Kind.PRESSURE else None)
    if kind is Kind.PRESSURE and one.label in ("inHg", "mmHg") and exact > 0:
        value = Fraction(-1)  # a vacuum to some
    elif sense is Sense.GAUGE:
        value = Fraction(ATMOSPHERE) + value
    elif sense is Sense.VACUUM:
        value = Fraction(ATMOSPHERE) - value if exact >= 0 else Fraction(-1)
    typed = spelling.upper() if draw(st.booleans()) else spelling
    gap = draw(st.sampled_from(["", " ", "  ", "\u00a0"]))
    return f"{'-' if negative else ''}{written}{gap}{typed}", kind, value


@settings(max_examples=2500, derandomize=True, deadline=None)
@given(well_formed())
def test_a_well_formed_reading_has_the_value_of_exact_arithmetic(case: tuple[str, Kind, Fraction]) -> None:
    text, kind, value = case
    impossible = (
        (kind in (Kind.PRESSURE, Kind.TEMPERATURE) and value <= 0)
        or (kind is Kind.FRACTION and not 0 <= value <= 1)
    )  # fmt: skip
    if impossible:
        refused(text, kind)
        return
    # Beside a gauge pressure stands the atmosphere, beside a temperature the zero of its scale: the sum is rounded.
    zero = {Kind.PRESSURE: ATMOSPHERE, Kind.TEMPERATURE: 459.67}.get(kind, 0.0)
    assert understand(text, kind).value == pytest.approx(float(value), rel=1e-12, abs=1e-12 * zero)


@QUICK
@given(well_formed(), st.sampled_from([SI, IP]))
def test_what_is_shown_reads_back_within_its_last_digit(case: tuple[str, Kind, Fraction], dress: Dress) -> None:
    text, kind, _ = case
    try:
        reading = understand(text, kind, dress)
    except Refusal:
        return
    for shown in filter(None, understood(reading, dress, SEA_LEVEL)):
        number = shown.split(" ")[0]
        last_digit = 10.0 ** -len(number.partition(".")[2])
        if float(number) == 0:
            continue
        again = understand(shown, kind, dress)
        if kind is Kind.PRESSURE:
            step = FACTORS["pressure", dress.unit(kind).label].factor
        else:
            step = FACTORS[kind.value, dress.unit(kind).label].factor
        slack = 1e-12 * max(abs(reading.value), ATMOSPHERE if kind is Kind.PRESSURE else 300.0)
        assert abs(again.value - reading.value) <= 0.5 * last_digit * float(step) * (1 + 1e-9) + slack
