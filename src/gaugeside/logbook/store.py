"""The logbook file: an acknowledged entry survives the end of the program and of the power.

Each call opens its own connection, so a logbook may be used from any thread; a write waits for another
program's lock, so it belongs in a thread that the screen does not wait for.
"""

from __future__ import annotations

import os
import sqlite3
import stat
import sys
import tempfile
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import AbstractContextManager, contextmanager, suppress
from dataclasses import dataclass, replace
from datetime import timedelta
from itertools import islice
from pathlib import Path

from gaugeside.disk import make_private_folder, reason
from gaugeside.errors import Refusal
from gaugeside.logbook import damage
from gaugeside.logbook.entry import COLUMNS, Entry, cleaned, from_row, to_row
from gaugeside.logbook.filter import condition, one_by_one
from gaugeside.logbook.schema import INSERT, LARGEST_VALUE, NEWEST_FIRST, SELECT, add, begin, guard, is_begun, read_row
from gaugeside.logbook.trouble import LogbookTrouble, NoSuchEntry, no_locks, trouble_from

SAME_WITHIN = timedelta(minutes=10)
READ_AT_ONCE = 50
LARGEST_NUMBER = 2**63 - 1
_TOO_LARGE = f"a part of it is larger than {LARGEST_VALUE // 1_000_000} MB"


@dataclass(frozen=True)
class Kept:
    """The entry that is in the logbook; already: an identical one was there and is returned instead."""

    entry: Entry
    already: bool


@dataclass(frozen=True)
class OldestFirst:
    """Entries of one moment's look, read a few at a time: no lock is held while their reader takes its time."""

    logbook: Logbook
    numbers: list[int]

    def __iter__(self) -> Iterator[Entry]:
        for start in range(0, len(self.numbers), READ_AT_ONCE):
            yield from self.logbook.numbered(self.numbers[start : start + READ_AT_ONCE])


class Logbook:
    """Entries in one SQLite file, created with the first entry that is kept.

    busy_seconds: how long a call waits for another program's lock [s].

    Every method raises LogbookTrouble when the file cannot be used; what was kept before is then still there.
    """

    def __init__(self, path: Path, busy_seconds: float = 5.0) -> None:
        self.path = path
        self.messages: list[str] = []
        self._busy_seconds = busy_seconds
        self._damaged: tuple[int, int] | None = None

    def keep(self, entry: Entry) -> Kept:
        """Keep `entry` and return it with its number, after it is safely on the disk.

        An identical one of the last ten minutes is not kept twice. A damaged logbook is set aside first and
        a new one begun; `messages` then says where the damaged one is.

        Raises Refusal when a number in the entry is not finite.
        """
        entry = replace(cleaned(entry), number=None)
        self._set_damaged_aside()
        try:
            kept = self._keep(entry)
        except LogbookTrouble as trouble:
            if trouble.kind != "damaged":
                raise
            self._set_damaged_aside()
            kept = self._keep(entry)
        # Whoever reads what became of the damaged one need not look elsewhere for what became of this entry.
        self.messages[:] = [f"Kept as entry {kept.entry.number}. {message}" for message in self.messages]
        return kept

    def entries(self, filter_text: str = "", limit: int = 200, offset: int = 0) -> list[Entry]:
        """Return entries, newest first, that contain every word of `filter_text` in any case."""
        where, words = condition(filter_text)
        asked = SELECT + where + NEWEST_FIRST + " LIMIT ? OFFSET ?"
        with self._reading() as connection:
            if connection is None:
                return []
            most = min(limit, LARGEST_NUMBER)
            try:
                # Row by row: a hundred rows of another hand's text need not be in memory at once.
                return [from_row(row) for row in connection.execute(asked, [*words, most, offset])]
            except sqlite3.DataError:
                return list(islice(one_by_one(connection, words), offset, min(offset + most, sys.maxsize)))

    def count(self, filter_text: str = "") -> int:
        """Return how many entries contain every word of `filter_text`."""
        where, words = condition(filter_text)
        with self._reading() as connection:
            if connection is None:
                return 0
            try:
                return int(connection.execute("SELECT count(*) FROM entries" + where, words).fetchone()[0])
            except sqlite3.DataError:
                return sum(1 for _ in one_by_one(connection, words))

    def entry(self, number: int) -> Entry:
        """Return one entry; raises NoSuchEntry when there is none of that number."""
        with self._reading() as connection:
            if connection is None:
                raise NoSuchEntry(number)
            return _one(connection, number)

    def change(self, number: int, tag: str | None = None, note: str | None = None) -> Entry:
        """Replace tag or note of one entry and return it; raises NoSuchEntry when there is none."""
        with self._changing(number) as connection:
            before = _one(connection, number)
            after = cleaned(
                replace(
                    before,
                    tag=before.tag if tag is None else tag,
                    note=before.note if note is None else note,
                )
            )
            row = dict(zip(COLUMNS, to_row(after), strict=True))
            # A part that stays may be longer on the disk than what of it could be read.
            new = [name for name in ("tag", "note") if getattr(after, name) != getattr(before, name)]
            columns = [*new, "likeness", "search"]
            try:
                connection.execute(
                    f"UPDATE entries SET {', '.join(f'{name} = ?' for name in columns)} WHERE number = ?",
                    [*(row[name] for name in columns), number],
                )
            except sqlite3.DataError as fault:
                raise Refusal(f"Entry {number} cannot be changed: {_TOO_LARGE}.") from fault
        return after

    def delete(self, number: int) -> Entry:
        """Take one entry out and return it, fit for `restore`; raises NoSuchEntry when there is none."""
        with self._changing(number) as connection:
            entry = _one(connection, number)
            try:
                connection.execute("DELETE FROM entries WHERE number = ?", [number])
            except sqlite3.DataError as fault:
                raise Refusal(f"Entry {number} cannot be deleted: {_TOO_LARGE}.") from fault
        return entry

    def restore(self, entry: Entry) -> None:
        """Put a deleted entry back under its own number.

        Raises Refusal when the number is taken or missing.
        """
        if entry.number is None:
            raise Refusal("This entry was never in the logbook, so it cannot be put back.")
        try:
            with self._writing() as connection:
                connection.execute(INSERT, to_row(cleaned(entry)))
        except sqlite3.IntegrityError as fault:
            raise Refusal(f"Entry {entry.number} is in the logbook already.") from fault

    def oldest_first(self, filter_text: str = "") -> OldestFirst:
        """Return the entries that contain every word of `filter_text` in any case, oldest first, as often as asked."""
        where, words = condition(filter_text)
        with self._reading() as connection:
            if connection is None:
                return OldestFirst(self, [])
            try:
                query = "SELECT number FROM entries" + where + " ORDER BY kept_at, number"
                return OldestFirst(self, [number for (number,) in connection.execute(query, words)])
            except sqlite3.DataError:
                newest_first = [entry.number for entry in one_by_one(connection, words) if entry.number is not None]
                return OldestFirst(self, newest_first[::-1])

    def numbered(self, numbers: Sequence[int]) -> list[Entry]:
        """Return the entries of these numbers, in their order, as far as there are any."""
        with self._reading() as connection:
            if connection is None:
                return []
            rows = (read_row(connection, number) for number in numbers)
            return [from_row(row) for row in rows if row is not None]

    def take(self, entries: Sequence[Entry], relinked: Callable[[Entry, Mapping[int, int]], Entry]) -> int:
        """Take entries of another logbook in under new numbers, all or none of them; return how many were new.

        One that is there already, of the same moment and the same in all that counts, is not taken twice.

        relinked: gives an entry the new numbers of the entries before it, by their numbers in `entries`.
        """
        self._set_damaged_aside()
        try:
            return self._take(entries, relinked)
        except LogbookTrouble as trouble:
            if trouble.kind != "damaged":
                raise
        self._set_damaged_aside()
        return self._take(entries, relinked)

    def _take(self, entries: Sequence[Entry], relinked: Callable[[Entry, Mapping[int, int]], Entry]) -> int:
        taken = 0
        numbers: dict[int, int] = {}
        with self._writing() as connection:
            for entry in entries:
                number = _number_of(connection, entry)
                if number is None:
                    here = cleaned(replace(relinked(entry, numbers), number=None))
                    number = _number_of(connection, here)
                    if number is None:
                        number = add(connection, to_row(here))
                        taken += 1
                if entry.number is not None and number is not None:
                    numbers[entry.number] = number
        return taken

    def _keep(self, entry: Entry) -> Kept:
        row = dict(zip(COLUMNS, to_row(entry), strict=True))
        with self._writing() as connection:
            found = connection.execute(
                "SELECT number FROM entries WHERE likeness = ? ORDER BY kept_at DESC LIMIT 1", [row["likeness"]]
            ).fetchone()
            if found is not None:
                earlier = _one(connection, *found)
                if abs(entry.kept_at - earlier.kept_at) <= SAME_WITHIN:
                    return Kept(earlier, already=True)
            number = add(connection, to_row(entry))
        return Kept(replace(entry, number=number), already=False)

    def _exists(self) -> bool:
        try:
            found = self.path.stat()
        except (FileNotFoundError, NotADirectoryError):
            return False
        except (OSError, ValueError) as fault:
            raise LogbookTrouble(
                "cannot open", f"The logbook {self.path} cannot be opened: {reason(fault)}."
            ) from fault
        if not stat.S_ISREG(found.st_mode):
            raise LogbookTrouble("cannot open", f"The logbook {self.path} is not a file.")
        return True

    @contextmanager
    def _reading(self) -> Iterator[sqlite3.Connection | None]:
        with self._held():
            if not self._exists():
                yield None
                return
            with self._connection() as connection:
                connection.execute("BEGIN")
                yield connection if is_begun(connection, self.path) else None

    @contextmanager
    def _changing(self, number: int) -> Iterator[sqlite3.Connection]:
        if not self._exists():
            raise NoSuchEntry(number)
        with self._writing() as connection:
            yield connection

    @contextmanager
    def _writing(self) -> Iterator[sqlite3.Connection]:
        """Yield a connection inside one transaction, committed when the block ends well."""
        try:
            make_private_folder(self.path.parent)
        except Refusal as fault:
            raise self._no_folder(fault) from fault
        with self._held():
            if not self._exists():
                self._create()
            with self._connection() as connection:
                # Any other database is refused before a setting could change it.
                connection.execute("BEGIN")
                is_begun(connection, self.path)
                connection.execute("COMMIT")
                connection.execute("PRAGMA journal_mode = DELETE")
                # With a deleted journal only EXTRA also waits for the folder, so only it outlasts a power cut.
                connection.execute("PRAGMA synchronous = EXTRA")
                connection.execute("BEGIN IMMEDIATE")
                if not is_begun(connection, self.path):
                    begin(connection)
                yield connection
                connection.execute("COMMIT")

    def _held(self) -> AbstractContextManager[None]:
        """While the file is in use nobody renames it: its journal would be taken for the next file's."""
        return damage.folder_held(self.path, self._busy_seconds)

    @contextmanager
    def _connection(self) -> Iterator[sqlite3.Connection]:
        connection = None
        try:
            connection = sqlite3.connect(
                # Never the mode that creates: a file comes into being with its permissions or not at all.
                self.path.absolute().as_uri() + "?mode=rw",
                uri=True,
                timeout=self._busy_seconds,
                isolation_level=None,
            )
            guard(connection)
            yield connection
        except sqlite3.IntegrityError:
            raise
        except sqlite3.Error as fault:
            trouble = trouble_from(fault, self.path, self._busy_seconds)
            if trouble.kind == "locked" and damage.refuses_locks(self.path):
                raise no_locks(self.path) from fault
            if trouble.kind == "damaged":
                self._damaged = damage.identity(self.path)
            raise trouble from fault
        finally:
            if connection is not None:
                # Closing takes back whatever was not committed.
                with suppress(sqlite3.Error):
                    connection.close()

    def _no_folder(self, fault: Refusal) -> LogbookTrouble:
        why = fault.__cause__
        if why is None:
            return LogbookTrouble("cannot open", fault.message, fault.hint)
        words = f"The logbook {self.path} and its folder cannot be created: {reason(why)}."
        return LogbookTrouble("cannot open", words)

    def _create(self) -> None:
        try:
            _create_private_file(self.path)
        except OSError as fault:
            raise LogbookTrouble(
                "cannot open", f"The logbook {self.path} cannot be created: {reason(fault)}."
            ) from fault

    def _set_damaged_aside(self) -> None:
        if self._damaged is None:
            return
        seen, self._damaged = self._damaged, None
        aside = damage.set_aside(self.path, seen, self._busy_seconds)
        if aside is None:
            return
        where = f"the damaged one, set aside as {aside.name}."
        self.messages.append(f"A new logbook is begun after {where}")
        saved = damage.readable_entries(aside)
        if saved:
            with self._writing() as connection:
                insert = INSERT.replace("INSERT", "INSERT OR IGNORE", 1)
                added = connection.executemany(insert, [to_row(cleaned(entry)) for entry in saved]).rowcount
            self.messages[-1] = f"A new logbook is begun with {added} entries of {where}"


def _create_private_file(path: Path) -> None:
    """Create an empty file for its owner alone, unless there is one.

    The name appears only after the file is closed: closing one gives up every lock that this process, in
    another thread, may hold on it by then.
    """
    handle, temporary = tempfile.mkstemp(prefix=f".{path.name}.", dir=path.parent)
    os.close(handle)
    try:
        os.link(temporary, path)
    except FileExistsError:
        return
    except OSError:
        # Some file systems have no second names for a file.
        with suppress(FileExistsError):
            os.close(os.open(path, os.O_RDWR | os.O_CREAT | os.O_EXCL, 0o600))
    finally:
        os.unlink(temporary)


def _one(connection: sqlite3.Connection, number: int) -> Entry:
    row = read_row(connection, number) if 0 <= number <= LARGEST_NUMBER else None
    if row is None:
        raise NoSuchEntry(number)
    return from_row(row)


def _number_of(connection: sqlite3.Connection, entry: Entry) -> int | None:
    """Return the number of an entry of the same moment that is the same in all that counts; None without one."""
    row = dict(zip(COLUMNS, to_row(entry), strict=True))
    same = "SELECT number FROM entries WHERE likeness = ? AND kept_at = ? LIMIT 1"
    found = connection.execute(same, [row["likeness"], row["kept_at"]]).fetchone()
    return None if found is None else int(found[0])
