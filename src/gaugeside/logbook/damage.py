"""A damaged logbook: set aside whole, never thrown away, and read as far as it can be."""

from __future__ import annotations

import errno
import os
import sqlite3
import sys
import tempfile
import time
from collections.abc import Iterator
from contextlib import closing, contextmanager, suppress
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path

from gaugeside.disk import reason, sync_folder
from gaugeside.errors import Refusal
from gaugeside.logbook.entry import UNREADABLE, Entry, from_row
from gaugeside.logbook.schema import SELECT, guard, is_plain
from gaugeside.logbook.trouble import LogbookTrouble, locked, no_locks

if sys.platform != "win32":
    import fcntl

LOGBOOK_ENDINGS = (".sqlite3", ".sqlite", ".db")
MOST_ENTRIES = 1_000_000
_DAMAGED = (sqlite3.SQLITE_CORRUPT, sqlite3.SQLITE_NOTADB)


def identity(path: Path) -> tuple[int, int] | None:
    """Return what tells the file at `path` from a later one of the same name; None without a file."""
    try:
        found = path.stat()
    except OSError:
        return None
    return found.st_dev, found.st_ino


def set_aside(path: Path, seen: tuple[int, int], seconds: float) -> Path | None:
    """Rename the damaged file at `path` and return its new name.

    Return None and touch nothing when the file is no longer the one that was `seen`, or proves sound: another
    program may have set it aside and begun a new one meanwhile.

    seconds: how long other programs that use it are waited for [s].

    Raises LogbookTrouble when its name is not a logbook's (it may be a document named by mistake), or when
    it cannot be renamed.
    """
    if path.suffix not in LOGBOOK_ENDINGS:
        raise LogbookTrouble(
            "foreign",
            f"The logbook {path} is damaged or no logbook; it is left as it is, since its name is not *.sqlite3.",
        )
    try:
        with folder_held(path, seconds, alone=True):
            if identity(path) != seen or not _is_damaged(path):
                return None
            aside = _free_name(path)
            # The journal first: beside a new file it would be taken for that one's.
            for ending in ("-journal", "-wal", "-shm", ""):
                with suppress(FileNotFoundError):
                    os.rename(f"{path}{ending}", f"{aside}{ending}")
            sync_folder(path.parent)
    except OSError as fault:
        raise LogbookTrouble(
            "damaged", f"The logbook {path} is damaged and cannot be set aside: {reason(fault)}."
        ) from fault
    return aside


def readable_entries(path: Path) -> list[Entry]:
    """Return what can still be read, whole, of the damaged logbook at `path`, changing nothing there."""
    found: list[Entry] = []
    with suppress(sqlite3.Error), closing(_looking_at(path)) as connection:
        guard(connection)
        # Without it a file shorter than its first page tells is not read at all.
        connection.execute("PRAGMA writable_schema = ON")
        if not is_plain(connection):
            return []
        for number in range(1, min(_last_number(connection), MOST_ENTRIES) + 1):
            with suppress(sqlite3.Error):
                found.extend(_sound_entry(connection, number))
    return found


def _sound_entry(connection: sqlite3.Connection, number: int) -> Iterator[Entry]:
    for row in connection.execute(f"{SELECT} NOT INDEXED WHERE number = ?", [number]):
        entry = from_row(row)
        if UNREADABLE not in entry.cautions:
            yield replace(entry, number=number)


def _last_number(connection: sqlite3.Connection) -> int:
    for query in ("SELECT seq FROM sqlite_sequence", "SELECT max(number) FROM entries"):
        with suppress(sqlite3.Error, TypeError, ValueError):
            return int(connection.execute(query).fetchone()[0])
    return 0


def _looking_at(path: Path) -> sqlite3.Connection:
    return sqlite3.connect(path.absolute().as_uri() + "?mode=ro", uri=True, isolation_level=None)


def _is_damaged(path: Path) -> bool:
    try:
        with closing(_looking_at(path)) as connection:
            return connection.execute("PRAGMA quick_check(1)").fetchall() != [("ok",)]
    except sqlite3.Error as fault:
        return getattr(fault, "sqlite_errorcode", 0) & 0xFF in _DAMAGED


def _free_name(path: Path) -> Path:
    moment = datetime.now(UTC).strftime("%Y-%m-%d-%H%M%S")
    for count in range(1, 1000):
        more = "" if count == 1 else f"-{count}"
        aside = path.with_name(f"{path.stem}-damaged-{moment}{more}{path.suffix}")
        if not os.path.lexists(aside):
            return aside
    raise Refusal(f"No name is free beside {path} to set it aside.")


@contextmanager
def folder_held(path: Path, seconds: float, alone: bool = False) -> Iterator[None]:
    """Hold the folder of `path` together with others who use it, or `alone` to rename in it.

    seconds: how long to wait for the others [s].

    Raises LogbookTrouble when they take longer, or when no file can be locked there. A folder that cannot be
    held (absent, on some networks) is used without.
    """
    handle, held = -1, False
    try:
        if sys.platform != "win32":
            with suppress(OSError):
                handle = os.open(path.parent, os.O_RDONLY)
                _wait_for(handle, fcntl.LOCK_EX if alone else fcntl.LOCK_SH, path, seconds)
                held = True
        if handle >= 0 and not held and refuses_locks(path):
            raise no_locks(path)
        yield
    finally:
        if handle >= 0:
            os.close(handle)


def refuses_locks(path: Path) -> bool:
    """Whether files beside `path` cannot be locked, which the database library takes for a lock held by others."""
    if sys.platform != "win32":
        try:
            # Never the logbook itself: closing a file gives up every lock that this process holds on it.
            with tempfile.TemporaryFile(dir=path.parent) as file:
                fcntl.lockf(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError as fault:
            return fault.errno == errno.ENOLCK
    return False


def _wait_for(handle: int, lock: int, path: Path, seconds: float) -> None:
    deadline = time.monotonic() + seconds
    while True:
        try:
            return fcntl.flock(handle, lock | fcntl.LOCK_NB)
        except BlockingIOError as fault:
            if time.monotonic() > deadline:
                raise locked(path, seconds) from fault
        time.sleep(0.005)
