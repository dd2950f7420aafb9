"""The header of a table of readings: which column is which reading of a check, and in what unit its numbers are."""

from __future__ import annotations

import csv
import difflib
import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

from gaugeside.checks.sheet import Check, Entry, ReadingLine
from gaugeside.checks.typed import FieldUnits, TypedLine, default_unit, read_form, takes
from gaugeside.errors import Refusal
from gaugeside.quantities import (
    PROPERTIES,
    Dress,
    Kind,
    Reading,
    Sense,
    Site,
    fold,
    quoted,
    read,
    read_state,
    spellings,
)
from gaugeside.rows import misquoted
from gaugeside.text import plain_text

MOST_COLUMNS = 1000
DELIMITERS = {",": "comma", ";": "semicolon", "\t": "tab"}
_NEAR = 0.75  # of difflib's measure, 1 for the same
_MOST_NAMED = 10  # cells without a column
_LONGEST_NAME = 80  # [characters], of a column that can be a reading
_BRACKETS = {")": "(", "]": "["}
_GROUP = re.compile(r"(?P<before>[^()\[\]]*)[(\[][^()\[\]]*[)\]]\Z")
_MEASURED = (Entry.QUANTITY, Entry.EITHER, Entry.STATE)
_WHOLE = re.compile(r"[-+−]?[0-9]+")
_DIGITS = re.compile(r"[0-9]+(?![0-9.,])")
_STATE_KINDS = (Kind.PRESSURE, Kind.TEMPERATURE, Kind.SPECIFIC_ENTHALPY, Kind.FRACTION)
_SPLIT_READING = "A reading with a comma in it needs double quotes around it."
_SPLIT_HEADING = "Write the unit in brackets behind the name; double quotes hold a heading with a comma together."


@dataclass(frozen=True)
class Column:
    """One column that is a reading.

    units: what a number alone in it takes. told: the kinds whose unit the heading says. kind: what it must be, where
    the name says more than the reading's.
    """

    place: int
    line: ReadingLine
    units: FieldUnits
    told: frozenset[str]
    kind: Kind | None

    def readings(self, typed: TypedLine, dress: Dress, site: Site) -> list[Reading]:
        """Return what was read in a cell of it that was understood."""
        if self.line.entry is Entry.STATE:
            defaults = {name: default_unit(kind, self.units, dress) for name, kind in PROPERTIES.items()}
            return [one for _, one in read_state(typed.text, defaults, dress, site).parts if one is not None]
        kind = Kind(next(iter(typed.value))) if self.line.entry is Entry.EITHER else self.line.kind
        return [read(typed.text, kind, default_unit(kind, self.units, dress), dress, site)]


@dataclass
class Header:
    """What the header of a table says.

    names: as they stand there. carried: columns that are no reading. words: readings said beside the table, the same
    for every row. said: what was understood otherwise than it stands there.
    """

    check: Check
    delimiter: str
    names: list[str]
    columns: list[Column]
    carried: list[str]
    words: Mapping[str, str]
    said: list[str]
    site: Site

    def texts(self, cells: Sequence[str]) -> dict[str, str]:
        """Return what is typed for every reading in a row."""
        typed = {column.line.name: cells[column.place] for column in self.columns if column.place < len(cells)}
        return {**typed, **self.words}

    def read(self, texts: Mapping[str, str], dress: Dress, site: Site) -> dict[str, TypedLine]:
        """Return a row's readings as understood."""
        units = {column.line.name: column.units for column in self.columns}
        typed = read_form(self.check, texts, units, dress, site)
        for column in self.columns:
            line = typed[column.line.name]
            if column.kind is not None and line.value is not None and column.kind.value not in line.value:
                name = self.names[column.place]
                refusal = Refusal(
                    f"{quoted(line.text.strip())} is no {column.kind.value}, as its column {quoted(name)} says.",
                    "Give it a column of its own.",
                    column.line.name,
                )
                typed[column.line.name] = TypedLine(line.text, refusal=refusal)
        return typed

    def measured(self, typed: Mapping[str, TypedLine]) -> dict[str, str]:
        """Return the texts of the readings of a row that are numbers and were understood."""
        lines = {column.line.name: typed[column.line.name] for column in self.columns if column.line.entry in _MEASURED}
        return {name: line.text for name, line in lines.items() if line.value is not None}

    def could_be_split(self, cells: Sequence[str]) -> bool:
        """Whether two whole numbers stand side by side, a reading among them, where one decimal comma could have."""
        read = {column.place for column in self.columns if column.line.entry in _MEASURED}
        pairs = enumerate(pairwise(cells)) if self.delimiter == "," else ()
        return any(
            {place, place + 1} & read and _WHOLE.fullmatch(cell.strip()) and _DIGITS.match(after.strip())
            for place, (cell, after) in pairs
        )

    def assumed(self, typed: Mapping[str, TypedLine], dress: Dress) -> dict[tuple[str, str, bool], str]:
        """Return how the readings of a row were understood where neither they nor their columns say so.

        By the reading, the unit that was assumed and whether a number stood alone, so that each is told once.
        """
        found = {}
        for column in self.columns:
            line = typed[column.line.name]
            if column.line.entry not in _MEASURED or line.value is None or line.complete == line.text.strip():
                continue
            for reading in column.readings(line, dress, self.site):
                unit = reading.unit.label
                if not reading.bare_number and reading.bare_sense:
                    words = f"{_on_a_line(reading.typed)} is read as {_on_a_line(reading.complete())}"
                elif not reading.bare_number or reading.kind.value in column.told:
                    continue
                elif column.line.entry is Entry.STATE:
                    words = f"a {reading.kind.value} without a unit is read as {unit}"
                elif reading.kind is Kind.FRACTION:
                    words = f"a number alone is read as {takes(column.line, {}, dress)}"
                else:
                    words = f"a number alone is read as {unit}"
                found[column.line.name, unit, reading.bare_number] = f"{_on_a_line(self.names[column.place])}: {words}."
        return found


def _on_a_line(text: str) -> str:
    """Return a text that was understood as it may stand in a sentence: every kind of blank as one."""
    return " ".join(text.split())


def parsed(line: str, delimiter: str) -> list[str]:
    """Return the cells of one line; Refusal where its quotes do not fit."""
    try:
        return next(csv.reader([line], delimiter=delimiter, strict=True), [])
    except csv.Error as fault:
        raise misquoted(fault) from fault


def read_header(check: Check, line: str, words: Mapping[str, str], dress: Dress, site: Site) -> Header:
    """Return what the first line of a table says.

    words: readings that are given beside the table. Raises Refusal when the line is not clear.
    """
    delimiter, names = _split(check, line)
    if len(names) > MOST_COLUMNS:
        raise Refusal(f"The header has more than {MOST_COLUMNS} columns.", "Leave out those that are no readings.")
    header = Header(check, delimiter, names, [], [], words, [], site)
    for place, heading in enumerate(names):
        name, unit_text = _parted(heading)
        found = _matched(check, name)
        if found is None:
            _refuse_near(check, heading, name)
            header.carried.append(plain_text(heading.strip(), _LONGEST_NAME))
            continue
        reading, kind = found
        _refuse_twice(header, reading, heading)
        units = _units(reading, kind, unit_text, dress, site, header.said)
        header.columns.append(Column(place, reading, units, frozenset(units if unit_text else ()), kind))
    if not header.columns:
        raise Refusal(
            f"The first line names no reading of {check.name}.",
            f"Name columns in it: {', '.join(line.name for line in check.reading_lines())}.",
        )
    for reading in check.reading_lines():
        if reading.positional and reading.name not in header.texts([""] * len(names)):
            raise Refusal(
                f"No column says the {reading.label}.",
                f"Name one {reading.name}, or say it before the file.",
                reading.name,
            )
    return header


def fitted(header: Header, cells: Sequence[str]) -> list[str]:
    """Return the cells of a row with blank ones for those that are missing; Refusal when that is not clear."""
    wanted = len(header.names)
    is_comma = header.delimiter == ","
    hint = f" {_SPLIT_READING}" if is_comma else ""
    # A decimal comma may have made two cells of one, even where their number is right by blank ones.
    if any(cell.strip() for cell in cells[wanted:]) or (len(cells) != wanted and is_comma):
        message = f"This row has {len(cells)} cells, the header {wanted}{_surplus(cells[wanted:])}."
        raise Refusal(message, f"Give every column its cell.{hint}")
    for name, cell in zip(reversed(header.names), reversed(cells[:wanted] if is_comma else ()), strict=False):
        if name.strip():
            break
        if cell.strip().isdecimal():
            raise Refusal(f"The number {quoted(cell.strip())} stands in a column without a name.", f"Name it.{hint}")
    return [*cells[:wanted], *[""] * (wanted - len(cells))]


def _surplus(cells: Sequence[str]) -> str:
    """Return the cells that have no column as the end of a sentence, empty without any."""
    cells = [cell for cell in cells if cell.strip()]
    named = [quoted(cell.strip()) for cell in cells[:_MOST_NAMED]]
    more = f" and {len(cells) - _MOST_NAMED} more" if len(cells) > _MOST_NAMED else ""
    return f"; without a column: {', '.join(named)}{more}" if named else ""


def _split(check: Check, line: str) -> tuple[str, list[str]]:
    """Return the delimiter of a header and its names: the one delimiter that parts it into names of readings."""
    found = {}
    trouble = None
    present = [delimiter for delimiter in DELIMITERS if delimiter in line]
    for delimiter in present or [","]:
        try:
            names = parsed(line, delimiter)
        except Refusal as refusal:
            trouble = refusal
            continue
        # Within brackets it may part the units of a state.
        if len(names) > 1 and any(_matched(check, _parted(name)[0]) for name in names[:MOST_COLUMNS]):
            found[delimiter] = names
    if len(found) > 1:
        raise Refusal(
            f"The header can be parted at {' or '.join(DELIMITERS[delimiter] for delimiter in found)}.",
            "Put a name with one of them in it into double quotes.",
        )
    if found:
        return next(iter(found.items()))
    if trouble is not None and len(present) < 2:
        raise trouble
    # One column, or none that is a reading; of several delimiters the first then parts the names that are told.
    return (present or [","])[0], parsed(line, (present or [","])[0])


def _parted(heading: str) -> tuple[str, str]:
    """Return the name of a column and the unit in the brackets that end it; all is name where they do not pair."""
    text = heading.strip()
    if len(heading) > 2 * _LONGEST_NAME or text[-1:] not in _BRACKETS:
        return heading, ""
    wanted: list[str] = []
    for place in range(len(text) - 1, -1, -1):
        if text[place] in _BRACKETS:
            wanted.append(_BRACKETS[text[place]])
        elif text[place] in _BRACKETS.values():
            if text[place] != wanted.pop():
                break
            if not wanted:
                return text[:place], text[place + 1 : -1].strip()
    return heading, ""


def _heard(name: str) -> str:
    """Return a name without what people vary: case, dashes, underscores, dots."""
    words = re.sub(r"[-_.\s]+", " ", name.strip().removeprefix("--").casefold())
    return words.strip()


def _matched(check: Check, name: str) -> tuple[ReadingLine, Kind | None] | None:
    """Return the reading a column's name names, and the kind where it names one of several that the reading takes."""
    if len(name) > _LONGEST_NAME:
        return None
    heard = _heard(name)
    for line in check.reading_lines():
        if heard in (_heard(line.name), _heard(line.label)):
            return line, None
    for line in check.reading_lines():
        for kind in line.kinds if line.entry is Entry.EITHER else ():
            if heard == kind.value:
                return line, kind
    return None


def _refuse_near(check: Check, heading: str, name: str) -> None:
    """Raise Refusal when a name that is no reading's comes near one, so that no reading is left out by a slip."""
    if len(heading) > 2 * _LONGEST_NAME:
        return
    if any(heading.count(opening) != heading.count(closing) for opening, closing in ("[]", "()")):
        raise Refusal(f"A bracket stands alone in the column {quoted(heading.strip())}.", _SPLIT_HEADING)
    before = re.split(r"[()\[\]]", name, maxsplit=1)[0]
    if before != name and _matched(check, before) is not None:
        raise Refusal(
            f"The column {quoted(heading.strip())} has more than one pair of brackets.",
            "Write one behind the name, with the unit alone in it.",
        )
    heard, lines = _heard(name), check.reading_lines()
    known = {_heard(text): line.name for line in lines for text in (line.name, line.label)}
    known |= {kind.value: kind.value for line in lines if line.entry is Entry.EITHER for kind in line.kinds}
    near = difflib.get_close_matches(heard, known, n=1, cutoff=_NEAR)
    # "Inlet temperature" is the inlet of a stream, and half of a state.
    near = near or [one for one in known if heard.startswith(f"{one} ") and not _without_kinds(heard[len(one) :])]
    if near:
        raise Refusal(
            f"The column {quoted(heading.strip())} is no reading of {check.name}, but comes near one.",
            f"Name it {known[near[0]]} if that is meant, else give it a name further off or leave it out.",
        )


def _without_kinds(text: str) -> list[str]:
    """Return the words of a text that are no part of any kind's name."""
    kinds = {word for kind in Kind for word in kind.value.split()}
    return [word for word in text.split() if word not in kinds]


def _refuse_twice(header: Header, reading: ReadingLine, heading: str) -> None:
    first = next((column for column in header.columns if column.line.name == reading.name), None)
    if first is not None:
        raise Refusal(
            f"The columns {quoted(header.names[first.place].strip())} and {quoted(heading.strip())} "
            f"are both the {reading.label}.",
            "Leave one of them out.",
            reading.name,
        )
    if reading.name in header.words:
        raise Refusal(
            f"The {reading.label} is said twice: by the column {quoted(heading.strip())} and before the file.",
            "Leave one of them out.",
            reading.name,
        )


def _units(reading: ReadingLine, kind: Kind | None, text: str, dress: Dress, site: Site, said: list[str]) -> FieldUnits:
    """Return what a number alone takes in a column with a unit in its heading."""
    if not text:
        return {} if kind is None else {kind.value: dress.default(kind).label}
    if reading.entry is Entry.STATE:
        return _state_units(text, reading, dress, site, said)
    if reading.entry is Entry.EITHER:
        kinds: Iterable[Kind] = reading.kinds if kind is None else (kind,)
    elif reading.entry is Entry.QUANTITY:
        kinds = (reading.kind,)
    else:
        raise Refusal(f"The {reading.label} takes no unit: {quoted(text)}.", "Leave the brackets out.", reading.name)
    return dict([_unit_of(text, tuple(kinds), reading, dress, site, said)])


def _state_units(text: str, reading: ReadingLine, dress: Dress, site: Site, said: list[str]) -> dict[str, str]:
    """Return what the numbers of a state take under a heading with a unit for one or more of its kinds."""
    units: dict[str, str] = {}
    for part in re.split("[,;]", text):
        kind, label = _unit_of(part, _STATE_KINDS, reading, dress, site, said)
        if kind in units:
            raise Refusal(f"{quoted(text)} gives two units of {kind}.", "Write one unit of each kind.", reading.name)
        units[kind] = label
    if Kind.TEMPERATURE.value in units:
        is_fahrenheit = units[Kind.TEMPERATURE.value] in ("°F", "degR")
        units[Kind.TEMPERATURE_DIFFERENCE.value] = "°F" if is_fahrenheit else "K"
    return units


def _unit_of(
    text: str, kinds: tuple[Kind, ...], reading: ReadingLine, dress: Dress, site: Site, said: list[str]
) -> tuple[str, str]:
    """Return the kind and the label of a unit in a heading; Refusal where it names no single unit."""
    kind = next((kind for kind in kinds if fold(text) in spellings(kind)), kinds[0])
    group = _GROUP.match(text.strip())
    # The texts of units are looked up without their brackets, so what stands before a pair is to be a unit of itself.
    if any(sign in text for sign in "()[]") and (
        group is None or not (group["before"].strip().endswith("/") or fold(group["before"]) in spellings(kind))
    ):
        raise Refusal(f"The brackets in {quoted(text)} belong to no unit.", "Write a unit alone.", reading.name)
    if text.strip()[:1].isdigit():
        raise Refusal(f"{quoted(text)} is no unit.", "Write a unit alone into the brackets.", reading.name)
    try:
        # Read as a number of it is: what is ambiguous there is ambiguous here. A vacuum of 1 may be more than there is.
        one = "0" if fold(text) in spellings(kind) and spellings(kind)[fold(text)].sense is Sense.VACUUM else "1"
        unit = read(f"{one} {text}", kind, dress.default(kind), dress, site).unit
    except Refusal as refusal:
        raise refusal.about(reading.name) from None
    if unit.sense is not None and spellings(kind)[fold(text)].sense is None:
        said.append(f"{reading.label} [{plain_text(text, 20)}]: a number alone is read as {unit.label}.")
    return kind.value, unit.label
