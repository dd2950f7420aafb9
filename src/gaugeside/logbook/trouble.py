"""What can keep the logbook from being used, as sentences."""

from __future__ import annotations

import sqlite3
from pathlib import Path
from typing import Literal

from gaugeside.errors import Refusal
from gaugeside.text import plain_text

Kind = Literal[
    "locked", "no locks", "read-only", "cannot open", "full", "disk error", "damaged", "newer", "foreign", "other"
]

ELSEWHERE = "Use another --logbook PATH or GAUGESIDE_HOME."
SET_ASIDE = "A damaged logbook (*.sqlite3) is set aside untouched when the next entry is kept."

_KINDS: dict[int, tuple[Kind, str, str]] = {
    sqlite3.SQLITE_BUSY: (
        "locked",
        "The logbook {path} is in use by another program and stayed locked for {seconds:g} s.",
        "Nothing was changed; try again.",
    ),
    sqlite3.SQLITE_READONLY: ("read-only", "The logbook {path} or its folder is read-only.", ELSEWHERE),
    sqlite3.SQLITE_CANTOPEN: (
        "cannot open",
        "The logbook {path} cannot be opened: no permission for the file or its folder.",
        ELSEWHERE,
    ),
    sqlite3.SQLITE_FULL: (
        "full",
        "The logbook {path} cannot grow: its disk is full.",
        "Free some space, then try again.",
    ),
    sqlite3.SQLITE_IOERR: (
        "disk error",
        "The logbook {path} meets a failing disk or network ({words}).",
        ELSEWHERE,
    ),
    sqlite3.SQLITE_CORRUPT: (
        "damaged",
        "The logbook {path} is damaged.",
        SET_ASIDE,
    ),
    sqlite3.SQLITE_NOTADB: (
        "damaged",
        "The logbook {path} is damaged or not a logbook at all.",
        SET_ASIDE,
    ),
}
_KINDS[sqlite3.SQLITE_LOCKED] = _KINDS[sqlite3.SQLITE_BUSY]
_KINDS[sqlite3.SQLITE_PERM] = _KINDS[sqlite3.SQLITE_CANTOPEN]

_NO_LOCKS = "The logbook {path} cannot be locked: its disk or network refuses."
# By the end of the library's name for the fault; the first one that fits.
_DISK_ERRORS = (
    ("LOCK", _NO_LOCKS),
    ("FSYNC", "The logbook {path} is not written safely: its disk or network does not confirm."),
    ("READ", "The logbook {path} cannot be read: its disk or network fails."),
    ("WRITE", "The logbook {path} cannot be written: its disk is full, over its quota or failing."),
    ("TRUNCATE", "The logbook {path} cannot be written: its disk or network fails."),
)


class LogbookTrouble(Refusal):
    """The logbook file cannot be used; kind says in a word why."""

    def __init__(self, kind: Kind, message: str, hint: str = ELSEWHERE) -> None:
        # The message names a path, and a path may hold anything.
        super().__init__(plain_text(message), hint)
        self.kind = kind


class NoSuchEntry(Refusal):
    """An entry number that the logbook does not have."""

    def __init__(self, number: int) -> None:
        super().__init__(f"There is no entry {number} in the logbook.", "The list shows the numbers there are.")


def trouble_from(fault: sqlite3.Error, path: Path, seconds: float) -> LogbookTrouble:
    """Return what `fault` of the database library means for the user.

    seconds: how long a lock was waited for [s].
    """
    # The low byte is the cause; the rest tells where in the library it was met.
    cause = getattr(fault, "sqlite_errorcode", 0) & 0xFF
    kind, message, hint = _KINDS.get(cause, ("other", "The logbook {path} cannot be used ({words}).", ELSEWHERE))
    if kind == "disk error":
        name = getattr(fault, "sqlite_errorname", "")
        message = next((words for ending, words in _DISK_ERRORS if name.endswith(ending)), message)
    return LogbookTrouble(kind, message.format(path=path, seconds=seconds, words=fault), hint)


def no_locks(path: Path) -> LogbookTrouble:
    """Return what to say of a logbook in a place where no file can be locked."""
    return LogbookTrouble("no locks", _NO_LOCKS.format(path=path))


def locked(path: Path, seconds: float) -> LogbookTrouble:
    """Return what to say of a logbook that others hold for longer than `seconds` [s]."""
    kind, message, hint = _KINDS[sqlite3.SQLITE_BUSY]
    return LogbookTrouble(kind, message.format(path=path, seconds=seconds), hint)
