"""Files of other hands, read with limits, and for other hands, written whole or not at all and without formulas."""

from __future__ import annotations

import codecs
import os
import re
import signal
import stat
import sys
import threading
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from functools import cache
from pathlib import Path
from typing import BinaryIO

from gaugeside.disk import reason, sync_folder, whole_path
from gaugeside.errors import Refusal
from gaugeside.quantities import Kind, fold, guard, spellings, split_number
from gaugeside.quantities.state_text import LONGEST_STATE, split_state
from gaugeside.settings import places
from gaugeside.text import plain_text

OR_REPLACE = "Name another file, or add --replace."
STANDARD = "-"  # in the place of a file's name: standard input, standard output
_AT_ONCE = 65_536  # [bytes]
_LONGEST_NAME = 200  # [characters], of a file in a sentence
_LINE_END = re.compile(rb"\r\n|\n|\r")
# The last four are the wide forms, which some spreadsheets take for the narrow ones.
_FORMULA = frozenset("=+-@＝＋－＠")
_NEVER_IN_A_READING = frozenset("*^_=[]{}|!&<>:@#$\\")
_INNER_FORMULA = re.compile(rf'(?P<before>[,;|][\s"]*)(?P<text>[{re.escape("".join(_FORMULA))}][^,;|]*)')
_LETTERS = re.compile(r"([a-z]+)\s*")
_STATE_WORDS = frozenset(
    ("superheated", "superheat", "sh", "subcooled", "subcooling", "subcool", "sc", "vapour", "vapor", "vap", "fraction",
     "quality", "x", "enthalpy", "h", "pressure", "p", "temperature", "temp", "t", "of", "sat", "saturated", "liquid",
     "liq", "gas", "dew", "bubble", "point")
)  # fmt: skip
_MOST_WORDS = 4  # behind a number


@contextmanager
def opened(name: str) -> Iterator[BinaryIO]:
    """Open a file, or standard input for "-", to read its bytes.

    Raises Refusal when it cannot be read or is no file: a pipe would be waited for, a device may have no end.
    """
    if name == STANDARD:
        if sys.stdin is None:
            raise Refusal("Standard input is closed.", "Name a file, or pipe one in.")
        yield sys.stdin.buffer
        return
    name = str(whole_path(name))
    try:
        # Looked at first, because the opening alone of a device may do something.
        is_file = stat.S_ISREG(os.stat(name).st_mode)
        flags = os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0)
        file = os.fdopen(os.open(name, flags), "rb") if is_file else None
    except (OSError, ValueError) as fault:
        raise Refusal(
            f"{_told(name)} cannot be read: {reason(fault)}.", "Check the name, or use - for standard input."
        ) from fault
    if file is None:
        raise Refusal(f"{_told(name)} is not a file.", "Name a file, or use - for standard input.")
    with file:
        yield file


def chunks(file: BinaryIO, name: str) -> Iterator[bytes]:
    """Yield what a file holds, as it comes; Refusal when it cannot be read to its end."""
    read = getattr(file, "read1", file.read)
    while True:
        try:
            chunk = read(_AT_ONCE)
        except (OSError, ValueError) as fault:
            raise Refusal(
                f"{_told(name)} cannot be read on: {reason(fault)}.", "Check the disk or the link."
            ) from fault
        if not chunk:
            return
        yield chunk


def content(name: str, largest: int, hint: str = "") -> bytes:
    """Return all that a file, or standard input for "-", holds; Refusal when that is more than `largest` [bytes].

    hint: what to do with a larger one.
    """
    found = bytearray()
    with opened(name) as file:
        for chunk in chunks(file, name):
            found += chunk
            if len(found) > largest:
                raise Refusal(f"{_told(name)} is larger than {largest // 1_000_000} MB.", hint)
    return bytes(found)


def refuse_own(path: Path, logbook: Path) -> None:
    """Raise Refusal when `path` is a file that the program keeps for itself, this `logbook` among them."""
    home = places()
    own = {home.settings_file: "the program's settings", home.draft_file: "where the program keeps what is typed"}
    for book in (home.logbook_file, logbook):
        own |= {book.with_name(f"{book.name}{end}"): "a part of the logbook" for end in ("-journal", "-wal", "-shm")}
        own[book] = "the logbook itself"
    for one, what in own.items():
        if _is_same(path, one):
            raise Refusal(f"That file is {what}.", "Name another file.")


def _is_same(one: Path, other: Path) -> bool:
    with suppress(OSError, ValueError):
        # One that is not there yet has a place all the same.
        return os.path.realpath(one) == os.path.realpath(other) or os.path.samefile(one, other)
    return False


@contextmanager
def written_whole(name: str, replace: bool, hint: str = OR_REPLACE) -> Iterator[BinaryIO]:
    """Yield a file whose bytes stand under `name`, for its owner alone, once the block has ended well.

    replace: whether a file that is there may go. A link, a folder, a device or a pipe there is always refused.
    hint: what to do where a file is there.

    Raises Refusal when the file cannot be written; what was there is then untouched.
    """
    path = Path(name)
    _refuse_what_is_there(path, replace, hint)
    # The name is known before the file is there, so that whatever ends the block from then on takes it along.
    temporary = path.parent / f".gaugeside-{os.urandom(8).hex()}"
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0)
    with _ended_in_order():
        try:
            with os.fdopen(os.open(temporary, flags, 0o600), "wb") as file:
                yield file
                file.flush()
                os.fsync(file.fileno())
            _put(temporary, path, replace, hint)
        except BrokenPipeError:
            raise
        except OSError as fault:
            raise Refusal(
                f"{_told(name)} cannot be written: {reason(fault)}.", "Nothing was changed there; name another file."
            ) from fault
        finally:
            with suppress(OSError):
                os.unlink(temporary)
    sync_folder(path.parent)


@contextmanager
def _ended_in_order() -> Iterator[None]:
    """Let a signal that would end the program on the spot, as a dropped link does, clear up on its way first."""

    def leave(number: int, frame: object) -> None:
        raise SystemExit(128 + number)

    held = []
    if threading.current_thread() is threading.main_thread():
        wanted = [getattr(signal, name) for name in ("SIGHUP", "SIGTERM") if hasattr(signal, name)]
        # One that is ignored, or already looked after, stays so.
        held = [number for number in wanted if signal.getsignal(number) is signal.SIG_DFL]
    try:
        for number in held:
            signal.signal(number, leave)
        yield
    finally:
        for number in held:
            signal.signal(number, signal.SIG_DFL)


def _refuse_what_is_there(path: Path, replace: bool, hint: str) -> None:
    try:
        mode = os.lstat(path).st_mode
    except FileNotFoundError:
        return
    except (OSError, ValueError) as fault:
        raise Refusal(f"{_told(str(path))} cannot be written: {reason(fault)}.", hint) from fault
    if not stat.S_ISREG(mode):
        what = "a link to another place" if stat.S_ISLNK(mode) else "a folder" if stat.S_ISDIR(mode) else "no file"
        raise Refusal(
            f"{_told(str(path))} is {what} and is left as it is.",
            "Name a file that is none yet.",
        )
    if not replace:
        raise Refusal(f"{_told(str(path))} is there already.", hint)


def _put(temporary: Path, path: Path, replace: bool, hint: str) -> None:
    _refuse_what_is_there(path, replace, hint)
    if replace:
        os.replace(temporary, path)
        return
    try:
        os.link(temporary, path)
    except FileExistsError:
        _refuse_what_is_there(path, replace, hint)
        raise
    except OSError:
        # Some file systems have no second names for a file; there the moment since the look has to do.
        os.rename(temporary, path)


def _told(name: str) -> str:
    return "Standard input" if name == STANDARD else plain_text(name, _LONGEST_NAME)


class Lines:
    """The lines of a text file, one by one: UTF-8, UTF-16 with its mark, or else Windows-1252.

    A line that cannot be taken comes as the Refusal that says why; the next one is read all the same.

    longest: of a line [bytes]. marked: the file began with a byte order mark. windows: some line was read as
    Windows-1252.
    """

    def __init__(self, file: BinaryIO, name: str, longest: int) -> None:
        self.marked = False
        self.windows = False
        self._longest = longest
        self._chunks = chunks(file, name)

    def __iter__(self) -> Iterator[str | Refusal]:
        for line in self._whole_lines():
            if line is None:
                yield Refusal(f"This line is longer than {self._longest} bytes.", "Check that the file is a table.")
            else:
                yield self._decoded(line)

    def _bytes(self) -> Iterator[bytes]:
        """Yield the file's bytes without a mark, UTF-16 as UTF-8."""
        start = b""
        for chunk in self._chunks:
            start += chunk
            if len(start) > len(codecs.BOM_UTF8):
                break
        wide = start.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE))
        self.marked = wide or start.startswith(codecs.BOM_UTF8)
        if not wide:
            yield start.removeprefix(codecs.BOM_UTF8)
            yield from self._chunks
            return
        decoder = codecs.getincrementaldecoder("utf-16")("replace")
        yield decoder.decode(start).encode()
        for chunk in self._chunks:
            yield decoder.decode(chunk).encode()

    def _whole_lines(self) -> Iterator[bytes | None]:
        held, skipping = b"", False
        for chunk in self._bytes():
            held += chunk
            # The other half of a line end may still come.
            half = held[-1:] if held.endswith(b"\r") else b""
            *whole, held = _LINE_END.split(held[: len(held) - len(half)])
            held += half
            for line in whole:
                yield None if skipping or len(line) > self._longest else line
                skipping = False
            if len(held) > self._longest:
                skipping, held = True, half
        if skipping or held:
            yield None if skipping else held.removesuffix(b"\r")

    def _decoded(self, line: bytes) -> str | Refusal:
        if b"\x00" in line:
            return Refusal("There is a NUL byte in this line.", "Save the file as UTF-8 text.")
        with suppress(UnicodeDecodeError):
            return line.decode()
        if not self.marked:
            with suppress(UnicodeDecodeError):
                text = line.decode("cp1252")
                self.windows = True
                return text
        return Refusal("There are bytes in this line that are no text.", "Save the file as UTF-8 text.")


def cell(text: str) -> str:
    """Return a text as a cell that no spreadsheet runs as a formula and no terminal obeys.

    What begins like a formula, or would where the text is parted by another delimiter, gets an apostrophe before it,
    unless it is a number, a reading or a state: those are made of digits and of units and words of closed lists.
    """
    text = plain_text(text)
    if text.lstrip()[:1] in _FORMULA:
        text = text if _is_reading(text) else f"'{text}"
    if _INNER_FORMULA.search(text) is None or _is_reading(text):
        return text
    return _INNER_FORMULA.sub(_disarmed, text)


def _disarmed(found: re.Match[str]) -> str:
    return found[0] if _is_reading(found["text"]) else f"{found['before']}'{found['text']}"


def _is_reading(text: str) -> bool:
    if len(text) > LONGEST_STATE or not _NEVER_IN_A_READING.isdisjoint(text):
        return False
    parts = split_state(text)
    return len(parts) <= 2 and all(map(_is_number_with_unit, parts))


def _is_number_with_unit(part: str) -> bool:
    """Whether a part of a state is a number with a unit or without, words for states around it or alone."""
    rest = part.casefold().strip()
    while (word := _LETTERS.match(rest)) is not None and word[1] in _STATE_WORDS:
        rest = rest[word.end() :]
    if not rest:
        return True
    for _ in range(_MOST_WORDS):
        with suppress(Refusal):
            unit = split_number(guard(rest))[1]
            if not unit or fold(unit) in _units():
                return True
        rest, _, last = rest.rpartition(" ")
        if last not in _STATE_WORDS:
            return False
        rest = rest.rstrip()
    return False


@cache
def _units() -> frozenset[str]:
    return frozenset(spelling for kind in Kind if kind not in (Kind.WORDS, Kind.RATIO) for spelling in spellings(kind))
