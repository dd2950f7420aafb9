"""From the texts of a form to the SI values of a check, line by line, with what was understood."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from gaugeside.checks.sheet import Check, Entry, ReadingLine
from gaugeside.errors import Refusal
from gaugeside.quantities import (
    PROPERTIES,
    Dress,
    Kind,
    Reading,
    Site,
    Unit,
    fold,
    guard,
    quoted,
    read,
    read_state,
    spellings,
    split_number,
    understood,
    understood_state,
    unit,
)

# Kind value -> unit label: the units a field has last been typed in.
FieldUnits = Mapping[str, str]


@dataclass(frozen=True)
class TypedLine:
    """One line of a form as understood.

    text: as typed. value: what the check takes, None when the line is blank or refused. understood: two texts,
    the second for the absolute form of a pressure. complete: as typed, with the units understood. units: what
    bare numbers take in this field from now on. refusal: why the text was not understood.
    """

    text: str
    value: Any = None
    understood: tuple[str, str] = ("", "")
    complete: str = ""
    units: Mapping[str, str] = field(default_factory=dict)
    refusal: Refusal | None = None


def default_unit(kind: Kind, units: FieldUnits, dress: Dress) -> Unit:
    """Return the unit a bare number of `kind` takes in a field."""
    label = units.get(kind.value)
    if label is not None:
        try:
            return unit(kind, label)
        except KeyError:
            pass
    return dress.default(kind)


def takes(line: ReadingLine, units: FieldUnits, dress: Dress) -> str:
    """Return, for an empty field, the units a bare number is taken in."""
    if line.entry is Entry.CHOICE:
        return " / ".join(line.choices)
    if line.entry is Entry.QUANTITY:
        return default_unit(line.kind, units, dress).label
    pressure, temperature = (default_unit(kind, units, dress).label for kind in (Kind.PRESSURE, Kind.TEMPERATURE))
    return f"{pressure}, {temperature}" if line.entry is Entry.STATE else f"{pressure} or {temperature}"


def read_line(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    """Return what one line's text says; never raises."""
    if not text.strip() and len(text) <= 80:
        return TypedLine(text, units=units)
    try:
        return _READERS[line.entry](line, text, units, dress, site)
    except Refusal as refusal:
        return TypedLine(text, units=units, refusal=refusal.about(line.name))


def read_form(
    check: Check, texts: Mapping[str, str], units: Mapping[str, FieldUnits], dress: Dress, site: Site
) -> dict[str, TypedLine]:
    """Return every line of a check's form, read."""
    return {
        line.name: read_line(line, texts.get(line.name, ""), units.get(line.name, {}), dress, site)
        for line in check.reading_lines()
    }


def _quantity(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    return _from_reading(text, line.kind, units, dress, site, named=False)


def _from_reading(text: str, kind: Kind, units: FieldUnits, dress: Dress, site: Site, *, named: bool) -> TypedLine:
    reading = read(text, kind, default_unit(kind, units, dress), dress, site)
    value = {kind.value: reading.value} if named else reading.value
    return TypedLine(text, value, understood(reading, dress, site), reading.complete(), _kept(units, reading))


def _kept(units: FieldUnits, reading: Reading) -> FieldUnits:
    return {**units, reading.kind.value: reading.unit.label}


def _either(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    """Read a pressure or a temperature; a bare number is what the field was last typed in, at first a pressure."""
    _, unit_text = split_number(guard(text))
    if unit_text:
        kind = Kind.TEMPERATURE if fold(unit_text) in spellings(Kind.TEMPERATURE) else Kind.PRESSURE
    else:
        kind = Kind.TEMPERATURE if list(units)[-1:] == [Kind.TEMPERATURE.value] else Kind.PRESSURE
    others = {name: label for name, label in units.items() if name != kind.value}
    try:
        found = _from_reading(text, kind, units, dress, site, named=True)
    except Refusal as refusal:
        if refusal.message.endswith(f"this field takes a {Kind.PRESSURE.value}."):
            refusal.message = refusal.message.removesuffix("pressure.") + "pressure or a temperature."
        raise
    # The kind typed last stands last: it decides what a bare number is.
    return TypedLine(
        text, found.value, found.understood, found.complete, {**others, kind.value: found.units[kind.value]}
    )


def _state(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    defaults = {name: default_unit(kind, units, dress) for name, kind in PROPERTIES.items()}
    state = read_state(text, defaults, dress, site)
    kept: FieldUnits = dict(units)
    for _, reading in state.parts:
        if reading is not None:
            kept = _kept(kept, reading)
    return TypedLine(text, dict(state.values), (understood_state(state, dress, site), ""), state.complete(), kept)


def _choice(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    wanted = guard(text).casefold()
    found = [choice for choice in line.choices if choice.startswith(wanted)]
    if len(found) != 1:
        raise Refusal(
            f"{quoted(text)} {'could be ' + ' or '.join(found) if found else 'is not a choice here'}.",
            f"Write {', '.join(line.choices[:-1])} or {line.choices[-1]}.",
        )
    return TypedLine(text, found[0], (found[0], ""), found[0], units)


_READERS = {
    Entry.QUANTITY: _quantity,
    Entry.STATE: _state,
    Entry.PRESSURE_OR_TEMPERATURE: _either,
    Entry.CHOICE: _choice,
}
