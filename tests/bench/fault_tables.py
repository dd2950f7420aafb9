"""Random and mutated logbooks and tables: rows of the logbook, its export taken in again, readings in columns."""

from __future__ import annotations

import csv
import io
import json
import random
from dataclasses import asdict
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from bench import oracle
from bench.fault_texts import SI, Tally, harmless, json_noise, misread_unless, mutated, noise, told, words
from gaugeside.checks import CHECKS
from gaugeside.columns import fitted, parsed, read_header
from gaugeside.errors import Refusal
from gaugeside.files import Lines, cell
from gaugeside.files import content as file_content
from gaugeside.logbook import Logbook
from gaugeside.logbook.entry import Entry, cleaned, from_row, to_row
from gaugeside.logbook.exchange import LARGEST, csv_lines, json_lines, read_document
from gaugeside.logbook.links import linked_first, relinked
from gaugeside.quantities import SEA_LEVEL


def _entry(chance: random.Random) -> Entry:
    return cleaned(
        Entry(
            number=chance.randrange(1, 10**6), kept_at=datetime.fromtimestamp(chance.randrange(10**9, 2 * 10**9), UTC),
            check="superheat", refrigerant="R-454C", tag=words(chance), note=words(chance, 200),
            readings={words(chance): words(chance)}, values={"p": chance.uniform(0, 1e7)},
            findings={"superheat": {"value": chance.uniform(-9, 9), "unit": "K"}}, cautions=[words(chance)],
            headline=words(chance),
        )
    )  # fmt: skip


def _harmless(entry: Entry) -> None:
    """Check that a terminal would obey nothing in an entry."""
    shown = [entry.check, entry.refrigerant, entry.tag, entry.note, entry.headline, *entry.notes, *entry.cautions]
    shown += [*entry.readings, *entry.readings.values(), *entry.options.values(), *entry.findings]
    for text in shown:
        harmless(text)


def logbook_row(chance: random.Random, tally: Tally) -> bool:
    """A row whole or with other columns: the entry as it was kept, or what can be read of it and a word."""
    entry = _entry(chance)
    row = to_row(entry)
    whole = chance.random() < 0.3
    if not whole:
        for place in chance.sample(range(1, len(row)), 3):
            was = str(row[place])
            blob: Any = chance.choice([None, 5, 1.5, b"\xff\xfe", noise(chance), json.dumps(json_noise(chance)), ""])
            row[place] = chance.choice([mutated(was, chance), blob])
    found = from_row(tuple(row))
    misread_unless(not whole or found == entry, (entry, found))
    _harmless(found)
    from_row(tuple(to_row(cleaned(found))))
    return True


def imported_logbook(chance: random.Random, tally: Tally, folder: Path) -> bool:
    """An exported logbook whole, with fields of other kinds, or with other bytes: these entries, or what is wrong."""
    entries = [_entry(chance) for _ in range(chance.randrange(3))]
    # Written here and not by the program: field by field, as the format is described.
    content: dict[str, Any] = {"format": "gaugeside logbook", "version": 1, "entries": [
        {**asdict(entry), "kept_at": entry.kept_at.isoformat()} for entry in entries
    ]}  # fmt: skip
    way = chance.randrange(3)
    if way == 1 and entries:
        for one in content["entries"]:
            one[chance.choice([*one, "other"])] = json_noise(chance)
    elif way == 1:
        content[chance.choice([*content, "other"])] = json_noise(chance)
    text = json.dumps(content, indent=chance.choice([None, 1]), ensure_ascii=chance.random() < 0.5)
    (folder / "logbook.json").write_bytes((mutated(text, chance) if way == 2 else text).encode("utf-8", "replace"))
    found = read_document(file_content(str(folder / "logbook.json"), LARGEST))
    told(f"E{reason[1:]}" for reason in found.reasons)
    for entry in found.entries:
        _harmless(entry)
        misread_unless(way == 2 or entry in entries or way == 1, (entry, entries))
    if way == 0:
        misread_unless((found.entries, found.refused) == (entries, 0), (entries, found))
    book = Logbook(folder / "logbook.sqlite3", busy_seconds=30)
    if chance.random() < 0.1:
        book.take(linked_first(found.entries), relinked)
        misread_unless(book.take(linked_first(found.entries), relinked) == 0, "taken twice")
        for line in (*csv_lines(found.entries.__iter__), *json_lines(book.oldest_first())):
            harmless_line(line)
        book.path.unlink()
    return not found.refused


def harmless_line(line: str) -> None:
    """Check that a terminal would obey nothing in a line of any length."""
    for start in range(0, len(line), 2000):
        harmless(line[start : start + 2000])


# A reading that takes each kind, and the name of its column: what is written there needs no other reading.
_COLUMNS = {
    "pressure": ("superheat", "suction_pressure"), "temperature": ("superheat", "liquid pipe"),
    "pressure difference": ("superheat", "Suction Drop"), "mass flow": ("machine", "mass-flow"),
    "heat or power": ("machine", "electrical power"), "fraction": ("machine", "motor efficiency"),
    "volume flow": ("machine", "--displacement"),
}  # fmt: skip


def batch_rows(chance: random.Random, tally: Tally) -> bool:
    """A table whole or with other characters: in its cells the values of exact arithmetic, or the row refused."""
    made = oracle.written(chance)
    while made.kind not in _COLUMNS:
        made = oracle.written(chance)
    check, name = _COLUMNS[made.kind]
    delimiter = chance.choice([",", ";", "\t"])
    note = words(chance).replace(";", "")
    way = chance.randrange(4)
    cells = [note, mutated(made.text, chance) if way == 1 else made.text]
    heading = ["when", name]
    if way == 3:
        # The unit in the heading, the number alone in its cell.
        number, unit = _apart(made.text)
        heading[1], cells[1] = f"{name} [{unit}]", number
    table = io.StringIO()
    csv.writer(table, delimiter=delimiter, lineterminator=chance.choice(["\n", "\r\n"])).writerows([heading, cells])
    text = mutated(table.getvalue(), chance) if way == 2 else table.getvalue()
    encoding = chance.choice(["utf-8", "utf-8-sig", "utf-16"])
    lines = enumerate(Lines(io.BytesIO(text.encode(encoding, "replace")), "table", 60_000), 1)
    first = next((line for _, line in lines if not isinstance(line, str) or line.strip()), "")
    if isinstance(first, Refusal):
        raise first
    try:
        header = read_header(CHECKS[check], first, {}, SI, SEA_LEVEL)
    except Refusal as refusal:
        # Inches and millimetres of mercury alone may be a vacuum; in a heading nothing tells.
        unclear = way == 3 and made.kind == "pressure" and _is_mercury(made.text)
        misread_unless(way in (1, 2) or made.value is None or unclear, (made, text, refusal.sentence()))
        raise
    for _, line in lines:
        if isinstance(line, Refusal):
            raise line
        row = header.read(header.texts(fitted(header, parsed(line, header.delimiter))), SI, SEA_LEVEL)
        for refusal in (typed.refusal for typed in row.values() if typed.refusal is not None):
            if way in (0, 3):
                misread_unless(made.value is None, (made, text, refusal.sentence()))
            raise refusal
        told(header.assumed(row, SI).values())
        if way in (0, 3):
            (found,) = [typed for typed in row.values() if typed.value is not None]
            zero = {"pressure": 101325.0, "temperature": 459.67}.get(made.kind, 0.0)
            off = abs(found.value - float(made.value or 0))
            misread_unless(made.value is not None and off <= 1e-12 * (abs(found.value) + zero), (made, found))
    for one in (*header.names, *cells):
        harmless(cell(one))
        misread_unless(not cell(one).lstrip().startswith(("=", "@", "--")), cell(one))
    return True


def _is_mercury(text: str) -> bool:
    """Whether a reading is in inches or millimetres of mercury without a word on where it counts from."""
    unit = oracle.UNITS["pressure"].get("".join(c for c in _apart(text)[1].casefold() if c not in " ()\u00a0"))
    return unit is not None and unit.label in ("inHg", "mmHg") and not unit.sense


def _apart(text: str) -> tuple[str, str]:
    """Return the number and the unit of a reading as the oracle writes them: the unit begins at the first letter."""
    place = next(place for place, sign in enumerate(text) if sign not in "0123456789.,' \u00a0+-−")
    return text[:place], text[place:]
