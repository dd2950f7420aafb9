"""Logbook entries as text and back: the JSON that goes out and comes in, and the CSV that only goes out."""

from __future__ import annotations

import csv
import io
import json
import math
import re
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from datetime import UTC, datetime
from typing import Any

from gaugeside.errors import Refusal
from gaugeside.files import cell
from gaugeside.logbook.entry import (
    BEGINNING,
    END,
    LONGEST_LINE,
    LONGEST_NAME,
    LONGEST_NOTE,
    MOST_ITEMS,
    Entry,
    cleaned,
    to_row,
)
from gaugeside.logbook.schema import LONGEST_COLUMN
from gaugeside.text import plain_text

FORMAT = "gaugeside logbook"
VERSION = 1
LARGEST = 50_000_000  # [bytes] of a file that is taken in
MOST_ENTRIES = 100_000
MOST_COLUMNS = 2_000
FEWER = "Export fewer entries at a time: gaugeside logbook export WORDS takes those that hold all the words."
TOLD = 5  # refused entries that are told one by one
# An entry is read out of a window that grows until it holds it, so that no value of a file's size is ever built.
_WINDOW, _LARGEST_WINDOW = 1024, 1024 * 4**6  # [characters]
_MOST_MEMBERS = 20  # of the document, beside which an export writes three
_PARTS = frozenset(("value", "unit", "uncertainty"))  # of a finding
_BLANK = re.compile(r"[ \t\r\n]*")
_HEAD = ("number", "kept_at", "check", "refrigerant", "tag", "note", "headline")
# What gauge readings were worked with, by the name of the option.
_RESTS_ON = {"site": "site", "site pressure": "site pressure [Pa]", "datum": "datum"}
_DIGITS = 7  # of a number in the CSV
_NAMES = ("check", "refrigerant", "tag", "program_version", "library_version")
_ONLY_JSON = "Take in what gaugeside logbook export wrote without --csv."


def entry_json(entry: Entry) -> dict[str, Any]:
    """Return one entry as JSON types."""
    return {
        "number": entry.number,
        "kept_at": entry.kept_at.isoformat(),
        "check": entry.check,
        "refrigerant": entry.refrigerant,
        "tag": entry.tag,
        "note": entry.note,
        "readings": entry.readings,
        "options": entry.options,
        "values": entry.values,
        "findings": entry.findings,
        "notes": entry.notes,
        "cautions": entry.cautions,
        "headline": entry.headline,
        "program_version": entry.program_version,
        "library_version": entry.library_version,
    }


_FIELDS = frozenset(entry_json(Entry(None, BEGINNING, "", "")))


def json_lines(entries: Iterable[Entry]) -> Iterator[str]:
    """Yield the lines of the JSON document of `entries`, one line an entry, ASCII alone."""
    head = f'{{"format": {json.dumps(FORMAT)}, "version": {VERSION}, "entries": ['
    line = ""
    for number, entry in enumerate(entries):
        yield f"{line}," if number else head
        line = json.dumps(entry_json(entry))
    if not line:
        yield head + "]}"
        return
    yield line
    yield "]}"


def csv_lines(entries: Callable[[], Iterable[Entry]]) -> Iterator[str]:
    """Yield the lines of the CSV of entries, which are asked for twice: once for their columns, once for their cells.

    Raises Refusal when they have more columns than a table can hold.
    """
    readings: dict[str, None] = {}
    findings: dict[tuple[str, str], None] = {}
    for entry in entries():
        readings |= dict.fromkeys(entry.readings)
        findings |= {(name, _unit(found)): None for name, found in entry.findings.items()}
        if len(readings) + len(findings) > MOST_COLUMNS:
            raise Refusal(
                f"These entries have more than {MOST_COLUMNS} different readings and findings.",
                "Add words that choose fewer entries, or write them as JSON.",
            )
    headings = [f"{name.replace('_', ' ')}{f' [{unit}]' if unit else ''}" for name, unit in findings]
    typed = [name.replace("_", " ") for name in readings]
    yield _csv_line([*_HEAD, *_RESTS_ON.values(), *typed, *headings, "cautions"])
    for entry in entries():
        plain = entry_json(entry) | {"kept_at": entry.kept_at.astimezone().isoformat(" ", "seconds")}
        found = {(name, _unit(one)): _rounded(one.get("value", "")) for name, one in entry.findings.items()}
        yield _csv_line(
            [
                *(plain[name] for name in _HEAD),
                *(entry.options.get(name, "").removesuffix(" Pa") for name in _RESTS_ON),
                *(entry.readings.get(name, "") for name in readings),
                *(found.get(column, "") for column in findings),
                " ".join(entry.cautions),
            ]
        )


def _rounded(value: object) -> object:
    """Return a number without the digits that no reading has."""
    return float(f"{value:.{_DIGITS}g}") if isinstance(value, int | float) else value


def _unit(finding: Mapping[str, Any]) -> str:
    unit = finding.get("unit", "")
    return unit if isinstance(unit, str) else ""


def _csv_line(cells: Iterable[object]) -> str:
    text = io.StringIO()
    csv.writer(text, lineterminator="").writerow([cell(one) if isinstance(one, str) else one for one in cells])
    return text.getvalue()


@dataclass
class Document:
    """What a file gave: its entries with the numbers they had there, and the places and reasons of those refused."""

    entries: list[Entry] = field(default_factory=list)
    refused: int = 0
    reasons: list[str] = field(default_factory=list)


def read_document(content: bytes) -> Document:
    """Return the entries in the JSON document that an export wrote.

    Raises Refusal when it is no such document, of a newer version, or holds too many entries.
    """
    text = _decoded(content)
    if not text.lstrip().startswith("{"):
        is_csv = text.lstrip().startswith("number,kept_at,")
        what = "the CSV of a logbook, which leaves much of each entry out" if is_csv else "no JSON document"
        raise Refusal(f"The file is {what}.", _ONLY_JSON)
    document, head = Document(), {}
    for count, (name, value) in enumerate(_members(text, document), 1):
        head[name] = value
        if count > _MOST_MEMBERS:
            raise Refusal(f"The file is JSON with more than {_MOST_MEMBERS} members, so no logbook.", _ONLY_JSON)
    if head.get("format") != FORMAT:
        raise Refusal("The file is JSON, but no exported logbook: it does not name that format.", _ONLY_JSON)
    version = head.get("version")
    if not isinstance(version, int) or isinstance(version, bool) or version < 1:
        raise Refusal("The exported logbook does not say which version of the format it has.", _ONLY_JSON)
    if version > VERSION:
        raise Refusal(
            "The exported logbook is of a newer version of gaugeside, so nothing of it is taken.", "Use that version."
        )
    if not isinstance(head.get("entries"), list):
        raise Refusal("The exported logbook has no list of entries.", _ONLY_JSON)
    return document


def _decoded(content: bytes) -> str:
    try:
        # Some shells write what a program prints as UTF-16.
        return content.decode("utf-16" if content[:2] in (b"\xff\xfe", b"\xfe\xff") else "utf-8-sig")
    except UnicodeDecodeError as fault:
        raise Refusal("The file is not UTF-8 text.", _ONLY_JSON) from fault


def _members(text: str, document: Document) -> Iterator[tuple[str, Any]]:
    """Yield the members of the one object that `text` is; its entries go into `document` one by one."""
    place = _after(text, 0, "{")
    closing = _start(text, place)
    while text[closing] != "}":
        name, place = _value(text, place)
        if not isinstance(name, str):
            raise _damaged(text, closing)
        place = _after(text, place, ":")
        value: Any = []
        if name == "entries" and text[_start(text, place)] == "[":
            place = _entries(text, _after(text, place, "["), document)
        else:
            value, place = _value(text, place)
        yield name, value
        closing = _start(text, place)
        if text[closing] == ",":
            place = closing + 1
        elif text[closing] != "}":
            raise _damaged(text, closing)
    rest = _BLANK.match(text, closing + 1)
    if rest is None or rest.end() != len(text):
        raise _damaged(text, closing + 1)


def _entries(text: str, place: int, document: Document) -> int:
    """Read the elements of the list that begins before `place`; return the place after it."""
    if text[_start(text, place)] == "]":
        return _start(text, place) + 1
    while True:
        found, place = _value(text, place)
        count = len(document.entries) + document.refused + 1
        if count > MOST_ENTRIES:
            raise Refusal(f"The file holds more than {MOST_ENTRIES} entries.", FEWER)
        try:
            document.entries.append(entry_from(found))
        except ValueError as fault:
            document.refused += 1
            if len(document.reasons) < TOLD:
                document.reasons.append(f"entry {count} of the file: {fault}.")
        stop = _start(text, place)
        place = stop + 1
        if text[stop] == "]":
            return place
        if text[stop] != ",":
            raise _damaged(text, stop)


def _value(text: str, place: int) -> tuple[Any, int]:
    """Return the JSON value at a place and the place after it."""
    start = _start(text, place)
    window = _WINDOW
    while True:
        part = text[start : start + window]
        try:
            found, end = _DECODER.raw_decode(part)
        except RecursionError as fault:
            raise Refusal(f"The file is nested too deeply at line {_line(text, start)}.", _ONLY_JSON) from fault
        except ValueError as fault:
            if len(part) < window:
                raise _damaged(text, start) from fault
            if window >= _LARGEST_WINDOW:
                raise Refusal(
                    f"At line {_line(text, start)} is more than an entry can hold, or damage.", _ONLY_JSON
                ) from fault
        else:
            # A number at the window's edge may go on behind it.
            if end < len(part) or len(part) < window:
                return found, start + end
        window *= 4


_DECODER = json.JSONDecoder()


def _start(text: str, place: int) -> int:
    """Return the place of the next character that is no blank."""
    found = _BLANK.match(text, place)
    place = place if found is None else found.end()
    if place >= len(text):
        raise Refusal("The file ends in the middle; part of it is missing.", _ONLY_JSON)
    return place


def _after(text: str, place: int, sign: str) -> int:
    start = _start(text, place)
    if text[start] != sign:
        raise _damaged(text, start)
    return start + 1


def _line(text: str, place: int) -> int:
    return text.count("\n", 0, place) + 1


def _damaged(text: str, place: int) -> Refusal:
    return Refusal(f"The file is damaged (not readable as JSON) at line {_line(text, place)}.", _ONLY_JSON)


def entry_from(found: object) -> Entry:
    """Return the entry in JSON types; raises ValueError, with the reason, when it is not whole and sound."""
    if not isinstance(found, dict):
        raise ValueError("it is no object")
    missing, strange = sorted(_FIELDS - found.keys()), sorted(found.keys() - _FIELDS)
    if missing:
        raise ValueError(f"it has no {missing[0]}")
    if strange:
        raise ValueError(f"“{plain_text(strange[0], 40)}” is no field of an entry")
    number = found["number"]
    texts = {name: _text(found[name], name, LONGEST_NAME) for name in _NAMES}
    if not texts["check"].strip():
        raise ValueError("it names no check")
    entry = cleaned(
        Entry(
            number=number if isinstance(number, int) and not isinstance(number, bool) else None,
            kept_at=_moment(found["kept_at"]),
            note=_text(found["note"], "note", LONGEST_NOTE),
            headline=_text(found["headline"], "headline", LONGEST_LINE),
            readings=_texts(found["readings"], "readings"),
            options=_texts(found["options"], "options"),
            values={name: _number(value, "values") for name, value in _items(found["values"], "values")},
            findings={name: _finding(one) for name, one in _items(found["findings"], "findings")},
            notes=_lines(found["notes"], "notes"),
            cautions=_lines(found["cautions"], "cautions"),
            **texts,
        )
    )
    if any(isinstance(column, str) and len(column) > LONGEST_COLUMN for column in to_row(entry)):
        raise ValueError("it is larger than a logbook can hold")
    return entry


def _moment(value: object) -> datetime:
    try:
        moment = datetime.fromisoformat(str(value))
        if moment.tzinfo is not None and BEGINNING <= moment.astimezone(UTC) < END:
            return moment
    except (ValueError, OverflowError):
        pass
    raise ValueError("kept_at is no moment with its time zone")


def _text(value: object, name: str, longest: int) -> str:
    if not isinstance(value, str):
        raise ValueError(f"{name} is no text")
    if len(value) > longest:
        raise ValueError(f"{name} is longer than {longest} characters")
    return value


def _items(value: object, name: str) -> list[tuple[str, Any]]:
    if not isinstance(value, dict):
        raise ValueError(f"{name} is no object")
    if len(value) > MOST_ITEMS:
        raise ValueError(f"{name} has more than {MOST_ITEMS} items")
    return [(plain_text(_text(key, name, LONGEST_NAME)), inner) for key, inner in value.items()]


def _texts(value: object, name: str) -> dict[str, str]:
    return {key: _text(inner, name, LONGEST_LINE) for key, inner in _items(value, name)}


def _lines(value: object, name: str) -> list[str]:
    if not isinstance(value, list):
        raise ValueError(f"{name} is no list")
    if len(value) > MOST_ITEMS:
        raise ValueError(f"{name} has more than {MOST_ITEMS} items")
    return [_text(inner, name, LONGEST_LINE) for inner in value]


def _number(value: object, name: str) -> float:
    if isinstance(value, int | float) and not isinstance(value, bool):
        try:
            if math.isfinite(value):
                return value
        except OverflowError:
            pass
    raise ValueError(f"{name} hold what is no finite number")


def _finding(value: object) -> dict[str, Any]:
    parts = dict(_items(value, "findings"))
    if "value" not in parts:
        raise ValueError("findings hold one without a value")
    if not parts.keys() <= _PARTS:
        raise ValueError("findings hold one with parts that are none of a finding")
    return {
        name: plain_text(_text(part, "findings", LONGEST_LINE)) if isinstance(part, str) else _number(part, "findings")
        for name, part in parts.items()
    }
