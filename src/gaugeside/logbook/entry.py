"""One logbook entry: what was typed, what it was understood as, and what came of it."""

from __future__ import annotations

import hashlib
import json
import math
from dataclasses import dataclass, field, replace
from datetime import UTC, datetime
from typing import Any

from gaugeside.errors import Refusal
from gaugeside.text import plain_text

LONGEST_NAME = 60  # [characters]: check, refrigerant, tag
LONGEST_NOTE = 2000  # [characters]
LONGEST_LINE = 500  # [characters]: one reading, headline, one remark
MOST_ITEMS = 200  # readings, findings, remarks of one entry
UNREADABLE = "Part of this entry could not be read back and is left out."
BEGINNING = datetime(1970, 1, 2, tzinfo=UTC)
END = datetime(9999, 1, 1, tzinfo=UTC)


@dataclass(frozen=True)
class Entry:
    """What was kept of one calculation.

    number: given by the logbook; None before.
    kept_at: moment of keeping, with its time zone; stored and returned in UTC.
    readings: each as typed, complete with its unit.
    options: what the readings were understood by (site pressure, bare pressure, datum, dress).
    values: the readings in SI units.
    findings: by name, each with "value" [SI] and "unit", where known "uncertainty".
    headline: the one line a list shows.
    """

    number: int | None
    kept_at: datetime
    check: str
    refrigerant: str
    tag: str = ""
    note: str = ""
    readings: dict[str, str] = field(default_factory=dict)
    options: dict[str, str] = field(default_factory=dict)
    values: dict[str, float] = field(default_factory=dict)
    findings: dict[str, dict[str, Any]] = field(default_factory=dict)
    notes: list[str] = field(default_factory=list)
    cautions: list[str] = field(default_factory=list)
    headline: str = ""
    program_version: str = ""
    library_version: str = ""


COLUMNS = {
    "number": "INTEGER PRIMARY KEY AUTOINCREMENT",
    "kept_at": "TEXT NOT NULL",
    "check_name": "TEXT NOT NULL",
    "refrigerant": "TEXT NOT NULL",
    "tag": "TEXT NOT NULL",
    "note": "TEXT NOT NULL",
    "readings": "TEXT NOT NULL",
    "options": "TEXT NOT NULL",
    "si_values": "TEXT NOT NULL",
    "findings": "TEXT NOT NULL",
    "notes": "TEXT NOT NULL",
    "cautions": "TEXT NOT NULL",
    "headline": "TEXT NOT NULL",
    "program_version": "TEXT NOT NULL",
    "library_version": "TEXT NOT NULL",
    "likeness": "TEXT NOT NULL",
    "search": "TEXT NOT NULL",
}


def cleaned(entry: Entry) -> Entry:
    """Return `entry` with plain, bounded text and its moment in UTC.

    Raises Refusal when a number in it is not finite, and ValueError when its moment has no time zone.
    """
    if entry.kept_at.tzinfo is None:
        raise ValueError("the moment of keeping needs a time zone")
    try:
        json.dumps([entry.values, entry.findings], allow_nan=False)
    except ValueError as fault:
        raise Refusal("A result that is not a finite number is not kept in the logbook.") from fault
    return replace(
        entry,
        kept_at=entry.kept_at.astimezone(UTC),
        check=plain_text(entry.check, LONGEST_NAME),
        refrigerant=plain_text(entry.refrigerant, LONGEST_NAME),
        tag=plain_text(entry.tag, LONGEST_NAME),
        note=plain_text(entry.note, LONGEST_NOTE),
        readings=_plain_texts(entry.readings),
        options=_plain_texts(entry.options),
        notes=[plain_text(note, LONGEST_LINE) for note in entry.notes[:MOST_ITEMS]],
        cautions=[plain_text(caution, LONGEST_LINE) for caution in entry.cautions[:MOST_ITEMS]],
        headline=plain_text(entry.headline, LONGEST_LINE),
        program_version=plain_text(entry.program_version, LONGEST_NAME),
        library_version=plain_text(entry.library_version, LONGEST_NAME),
    )


def likeness(entry: Entry) -> str:
    """Return a text that two entries share when they are the same calculation of the same machine.

    Numbers count to six digits: an iterative solution may end differently in the last ones.
    """
    same = [
        entry.check,
        entry.refrigerant,
        entry.tag,
        entry.note,
        entry.readings,
        entry.options,
        _rounded(entry.values),
        _rounded(entry.findings),
    ]
    return hashlib.sha256(json.dumps(same, sort_keys=True).encode()).hexdigest()


def search_text(entry: Entry) -> str:
    """Return what a filter word is looked for in, in folded case."""
    dates = dict.fromkeys([entry.kept_at.date().isoformat(), entry.kept_at.astimezone().date().isoformat()])
    readings = [f"{name.replace('_', ' ')} {typed}" for name, typed in entry.readings.items() if typed]
    names = [entry.refrigerant, entry.refrigerant.replace("-", ""), entry.check, entry.tag]
    return "\n".join([*names, entry.note, *readings, entry.headline, *dates]).casefold()


def to_row(entry: Entry) -> list[str | int | None]:
    """Return the columns of `entry`, which is `cleaned`."""
    as_json = [
        json.dumps(part, ensure_ascii=False)
        for part in (
            entry.readings,
            entry.options,
            entry.values,
            entry.findings,
            entry.notes,
            entry.cautions,
        )
    ]
    return [
        entry.number,
        entry.kept_at.strftime("%Y-%m-%dT%H:%M:%S.%fZ"),
        entry.check,
        entry.refrigerant,
        entry.tag,
        entry.note,
        *as_json,
        entry.headline,
        entry.program_version,
        entry.library_version,
        likeness(entry),
        search_text(entry),
    ]


def from_row(row: tuple[Any, ...]) -> Entry:
    """Return the entry in a row of COLUMNS; what cannot be read is left out and a caution says so."""
    named = dict(zip(COLUMNS, row, strict=True))
    faults: list[str] = []

    def text(name: str, longest: int = LONGEST_NAME) -> str:
        value = named[name]
        if not isinstance(value, str):
            faults.append(name)
            return ""
        return plain_text(value, longest)

    def part(name: str) -> Any:
        try:
            return json.loads(named[name])
        except (TypeError, ValueError, RecursionError):
            faults.append(name)
            return None

    def texts(name: str) -> list[str]:
        value = part(name)
        found = [item for item in value if isinstance(item, str)] if isinstance(value, list) else []
        return [plain_text(item, LONGEST_LINE) for item in found[:MOST_ITEMS]]

    entry = Entry(
        number=named["number"],
        kept_at=_moment(named["kept_at"], faults),
        check=text("check_name"),
        refrigerant=text("refrigerant"),
        tag=text("tag"),
        note=text("note", LONGEST_NOTE),
        readings=_plain_texts(part("readings")),
        options=_plain_texts(part("options")),
        values=_finite_numbers(part("si_values")),
        findings=_sound_findings(part("findings")),
        notes=texts("notes"),
        cautions=texts("cautions"),
        headline=text("headline", LONGEST_LINE),
        program_version=text("program_version"),
        library_version=text("library_version"),
    )
    return replace(entry, cautions=[*entry.cautions, UNREADABLE]) if faults else entry


def _moment(value: object, faults: list[str]) -> datetime:
    try:
        moment = datetime.fromisoformat(str(value)).astimezone(UTC)
        if BEGINNING <= moment < END:
            return moment
    except (ValueError, OverflowError):
        pass
    faults.append("kept_at")
    return BEGINNING


def _plain_texts(found: object) -> dict[str, str]:
    if not isinstance(found, dict):
        return {}
    return {
        plain_text(name, LONGEST_NAME): plain_text(value, LONGEST_LINE)
        for name, value in list(found.items())[:MOST_ITEMS]
        if isinstance(value, str)
    }


def _is_finite_number(value: object) -> bool:
    if not isinstance(value, int | float) or isinstance(value, bool):
        return False
    try:
        return math.isfinite(value)
    except OverflowError:
        return False


def _finite_numbers(found: object) -> dict[str, float]:
    if not isinstance(found, dict):
        return {}
    return {
        plain_text(name, LONGEST_NAME): value
        for name, value in list(found.items())[:MOST_ITEMS]
        if _is_finite_number(value)
    }


def _sound_findings(found: object) -> dict[str, dict[str, Any]]:
    if not isinstance(found, dict):
        return {}
    sound: dict[str, dict[str, Any]] = {}
    for name, finding in list(found.items())[:MOST_ITEMS]:
        value = finding.get("value") if isinstance(finding, dict) else None
        if isinstance(finding, dict) and (isinstance(value, str) or _is_finite_number(value)):
            parts = {**_plain_texts(finding), **_finite_numbers(finding)}
            sound[plain_text(name, LONGEST_NAME)] = {part: parts[part] for part in finding if part in parts}
    return sound


def _rounded(value: Any) -> Any:
    if isinstance(value, dict):
        return {name: _rounded(inner) for name, inner in value.items()}
    return f"{value:.6g}" if isinstance(value, int | float) else value
