"""The logbook into a file: a table for a spreadsheet, or the document that another logbook takes in."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from gaugeside.disk import whole_path
from gaugeside.files import refuse_own, written_whole
from gaugeside.logbook.entry import UNREADABLE, Entry
from gaugeside.logbook.exchange import csv_lines, json_lines
from gaugeside.logbook.store import Logbook


def lines_of(logbook: Logbook, words: str, as_csv: bool, unread: set[int | None]) -> Iterator[str]:
    """Yield the lines of the entries that hold all these words, oldest first, as CSV or as JSON.

    unread: takes the numbers of those of which a part could not be read back.
    """
    found = logbook.oldest_first(words)

    def entries() -> Iterator[Entry]:
        for entry in found:
            if UNREADABLE in entry.cautions:
                unread.add(entry.number)
            yield entry

    return csv_lines(entries) if as_csv else json_lines(entries())


def write_file(
    logbook: Logbook,
    words: str,
    name: str,
    *,
    as_csv: bool,
    replace: bool,
    hint: str,
    unread: set[int | None] | None = None,
) -> Path:
    """Write the entries that hold all these words into a file, whole or not at all; return its path.

    hint: what to do where a file is there already. unread: takes the numbers of those of which a part could not be
    read back.

    Raises Refusal when the file cannot be written, is there and may not be replaced, or is one of the program's own.
    """
    path = whole_path(name)
    refuse_own(path, logbook.path)
    with written_whole(str(path), replace, hint) as file:
        for line in lines_of(logbook, words, as_csv, set() if unread is None else unread):
            file.write(f"{line}\n".encode())
    return path
