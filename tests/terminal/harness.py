"""A real terminal for tests: a program in a pseudo-terminal, its keys, its screen, its processes.

Output is read only while the test waits for something, so a test that does not wait is a frozen link.
"""

from __future__ import annotations

import contextlib
import errno
import fcntl
import os
import pty
import re
import select
import signal
import struct
import subprocess
import sys
import termios
import time
import uuid
from collections.abc import Callable, Iterator, Mapping, Sequence
from pathlib import Path
from types import TracebackType
from typing import Any, Self

import pyte

PATIENCE = 15.0  # [s]: how long a slow machine may take before a wait is a failure
AT_ONCE = 200_000  # [bytes]: read in one go at most from a program that never stops sending
MARK = "TERMINAL_UNDER_TEST"

# One complete control sequence: CSI, a string (OSC, DCS, APC, PM, SOS) with its end, or a short escape.
_SEQUENCE = re.compile(rb"\x1b(?:\[[0-?]*[ -/]*[@-~]|[\]P_^X][^\x07\x1b]*(?:\x07|\x1b\\)|[ -/]+[0-~]|[0-OQ-WYZ\\`-~])")
# What the emulator would print instead of ignoring it.
_NOT_UNDERSTOOD = re.compile(rb"\x1b(?:\[[<=>][0-?]*[ -/]*[@-~]|\[[0-?]*[ -/]+[@-~]|[\]P_^X].*)", re.DOTALL)
_MODES = re.compile(rb"\x1b\[\?([0-9;]+)([hl])")

_TILDE = [11, 12, 13, 14, 15, 17, 18, 19, 20, 21, 23, 24]
FUNCTION_KEYS: dict[str, dict[int, bytes]] = {
    "xterm": {n: b"\x1bO" + b"PQRS"[n - 1 : n] if n <= 4 else b"\x1b[%d~" % _TILDE[n - 1] for n in range(1, 13)},
    "tilde": {n: b"\x1b[%d~" % _TILDE[n - 1] for n in range(1, 13)},
    "console": {n: b"\x1b[[" + b"ABCDE"[n - 1 : n] if n <= 5 else b"\x1b[%d~" % _TILDE[n - 1] for n in range(1, 13)},
}
"""What a function key sends: by default, with the setting ESC[n~, and on the Linux console."""

# The first process of a session that opens a terminal gets it as its own, as a login does.
_OPENING_THE_TERMINAL = ["/bin/sh", "-c", 'exec <>"$0" >&0 2>&0; exec "$@"']

Attributes = list[Any]


def app_command(*arguments: str) -> list[str]:
    """The command line that starts the program with `arguments`."""
    return [sys.executable, "-m", "gaugeside", *arguments]


def clean_environ(home: Path, changes: Mapping[str, str | None] | None = None) -> dict[str, str]:
    """An environment that owes nothing to the machine: `home` is its home and its GAUGESIDE_HOME.

    changes: variables to add or replace; None takes one out.
    """
    environ: dict[str, str | None] = {
        "PATH": os.environ.get("PATH", os.defpath),
        "HOME": str(home),
        "GAUGESIDE_HOME": str(home / "gaugeside"),
        "TERM": "xterm-256color",
        "LANG": "C.UTF-8",
        "TZ": "UTC",
        **(changes or {}),
    }
    return {name: value for name, value in environ.items() if value is not None}


class Terminal:
    """A program running in a pseudo-terminal; use it in a `with` block, which leaves no process behind.

    argv: command line; see `app_command`.
    home: folder for the program's files, see `clean_environ`.
    environ: changes to the clean environment.
    raw: every byte the program sent.
    """

    def __init__(
        self,
        argv: Sequence[str],
        home: Path,
        columns: int = 80,
        rows: int = 24,
        environ: Mapping[str, str | None] | None = None,
    ) -> None:
        self.raw = bytearray()
        self.screen = pyte.Screen(columns, rows)
        self._stream = pyte.ByteStream(self.screen)
        self._pending = b""
        self._marked = 0
        self._mark = f"{MARK}={uuid.uuid4()}"
        self._master, self._slave = pty.openpty()
        os.set_blocking(self._master, False)
        self._set_size(columns, rows)
        self.attributes_before = termios.tcgetattr(self._slave)
        name, value = self._mark.split("=")
        self.process = subprocess.Popen(
            [*_OPENING_THE_TERMINAL, os.ttyname(self._slave), *argv],
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
            env={**clean_environ(home, environ), name: value},
            cwd=home,
            start_new_session=True,
        )

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, fault: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    # Keys and screen

    def send(self, keys: str | bytes) -> None:
        """Type `keys`; text goes as UTF-8."""
        data = keys.encode() if isinstance(keys, str) else keys
        deadline = time.monotonic() + PATIENCE
        while data:
            try:
                data = data[os.write(self._master, data) :]
            except BlockingIOError:
                assert time.monotonic() < deadline, "the program does not read its keys"
                self.pump(0.02)

    def pump(self, seconds: float = 0.0) -> int:
        """Read what comes within `seconds` [s] and put it on the screen; return the number of bytes."""
        before = len(self.raw)
        deadline = time.monotonic() + seconds
        while self._master >= 0:
            left = max(0.0, deadline - time.monotonic())
            ready, _, _ = select.select([self._master], [], [], left)
            if not ready:
                break
            try:
                data = os.read(self._master, 65536)
            except BlockingIOError:
                continue
            except OSError as fault:
                if fault.errno != errno.EIO:
                    raise
                break
            if not data:
                break
            self.raw += data
            self._show(data)
            if time.monotonic() > deadline and len(self.raw) - before > AT_ONCE:
                break
        return len(self.raw) - before

    def wait_for(self, what: str | Callable[[Terminal], bool], timeout: float = PATIENCE) -> None:
        """Wait until a text is on the screen, or a condition holds; fail with the screen otherwise.

        timeout: [s].
        """
        wanted = (lambda terminal: what in terminal.screen_text()) if isinstance(what, str) else what
        deadline = time.monotonic() + timeout
        while True:
            ended = self.process.poll() is not None
            self.pump(0.02)
            if wanted(self):
                return
            if ended or time.monotonic() > deadline:
                why = f"the program ended with {self.process.returncode}" if ended else f"{timeout:g} s passed"
                raise AssertionError(f"waited in vain for {what!r}; {why}; the screen was\n{self.framed()}")

    def settle(self, quiet: float = 0.2, timeout: float = PATIENCE) -> int:
        """Read until nothing comes for `quiet` [s]; return the number of bytes."""
        before = len(self.raw)
        deadline = time.monotonic() + timeout
        while self.pump(quiet):
            assert time.monotonic() < deadline, f"still sending after {timeout:g} s"
        return len(self.raw) - before

    def mark(self) -> None:
        """Begin to count bytes anew."""
        self._marked = len(self.raw)

    def bytes_since_mark(self) -> int:
        """How many bytes were read since `mark`."""
        return len(self.raw) - self._marked

    def lines(self) -> list[str]:
        """The lines of the screen, without the blanks at their ends."""
        return [line.rstrip() for line in self.screen.display]

    def screen_text(self) -> str:
        """The screen as one text."""
        return "\n".join(self.lines())

    def line_with(self, text: str) -> str:
        """The first line that contains `text`; fails when none does."""
        found = next((line for line in self.lines() if text in line), None)
        assert found is not None, f"{text!r} is not on the screen\n{self.framed()}"
        return found

    def framed(self) -> str:
        """The screen in a frame, for a failure message."""
        edge = "+" + "-" * self.screen.columns + "+"
        return "\n".join([edge, *(f"|{line.ljust(self.screen.columns)}|" for line in self.lines()), edge])

    # The terminal itself

    def modes(self) -> set[int]:
        """The private modes that are switched on now (25 cursor, 1049 other screen, 1000-1006 mouse, ...)."""
        on = {25}
        for numbers, switch in _MODES.findall(bytes(self.raw)):
            named = {int(number) for number in numbers.split(b";") if number}
            on = on | named if switch == b"h" else on - named
        return on

    def attributes(self) -> Attributes:
        """The terminal's settings now; compare with `attributes_before`."""
        return termios.tcgetattr(self._slave)

    def resize(self, columns: int, rows: int) -> None:
        """Give the terminal another size and tell the program."""
        self._set_size(columns, rows)
        self.screen.resize(max(rows, 1), max(columns, 1))
        with contextlib.suppress(ProcessLookupError):
            os.killpg(self.process.pid, signal.SIGWINCH)

    def hang_up(self) -> None:
        """Cut the line: the terminal is gone, as after a dropped connection."""
        for name in ("_slave", "_master"):
            handle = getattr(self, name)
            if handle >= 0:
                os.close(handle)
                setattr(self, name, -1)

    # Processes

    def wait_end(self, timeout: float = PATIENCE) -> int:
        """Wait until the program ends, reading its output; return its exit status, negative for a signal."""
        deadline = time.monotonic() + timeout
        while self.process.poll() is None:
            if self._master >= 0:
                self.pump(0.01)
            else:
                time.sleep(0.01)
            assert time.monotonic() < deadline, f"still running after {timeout:g} s\n{self.framed()}"
        self.pump()
        return self.process.returncode

    def signal(self, number: int) -> None:
        """Send a signal to the program alone."""
        self.process.send_signal(number)

    def processes(self) -> dict[int, str]:
        """Every living process that comes from the program, itself included: its command line by its id.

        One that began a session of its own, or whose parent is gone, is found too.
        """
        return {pid: _command_of(pid) for pid in _marked_processes(self._mark)}

    def children(self) -> dict[int, str]:
        """Like `processes`, without the program itself."""
        return {pid: command for pid, command in self.processes().items() if pid != self.process.pid}

    def cpu_seconds(self, pid: int | None = None) -> float:
        """Processor time of one process [s], the program's when None."""
        fields = Path(f"/proc/{pid or self.process.pid}/stat").read_text().rpartition(")")[2].split()
        return (int(fields[11]) + int(fields[12])) / os.sysconf("SC_CLK_TCK")

    def close(self) -> None:
        """End everything that is still running and give the terminal back; may be called twice."""
        deadline = time.monotonic() + PATIENCE
        while self.process.poll() is None or _marked_processes(self._mark):
            for pid in {self.process.pid, *_marked_processes(self._mark)}:
                if pid != self.process.pid or self.process.returncode is None:
                    with contextlib.suppress(ProcessLookupError):
                        os.kill(pid, signal.SIGKILL)
            with contextlib.suppress(subprocess.TimeoutExpired):
                self.process.wait(0.05)
            assert time.monotonic() < deadline, f"cannot end {self.processes()}"
        self.hang_up()

    def _set_size(self, columns: int, rows: int) -> None:
        fcntl.ioctl(self._master, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))

    def _show(self, data: bytes) -> None:
        data, self._pending = self._pending + data, b""
        position = 0
        while position < len(data):
            start = data.find(b"\x1b", position)
            if start < 0:
                self._stream.feed(data[position:])
                return
            self._stream.feed(data[position:start])
            sequence = _SEQUENCE.match(data, start)
            if sequence is None:
                self._pending = data[start:]
                return
            if not _NOT_UNDERSTOOD.fullmatch(sequence[0]):
                self._stream.feed(sequence[0])
            position = sequence.end()


def _marked_processes(mark: str) -> list[int]:
    return [pid for pid in _all_processes() if mark.encode() in _environ_of(pid).split(b"\0")]


def _all_processes() -> Iterator[int]:
    return (int(name) for name in os.listdir("/proc") if name.isdigit())


def _environ_of(pid: int) -> bytes:
    try:
        return Path(f"/proc/{pid}/environ").read_bytes()
    except OSError:
        return b""


def _command_of(pid: int) -> str:
    try:
        return Path(f"/proc/{pid}/cmdline").read_bytes().replace(b"\0", b" ").decode(errors="replace").strip()
    except OSError:
        return ""
