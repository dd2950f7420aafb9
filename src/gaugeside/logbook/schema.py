"""What a logbook file is made of, and whether one is made of that and nothing else.

A file may come from other hands: a view can be endless, a trigger can take out what was just acknowledged.
"""

from __future__ import annotations

import sqlite3
from pathlib import Path
from typing import Any

from gaugeside.logbook.entry import COLUMNS
from gaugeside.logbook.trouble import LogbookTrouble

VERSION = 1
APPLICATION = 0x47415547  # marks the file as a logbook of this program
LONGEST_COLUMN = 500_000  # [characters]; the largest entry that is kept needs half of that
LARGEST_VALUE = 20_000_000  # [bytes]; a larger one is left out, so that memory stays bounded whatever a file holds
LARGEST_NUMBER_GIVEN = 999_999_999  # a reading that names an entry takes nine digits

_COLUMNS = ", ".join(f"{name} {kind}" for name, kind in COLUMNS.items())
_STATEMENTS = (
    f"CREATE TABLE entries ({_COLUMNS})",
    "CREATE INDEX entries_by_moment ON entries (kept_at, number)",
    "CREATE INDEX entries_by_likeness ON entries (likeness, kept_at)",
)
_PLACES = ", ".join("?" * len(_STATEMENTS))
# Text is cut while it is read, so that no row brings more into memory than an entry can hold.
_CUT = [name if kind.startswith("INTEGER") else f"substr({name}, 1, {LONGEST_COLUMN})"
        for name, kind in COLUMNS.items()]  # fmt: skip

SELECT = f"SELECT {', '.join(_CUT)} FROM entries"
NEWEST_FIRST = " ORDER BY kept_at DESC, number DESC"
INSERT = f"INSERT INTO entries ({', '.join(COLUMNS)}) VALUES ({', '.join('?' * len(COLUMNS))})"


def begin(connection: sqlite3.Connection) -> None:
    """Make an empty database a logbook."""
    for statement in _STATEMENTS:
        connection.execute(statement)
    connection.execute(f"PRAGMA application_id = {APPLICATION}")
    connection.execute(f"PRAGMA user_version = {VERSION}")


def guard(connection: sqlite3.Connection) -> None:
    """Let a connection run nothing unsafe that a file brings along, and take in no value of any size."""
    connection.text_factory = _decoded
    connection.setlimit(sqlite3.SQLITE_LIMIT_LENGTH, LARGEST_VALUE)
    connection.execute("PRAGMA trusted_schema = OFF")
    connection.execute("PRAGMA cell_size_check = ON")


def add(connection: sqlite3.Connection, row: list[str | int | None]) -> int:
    """Add a row under a number that no entry had before, and return the number.

    The database library's own count ends for good at the largest number another hand has put in.
    """
    number = _free_number(connection)
    connection.execute(
        "UPDATE sqlite_sequence SET seq = ? WHERE name = 'entries' AND (typeof(seq) <> 'integer' OR seq > ?)",
        [number, LARGEST_NUMBER_GIVEN],
    )
    connection.execute(INSERT, [number, *row[1:]])
    return number


def _free_number(connection: sqlite3.Connection) -> int:
    most = LARGEST_NUMBER_GIVEN
    given = _largest(connection, "seq", "sqlite_sequence WHERE name = 'entries' AND typeof(seq) = 'integer' AND seq")
    there = _largest(connection, "number", "entries WHERE number")
    for number in (max(given, there) + 1, there + 1):
        if number <= most:
            return number
    below_a_gap = (
        "SELECT number - 1 FROM entries AS one WHERE number BETWEEN 1 AND ? "
        "AND NOT EXISTS (SELECT 1 FROM entries WHERE number = one.number - 1) ORDER BY number DESC LIMIT 1"
    )
    return int(connection.execute(below_a_gap, [most]).fetchone()[0])


def _largest(connection: sqlite3.Connection, column: str, where: str) -> int:
    query = f"SELECT max({column}) FROM {where} BETWEEN 0 AND ?"
    return int(connection.execute(query, [LARGEST_NUMBER_GIVEN]).fetchone()[0] or 0)


def read_row(connection: sqlite3.Connection, number: int) -> tuple[Any, ...] | None:
    """Return the columns of one entry, None in the place of each value too large to read; None without the entry."""
    try:
        found: tuple[Any, ...] | None = connection.execute(SELECT + " WHERE number = ?", [number]).fetchone()
        return found
    except sqlite3.DataError:
        return tuple(_read_value(connection, column, number) for column in _CUT)


def _read_value(connection: sqlite3.Connection, column: str, number: int) -> Any:
    try:
        return connection.execute(f"SELECT {column} FROM entries WHERE number = ?", [number]).fetchone()[0]
    except sqlite3.DataError:
        return None


def is_begun(connection: sqlite3.Connection, path: Path) -> bool:
    """Tell a logbook from an empty file, inside a transaction: all marks must be of the same moment.

    Raises LogbookTrouble for any other database.
    """
    (version,) = connection.execute("PRAGMA user_version").fetchone()
    (application,) = connection.execute("PRAGMA application_id").fetchone()
    (tables,) = connection.execute("SELECT count(*) FROM sqlite_master").fetchone()
    if (version, application, tables) == (0, 0, 0):
        return False
    if application != APPLICATION:
        raise LogbookTrouble("foreign", f"The logbook {path} is the database of another program and left as it is.")
    if version > VERSION:
        raise LogbookTrouble(
            "newer",
            f"The logbook {path} was written by a newer version of gaugeside, so it is left as it is.",
            "Use that version, or name another file with --logbook PATH.",
        )
    if not is_plain(connection):
        raise LogbookTrouble(
            "foreign",
            f"The logbook {path} was rebuilt by another program (other columns, a view or a trigger), so it is left "
            "as it is.",
        )
    return True


def is_plain(connection: sqlite3.Connection) -> bool:
    """Whether the entries are the table this program makes, and nothing in the file acts by itself."""
    (ours,) = connection.execute(
        f"SELECT count(*) FROM sqlite_master WHERE sql IN ({_PLACES})", _STATEMENTS
    ).fetchone()  # fmt: skip
    (others,) = connection.execute(
        "SELECT count(*) FROM sqlite_master WHERE type IN ('view', 'trigger') "
        f"OR (lower(tbl_name) = 'entries' AND sql NOT IN ({_PLACES}))",
        _STATEMENTS,
    ).fetchone()
    return (ours, others) == (len(_STATEMENTS), 0)


def _decoded(raw: bytes) -> str:
    return raw.decode("utf-8", "replace")
