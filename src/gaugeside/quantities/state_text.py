"""The state of a refrigerant as a person types it: two properties with a comma between.

`9.1 bar g, 68 C` · `9.0 bar g, SC 4 K` · `-10 C, sat vapour` · `2 bar g, x 0.3` · `14 bar g, 256 kJ/kg`
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass

from gaugeside.errors import Refusal
from gaugeside.quantities.dress import Dress
from gaugeside.quantities.reading import (
    Reading,
    guard,
    quoted,
    read,
    refuse_control_characters,
    split_number,
    understood,
)
from gaugeside.quantities.site import Site
from gaugeside.quantities.units import Kind, Unit, fold, spellings

LONGEST_STATE = 160

# Property name -> kind; the names stand in JSON and in the logbook.
PROPERTIES: dict[str, Kind] = {
    "pressure": Kind.PRESSURE,
    "temperature": Kind.TEMPERATURE,
    "superheat": Kind.TEMPERATURE_DIFFERENCE,
    "subcooling": Kind.TEMPERATURE_DIFFERENCE,
    "vapour_fraction": Kind.FRACTION,
    "enthalpy": Kind.SPECIFIC_ENTHALPY,
}
_COMPLETE = (
    {"pressure", "temperature"},
    {"pressure", "superheat"},
    {"pressure", "subcooling"},
    {"pressure", "vapour_fraction"},
    {"pressure", "enthalpy"},
    {"temperature", "vapour_fraction"},
)
_SATURATED = {
    "satvapour": 1.0, "satvapor": 1.0, "satvap": 1.0, "satv": 1.0, "satgas": 1.0, "saturatedvapour": 1.0,
    "saturatedvapor": 1.0, "dew": 1.0, "dewpoint": 1.0, "satliquid": 0.0, "satliq": 0.0, "satl": 0.0,
    "saturatedliquid": 0.0, "bubble": 0.0, "bubblepoint": 0.0,
}  # fmt: skip
_WORDS = {
    "superheat": ("superheated", "superheat", "sh"),
    "subcooling": ("subcooled", "subcooling", "subcool", "sc"),
    "vapour_fraction": ("vapour fraction", "vapor fraction", "vapour", "vapor", "quality", "x"),
    "enthalpy": ("enthalpy", "h"),
    "pressure": ("pressure", "p"),
    "temperature": ("temperature", "temp", "t"),
}
_WORD_PROPERTY = {word: name for name, words in _WORDS.items() for word in words}
_ALTERNATIVES = "|".join(sorted(map(re.escape, _WORD_PROPERTY), key=len, reverse=True))
_LEADING = re.compile(rf"(?P<word>{_ALTERNATIVES})(?:\s*=\s*|\s+of\s+|\s+|(?=[-−+.\d]))(?P<rest>.+)\Z", re.IGNORECASE)
_TRAILING = re.compile(rf"(?P<rest>.*?\S)\s+(?:of\s+)?(?P<word>{_ALTERNATIVES})\Z", re.IGNORECASE)
# A comma separates unless digits stand on both sides of it: those are a decimal comma.
_SEPARATOR = re.compile(r"\s*;\s*|(?<![0-9])\s*,\s*|\s*,\s+|\s*,(?![0-9\s])\s*|\s*,\Z")
EXAMPLE = "9.1 bar g, 68 C or 9.0 bar g, SC 4 K or -10 C, sat vapour"


@dataclass(frozen=True)
class StateReading:
    """A state understood: its properties in SI under the names of `PROPERTIES`, and how each was read."""

    typed: str
    values: Mapping[str, float]
    parts: tuple[tuple[str, Reading | None], ...]

    @property
    def fixed(self) -> bool:
        """Whether the properties are enough to fix a state."""
        return set(self.values) in _COMPLETE

    def complete(self) -> str:
        """Return the state as typed, with the units that were understood where none was typed."""
        return ", ".join(self._part(name, reading) for name, reading in self.parts)

    @staticmethod
    def _part(name: str, reading: Reading | None) -> str:
        if reading is None:
            return name
        prefix = {"superheat": "SH ", "subcooling": "SC ", "vapour_fraction": "x ", "enthalpy": "h "}
        return prefix.get(name, "") + reading.complete()


def split_state(text: str) -> list[str]:
    """Return the parts of a state text; a comma between two digits is a decimal comma, not a separator."""
    return [part for part in _SEPARATOR.split(text) if part]


def read_state(text: str, units: Mapping[str, Unit], dress: Dress, site: Site) -> StateReading:
    """Return the state, or part of a state, that `text` gives.

    units: the unit a bare number takes, per property name. Raises Refusal when a part is not understood,
    a property comes twice, or two properties cannot stand together.
    """
    if len(text) > LONGEST_STATE:
        raise Refusal(f"{len(text)} characters is longer than a state can be.", f"Write for example {EXAMPLE}.")
    refuse_control_characters(text)
    parts = split_state(text.strip())
    if not parts:
        raise Refusal("The state is empty.", f"Write for example {EXAMPLE}.")
    if len(parts) > 2:
        raise Refusal(
            f"{quoted(text)} has {len(parts)} parts; a state is two properties.",
            f"Write for example {EXAMPLE}.",
        )
    values: dict[str, float] = {}
    read_parts: list[tuple[str, Reading | None]] = []
    for place, part in enumerate(parts):
        try:
            name, value, reading = _read_part(part, place, units, dress, site)
        except Refusal:
            _refuse_without_comma(part, units, dress, site)
            raise
        if name in values:
            raise Refusal(f"{quoted(text)} gives the {name.replace('_', ' ')} twice.", f"Write for example {EXAMPLE}.")
        values[name] = value
        read_parts.append((name if reading else part.strip(), reading))
    _compatible(values, text)
    return StateReading(text, values, tuple(read_parts))


def _refuse_without_comma(part: str, units: Mapping[str, Unit], dress: Dress, site: Site) -> None:
    """Raise Refusal when this part, itself not understood, is two properties with a blank in place of the comma."""
    for gap in re.finditer(r"\s+", part.strip()):
        halves = part.strip()[: gap.start()], part.strip()[gap.end() :]
        try:
            first, second = (_read_part(half, place, units, dress, site)[0] for place, half in enumerate(halves))
        except Refusal:
            continue
        if {first, second} in _COMPLETE:
            raise Refusal(
                f"{quoted(part.strip())} has no comma between its two readings.",
                f"Write {', '.join(' '.join(half.split()) for half in halves)}.",
            )


def _read_part(
    part: str, place: int, units: Mapping[str, Unit], dress: Dress, site: Site
) -> tuple[str, float, Reading | None]:
    folded = fold(part)
    if folded in _SATURATED:
        return "vapour_fraction", _SATURATED[folded], None
    if not any(character.isdigit() for character in part):
        raise Refusal(
            f"{quoted(part.strip())} is not a word for a state known here.",
            "Write sat liquid or sat vapour, or a number: 68 C, SH 5 K, SC 4 K, x 0.3, h 256 kJ/kg.",
        )
    found = _LEADING.match(part) or _TRAILING.match(part)
    if found is not None:
        name = _WORD_PROPERTY[found["word"].lower()]
        rest = found["rest"]
    else:
        name, rest = _named_by_unit(part, place), part
    reading = read(rest, PROPERTIES[name], units[name], dress, site)
    return name, reading.value, reading


def _named_by_unit(part: str, place: int) -> str:
    """Return the property that the unit of this part belongs to; a bare number is pressure, then temperature."""
    _, unit_text = split_number(guard(part))
    if not unit_text:
        return "pressure" if place == 0 else "temperature"
    folded = fold(unit_text)
    for name in ("pressure", "temperature", "enthalpy", "vapour_fraction"):
        if folded in spellings(PROPERTIES[name]):
            return name
    return "pressure" if place == 0 else "temperature"


def _compatible(values: Mapping[str, float], text: str) -> None:
    for name in ("superheat", "subcooling"):
        if values.get(name, 0) < 0:
            raise Refusal(
                f"A {name} below zero is not a single-phase state.",
                "Give the vapour fraction instead: x 0.9.",
            )
    names = set(values)
    if len(names) == 2 and names not in _COMPLETE:
        first, second = (name.replace("_", " ") for name in values)
        raise Refusal(
            f"{quoted(text)} gives {first} and {second}, which do not fix a state here.",
            "Give the pressure and one more: " + EXAMPLE + ".",
        )


def understood_state(state: StateReading, dress: Dress, site: Site) -> str:
    """Return what was understood in the reader's units, pressures gauge and absolute."""
    words: list[str] = []
    for name, reading in state.parts:
        if reading is None:
            words.append("saturated vapour" if state.values["vapour_fraction"] else "saturated liquid")
            continue
        first, absolute = understood(reading, dress, site)
        prefix = {"superheat": "SH ", "subcooling": "SC ", "vapour_fraction": "x ", "enthalpy": "h "}.get(name, "")
        words.append(f"{prefix}{first} = {absolute}" if absolute else f"{prefix}{first}")
    return ", ".join(words)
