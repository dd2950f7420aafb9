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
    nearest_kind,
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
    if line.entry is Entry.QUANTITY and line.kind is Kind.FRACTION:
        return "0 to 1, or %"
    if line.entry is Entry.QUANTITY:
        return default_unit(line.kind, units, dress).label
    if line.entry is Entry.EITHER:
        kinds = _typed_last(line, units) or line.kinds
        return " or ".join(default_unit(kind, units, dress).label for kind in kinds)
    if line.entry is Entry.STATE:
        return ", ".join(default_unit(kind, units, dress).label for kind in (Kind.PRESSURE, Kind.TEMPERATURE))
    return ""


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
    """Return every line of a check's form, read; a line that has no meaning under the first choice is refused."""
    typed = {
        line.name: read_line(line, texts.get(line.name, ""), units.get(line.name, {}), dress, site)
        for line in check.reading_lines()
    }
    chosen = first_choice(check, typed)
    for line in check.reading_lines():
        if not line.meant(chosen) and typed[line.name].text.strip():
            who = f"The {chosen}" if chosen in check.reading_lines()[0].choices else str(chosen).capitalize()
            refusal = Refusal(f"{who} takes no {line.label} here.", f"Leave the {line.label} out.", line.name)
            typed[line.name] = TypedLine(typed[line.name].text, refusal=refusal)
    return typed


def whole_texts(check: Check, texts: object, units: object, dress: Dress, site: Site) -> dict[str, str]:
    """Return the texts of a form, of any hand, with its unit behind every number that had none."""
    given = {str(name): str(text) for name, text in texts.items()} if isinstance(texts, Mapping) else {}
    known = {
        str(name): {str(kind): str(label) for kind, label in one.items()}
        for name, one in (units.items() if isinstance(units, Mapping) else ())
        if isinstance(one, Mapping)
    }
    whole = dict(given)
    for line in check.reading_lines():
        typed = read_line(line, given.get(line.name, ""), known.get(line.name, {}), dress, site)
        if typed.value is not None and typed.complete:
            whole[line.name] = typed.complete
    return whole


def first_choice(check: Check, typed: Mapping[str, TypedLine]) -> str | None:
    """Return what is chosen or named in the form's first line, None where it is neither or not understood."""
    first = check.reading_lines()[0]
    if first.entry not in (Entry.CHOICE, Entry.WORDS) or first.name not in typed:
        return None
    value = typed[first.name].value
    return None if value is None else " ".join(str(value).casefold().split())


def _quantity(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    return _from_reading(text, line.kind, units, dress, site, named=False)


def _from_reading(text: str, kind: Kind, units: FieldUnits, dress: Dress, site: Site, *, named: bool) -> TypedLine:
    reading = read(text, kind, default_unit(kind, units, dress), dress, site)
    value = {kind.value: reading.value} if named else reading.value
    first, second = understood(reading, dress, site)
    if reading.bare_number and units.get(kind.value, "") not in ("", dress.default(kind).label):
        # Not the unit that the reader would expect: the one typed here before.
        first = f"{reading.complete()} = {first}"
    return TypedLine(text, value, (first, second), reading.complete(), _kept(units, reading))


def _kept(units: FieldUnits, reading: Reading) -> FieldUnits:
    return {**units, reading.kind.value: reading.unit.label}


def _either(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    """Read one of several kinds; a bare number is of the kind the field was last typed in, refused before."""
    _, unit_text = split_number(guard(text))
    known = _typed_last(line, units)
    if unit_text:
        kind = next((k for k in line.kinds if fold(unit_text) in spellings(k)), nearest_kind(unit_text, line.kinds))
    elif known:
        kind = known[0]
    else:
        one = " ".join(text.split())
        raise Refusal(
            f"{quoted(text)} could be {' or '.join(f'a {k.value}' for k in line.kinds)}.",
            f"Write {' or '.join(f'{one} {default_unit(k, units, dress).label}' for k in line.kinds)}.",
        )
    others = {name: label for name, label in units.items() if name != kind.value}
    try:
        found = _from_reading(text, kind, units, dress, site, named=True)
    except Refusal as refusal:
        if refusal.message.endswith(f"this field takes a {kind.value}."):
            wanted = " or a ".join(k.value for k in line.kinds)
            refusal.message = refusal.message.removesuffix(f"{kind.value}.") + f"{wanted}."
        raise
    # The kind typed last stands last: it decides what a bare number is.
    kept = {**others, kind.value: found.units[kind.value]}
    return TypedLine(text, found.value, found.understood, found.complete, kept)


def _typed_last(line: ReadingLine, units: FieldUnits) -> tuple[Kind, ...]:
    """Return the kind that a field of several was last typed in, none where it is new."""
    order = list(units)
    known = [kind for kind in line.kinds if kind.value in units]
    return (max(known, key=lambda kind: order.index(kind.value)),) if known else ()


def _words(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    said = guard(text)
    return TypedLine(text, said, (said, ""), said, units)


def _state(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    defaults = {name: default_unit(kind, units, dress) for name, kind in PROPERTIES.items()}
    state = read_state(text, defaults, dress, site)
    kept: FieldUnits = dict(units)
    for _, reading in state.parts:
        if reading is not None:
            kept = _kept(kept, reading)
    return TypedLine(text, dict(state.values), (understood_state(state, dress, site), ""), state.complete(), kept)


def _choice(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    wanted = " ".join(guard(text).casefold().replace("-", " ").split())
    found = [choice for choice in line.choices if choice.replace("-", " ").startswith(wanted)]
    if len(found) != 1:
        raise Refusal(
            f"{quoted(text)} {'could be ' + ' or '.join(found) if found else 'is not a choice here'}.",
            f"Write {', '.join(line.choices[:-1])} or {line.choices[-1]}.",
        )
    return TypedLine(text, found[0], (found[0], ""), found[0], units)


def _logbook_entry(line: ReadingLine, text: str, units: FieldUnits, dress: Dress, site: Site) -> TypedLine:
    number = guard(text).removeprefix("#").strip()
    if not (number.isascii() and number.isdigit()) or len(number) > 9:
        raise Refusal(
            f"{quoted(text)} is not the number of a logbook entry.", "Write its number alone, for example 12."
        )
    return TypedLine(text, {"entry": float(number)}, (f"logbook entry {int(number)}", ""), number, units)


_READERS = {
    Entry.QUANTITY: _quantity,
    Entry.STATE: _state,
    Entry.EITHER: _either,
    Entry.WORDS: _words,
    Entry.LOGBOOK_ENTRY: _logbook_entry,
    Entry.CHOICE: _choice,
}
