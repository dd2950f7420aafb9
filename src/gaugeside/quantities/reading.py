"""A reading as a person types it: text in, an SI number of a known kind out, or a refusal.

The number is read first, by the rules below, then the rest is looked up in the closed list of the kind's
units. Nothing here evaluates an expression.
"""

from __future__ import annotations

import difflib
import math
import re
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass

from gaugeside.errors import Refusal
from gaugeside.quantities.convert import to_si
from gaugeside.quantities.dress import Dress, gauge_and_absolute, with_sense, write
from gaugeside.quantities.site import Site
from gaugeside.quantities.units import Kind, Sense, Unit, ambiguous, fold, is_vacuum_to_some, spellings

LONGEST = 80
_MINUS = "-−–‒"
_NUMBER = re.compile(
    r"\s*(?P<sign>[+\-]\s*)?(?P<digits>[0-9.,'\u2019 ]*[0-9][.,]?)(?P<exponent>[eE][+\-]?[0-9]{1,3})?(?![0-9])"
)
_GROUPED = re.compile(r"[0-9]{1,3}(?P<by>[,.'\u2019 ])[0-9]{3}(?:(?P=by)[0-9]{3})*\Z")
_EXAMPLES: dict[Kind, str] = {
    Kind.PRESSURE: "2.6 bar g or 38 psi g",
    Kind.ABSOLUTE_PRESSURE: "94.1 kPa or 27.8 inHg",
    Kind.PRESSURE_DIFFERENCE: "0.2 bar or 3 psi",
    Kind.TEMPERATURE: "-5 °C or 23 °F",
    Kind.TEMPERATURE_DIFFERENCE: "5 K or 9 °F",
    Kind.MASS_FLOW: "0.14 kg/s or 400 lb/h",
    Kind.VOLUME_FLOW: "3.2 m3/h or 14 US gal/min",
    Kind.POWER: "21 kW or 6 TR",
    Kind.SPECIFIC_ENTHALPY: "412 kJ/kg or 177 Btu/lb",
    Kind.SPECIFIC_ENTROPY: "1.7 kJ/(kg K)",
    Kind.SPECIFIC_HEAT_CAPACITY: "3.9 kJ/(kg K)",
    Kind.DENSITY: "12 kg/m3",
    Kind.VOLUMETRIC_CAPACITY: "3000 kJ/m3 or 80 Btu/ft3",
    Kind.FRACTION: "25 % or 0.25",
    Kind.HUMIDITY_RATIO: "8.5 g/kg or 60 gr/lb",
    Kind.LENGTH: "640 m or 2100 ft",
    Kind.RATIO: "4.2",
    Kind.WORDS: "a word",
}


@dataclass(frozen=True)
class Reading:
    """One reading understood.

    typed: the text as typed. kind: its kind of quantity. value: in SI. unit: the unit it was read in.
    bare_number: no unit was typed. bare_sense: a pressure unit was typed without gauge or absolute.
    """

    typed: str
    kind: Kind
    value: float
    unit: Unit
    bare_number: bool = False
    bare_sense: bool = False

    def complete(self) -> str:
        """Return the text as typed, with the unit it was read in where none, or no sense, was typed."""
        if self.bare_number:
            return f"{self.typed.strip()} {self.unit.label}".strip()
        if self.bare_sense and self.unit.sense is not None:
            suffix = "abs" if self.unit.sense is Sense.ABSOLUTE else "g"
            return f"{self.typed.strip()} {suffix}"
        return self.typed.strip()


def example(kind: Kind) -> str:
    """Return how a reading of this kind may be written."""
    return _EXAMPLES[kind]


def quoted(text: str) -> str:
    """Return `text` as it may stand in a sentence: one line, no control characters, shortened."""
    clean = "".join(c if c.isprintable() else "?" for c in text)
    return f"'{clean[:29]}...'" if len(clean) > 32 else f"'{clean}'"


def guard(text: str) -> str:
    """Return `text` without outer blanks; Refusal when it is empty, too long or has control characters."""
    if len(text) > LONGEST:
        raise Refusal(
            f"{len(text)} characters is longer than a reading can be ({LONGEST}).",
            "Type a number and its unit.",
        )
    refuse_control_characters(text)
    stripped = unicodedata.normalize("NFC", text).strip()
    if not stripped:
        raise Refusal("The field is empty.", "Type a number and its unit.")
    return stripped


def refuse_control_characters(text: str) -> None:
    """Raise Refusal when `text` has a character that is not seen, or that moves what is."""
    for place, character in enumerate(text, 1):
        if unicodedata.category(character) in {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"} and character != "\t":
            raise Refusal(
                f"There is a control character (U+{ord(character):04X}) at place {place}.",
                "Type only the number and its unit.",
            )


def split_number(text: str) -> tuple[float, str]:
    """Return the number at the start of `text` and what follows it.

    Decimal point and decimal comma are both read; blanks and apostrophes group thousands only in full
    groups of three. Refusal where the text has no number or one that can be read two ways.
    """
    for minus in _MINUS[1:]:
        text = text.replace(minus, "-", 1) if text.lstrip().startswith(minus) else text
    found = _NUMBER.match(text.replace("\u00a0", " ").replace("\u202f", " ").replace("\u2009", " "))
    if found is None:
        raise Refusal(f"{quoted(text)} does not start with a number.", "Type the number first, then its unit.")
    digits = found["digits"].strip()
    mantissa = _plain(digits, text)
    value = float(mantissa + (found["exponent"] or ""))
    if not math.isfinite(value):
        raise Refusal(f"{quoted(text)} is too large a number.", "Check the digits.")
    if value == 0 and mantissa.strip("0."):
        raise Refusal(f"{quoted(text)} is too small a number.", "Check the digits.")
    sign = -1.0 if (found["sign"] or "").startswith("-") else 1.0
    return sign * value, text[found.end() :].strip()


def _plain(digits: str, text: str) -> str:
    """Return the digits of one number with a point and no grouping."""
    digits = digits.replace("\u2019", "'")
    separators = [c for c in digits if not c.isdigit()]
    if not separators:
        return digits
    last = separators[-1]
    kinds = set(separators)
    if len(kinds) == 1 and last == "," and len(separators) == 1:
        return _lone_comma(digits, text)
    if len(kinds) == 1 and last == "." and len(separators) == 1:
        return digits
    if len(kinds) == 1:
        if _GROUPED.match(digits):
            return digits.replace(last, "")
    elif last in ".," and separators.count(last) == 1 and len(kinds) == 2:
        whole, _, rest = digits.rpartition(last)
        grouped = _GROUPED.match(whole)
        if grouped and rest and rest.isdigit():
            return f"{whole.replace(grouped['by'], '')}.{rest}"
    raise Refusal(
        f"{quoted(text)} has separators that do not make one number.",
        "Write it without grouping, for example 1234.5 or 1234,5.",
    )


def _lone_comma(digits: str, text: str) -> str:
    whole, _, rest = digits.partition(",")
    if len(rest) == 3 and 1 <= len(whole) <= 3 and whole.lstrip("0"):
        raise Refusal(
            f"{quoted(text)} can be read as {whole}.{rest} or as {whole}{rest}.",
            f"Write {whole}.{rest} or {whole}{rest}.",
        )
    return f"{whole}.{rest}"


def read(text: str, kind: Kind, default: Unit, dress: Dress, site: Site) -> Reading:
    """Return the reading that `text` states.

    text: a number, alone or with a unit. kind: what it must be. default: the unit a bare number takes.
    dress: says how a pressure unit without a sense is taken. site: the atmosphere gauge pressures count
    from. Raises Refusal with what, why and what instead.
    """
    stripped = guard(text)
    value, unit_text = split_number(stripped)
    bare_number = not unit_text
    unit = default if bare_number else _look_up(unit_text, kind, stripped)
    bare_sense = False
    if kind is Kind.PRESSURE and unit.sense is None:
        # The field shows its unit with a sense; a bare bar or psi typed there is taken in that sense.
        sense = default.sense if default.sense and default.sense is not Sense.VACUUM else dress.bare
        if sense is Sense.GAUGE and value > 0 and is_vacuum_to_some(unit):
            raise _up_or_down(f"{stripped} {unit.label}" if bare_number else stripped, unit)
        unit, bare_sense = with_sense(unit, sense), True
    si = _counted(value, unit, kind, site, stripped)
    if si == 0 and value != 0 and kind is not Kind.TEMPERATURE:
        raise Refusal(f"{quoted(stripped)} is too small a number.", "Check the digits.")
    return Reading(text, kind, _possible(si, kind, stripped, site), unit, bare_number, bare_sense)


def _look_up(unit_text: str, kind: Kind, text: str) -> Unit:
    trouble = ambiguous(unit_text)
    if trouble is not None:
        raise Refusal(f"{trouble[0]}.", trouble[1])
    folded = fold(unit_text)
    found = spellings(kind).get(folded)
    if found is not None:
        if kind is Kind.ABSOLUTE_PRESSURE and found.sense in (Sense.GAUGE, Sense.VACUUM):
            raise Refusal(f"{quoted(text)} is a gauge reading; a barometer is absolute.", "Write 94.1 kPa or 941 mbar.")
        return found
    others = [other for other in Kind if other not in (kind, Kind.WORDS, Kind.RATIO) and folded in spellings(other)]
    if others:
        raise Refusal(
            f"{quoted(text)} is a {others[0].value}; this field takes {_article(kind)} {kind.value}.",
            f"Write for example {example(kind)}.",
        )
    # A unit that is not written to its end comes before one that only looks alike.
    begun = sorted((spelling for spelling in spellings(kind) if spelling.startswith(folded)), key=len)
    near = begun[:1] or difflib.get_close_matches(folded, spellings(kind), n=1, cutoff=0.5)
    offer = f"Did you mean {spellings(kind)[near[0]].label}? " if near else ""
    raise Refusal(
        f"{quoted(unit_text)} is not a unit of {kind.value} known here.",
        f"{offer}Write for example {example(kind)}.",
    )


def _up_or_down(text: str, unit: Unit) -> Refusal:
    written = " ".join(text.split())
    example = written if len(written) <= 20 and written.isprintable() else f"10 {unit.label}"
    return Refusal(
        f"{quoted(text)} could be below or above the atmosphere, or absolute.",
        f"Write {example} vac, {example} g or {example} abs.",
    )


def _article(kind: Kind) -> str:
    return "an" if kind.value[0] in "aeiou" else "a"


def nearest_kind(unit_text: str, kinds: Sequence[Kind]) -> Kind:
    """Return which of `kinds` a text that is no unit of any comes nearest to, the first of several."""
    folded = fold(unit_text)

    def likeness(kind: Kind) -> float:
        return max((difflib.SequenceMatcher(None, s, folded).ratio() for s in spellings(kind)), default=0.0)

    return max(kinds, key=likeness)


def _counted(value: float, unit: Unit, kind: Kind, site: Site, text: str) -> float:
    """Return the SI value, counted from the site's atmosphere where the unit says so."""
    si = to_si(value, unit, kind)
    if unit.sense is Sense.GAUGE:
        return site.atmosphere + si
    if unit.sense is Sense.VACUUM:
        if value < 0:
            raise Refusal(
                f"{quoted(text)} has a minus and says vacuum.", "A vacuum counts downward: write 10 inHg vac."
            )
        return site.atmosphere - si
    return si


def _possible(si: float, kind: Kind, text: str, site: Site) -> float:
    """Return the SI value, or refuse one that nothing can have."""
    if kind in (Kind.PRESSURE, Kind.ABSOLUTE_PRESSURE) and si <= 0:
        raise Refusal(
            f"{quoted(text)} is {_as_vacuum(site.atmosphere - si)} below the site atmosphere of "
            f"{site.atmosphere / 1000:.2f} kPa: no pressure is left."
            if si < site.atmosphere and kind is Kind.PRESSURE
            else f"{quoted(text)} is not above zero absolute pressure.",
            "Check the sign and the unit; full vacuum here is "
            f"{site.atmosphere / 100000:.3f} bar, {site.atmosphere / 3386.388640341:.2f} inHg below atmosphere.",
        )
    if kind is Kind.TEMPERATURE and si <= 0:
        raise Refusal(f"{quoted(text)} is at or below absolute zero (-273.15 °C, -459.67 °F).", "Check sign and unit.")
    if kind is Kind.FRACTION and not 0 <= si <= 1:
        as_percent = 1 < si <= 100 and "%" not in text
        instead = f"{si:g} % or {si / 100:g}, if that is meant" if as_percent else f"for example {example(kind)}"
        raise Refusal(f"{quoted(text)} is not between 0 and 1 (0 and 100 %).", f"Write {instead}.")
    if not math.isfinite(si):
        raise Refusal(f"{quoted(text)} is too large a number.", "Check the digits.")
    return si


def _as_vacuum(below: float) -> str:
    return f"{below / 1000:.2f} kPa"


def understood(reading: Reading, dress: Dress, site: Site) -> tuple[str, str]:
    """Return what was understood in the reader's unit; the second text is a pressure's absolute form."""
    if reading.kind is Kind.PRESSURE:
        return gauge_and_absolute(reading.value, dress, site)
    if reading.kind is Kind.ABSOLUTE_PRESSURE:
        return f"{write(reading.value, dress.unit(reading.kind), reading.kind, site)} abs", ""
    return write(reading.value, dress.unit(reading.kind), reading.kind, site), ""
