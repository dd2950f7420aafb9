"""Which entries contain every word of a filter, asked of all rows at once or of one after the other.

A value too large to read makes the database library refuse a question to all rows; the others are found one by one.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator, Sequence

from gaugeside.logbook.entry import Entry, from_row, search_text
from gaugeside.logbook.schema import NEWEST_FIRST, read_row
from gaugeside.text import plain_text

MOST_WORDS = 20


def condition(filter_text: str) -> tuple[str, list[str]]:
    """Return the condition that a row contains every word of `filter_text`, and the words for its places."""
    words = plain_text(filter_text, 500).casefold().split()[:MOST_WORDS]
    return (" WHERE " + " AND ".join(["instr(search, ?) > 0"] * len(words)) if words else ""), words


def one_by_one(connection: sqlite3.Connection, words: Sequence[str]) -> Iterator[Entry]:
    """Yield the entries with these words, newest first, of a file with a value too large for one question to all."""
    for (number,) in connection.execute("SELECT number FROM entries" + NEWEST_FIRST):
        row = read_row(connection, number)
        entry = None if row is None else from_row(row)
        if entry is not None and (not words or _has(connection, number, entry, words)):
            yield entry


def _has(connection: sqlite3.Connection, number: int, entry: Entry, words: Sequence[str]) -> bool:
    try:
        query = "SELECT instr(search, ?) FROM entries WHERE number = ?"
        return all(connection.execute(query, [word, number]).fetchone()[0] for word in words)
    except sqlite3.DataError:
        searched = search_text(entry)
        return all(word in searched for word in words)
