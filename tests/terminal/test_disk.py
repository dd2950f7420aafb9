"""The disk fails: the sheet goes on answering, says so, and touches no healthy file."""

from __future__ import annotations

import fcntl
import os
import sqlite3
import sys
from collections.abc import Callable
from contextlib import closing
from datetime import UTC, datetime
from pathlib import Path

import pytest

from gaugeside.logbook import Entry, Logbook
from terminal.apps import READY, app, readings_kept
from terminal.harness import Terminal, app_command


def calculates(shown: Terminal) -> None:
    """Type a suction pressure and its pipe and see the superheat, 10 K above the dew point."""
    shown.wait_for(READY)
    # Saturated R-134a at 0 °C: 292.785 kPa, VDI Heat Atlas 2010.
    shown.send("292.785 kPa abs\t10 C")
    shown.wait_for("superheat ")
    shown.wait_for("10.0 K")


def limited(arguments: list[str], before: str) -> list[str]:
    """Return a command that runs a program under a limit set first."""
    script = f"import os, resource, sys\n{before}\nos.execv(sys.argv[1], sys.argv[1:])"
    return [sys.executable, "-c", script, *arguments]


def test_a_disk_that_takes_no_byte_more(tmp_path: Path) -> None:
    # No file may grow: what a full disk does to every write.
    command = limited(app_command(), "resource.setrlimit(resource.RLIMIT_FSIZE, (0, 0))")
    home = tmp_path / "gaugeside"
    home.mkdir(mode=0o700)
    (home / "settings.json").write_text('{"refrigerant": "R-134a"}')
    with Terminal(command, tmp_path) as shown:
        calculates(shown)
        shown.send("\r")
        shown.wait_for("NOT KEPT")
        shown.send("\t1.5 bar")
        shown.wait_for("1.50 bar g")
    assert (home / "settings.json").read_text() == '{"refrigerant": "R-134a"}'


def test_a_home_that_cannot_be(tmp_path: Path) -> None:
    in_the_way = tmp_path / "file"
    in_the_way.write_text("not a folder")
    with app(tmp_path, environ={"GAUGESIDE_HOME": str(in_the_way / "home")}) as shown:
        shown.wait_for(READY)
        shown.send("\x1b[19~")  # F8
        shown.wait_for("Pick the refrigerant")
        shown.send("134a\r")
        calculates(shown)
        shown.send("\r")
        shown.wait_for("NOT KEPT")
    assert in_the_way.read_text() == "not a folder"


def garbage(path: Path) -> None:
    path.write_bytes(b"this is no logbook " * 300)


def newer(path: Path) -> None:
    Logbook(path).keep(Entry(None, datetime.now(UTC), "superheat", "R-134a"))
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.execute("PRAGMA user_version = 999")


@pytest.mark.parametrize(("spoil", "says", "is_kept"), [(garbage, "aside", True), (newer, "newer", False)])
def test_a_logbook_that_is_no_logbook(tmp_path: Path, spoil: Callable[[Path], None], says: str, is_kept: bool) -> None:
    home = tmp_path / "gaugeside"
    home.mkdir(mode=0o700)
    (home / "settings.json").write_text('{"refrigerant": "R-134a"}')
    logbook = home / "logbook.sqlite3"
    spoil(logbook)
    before = logbook.read_bytes()
    with app(tmp_path) as shown:
        calculates(shown)
        shown.send("\r")
        shown.wait_for(says)
    if is_kept:
        assert len(readings_kept(tmp_path)) == 1
        # What was there lies beside it, whole.
        assert before in [path.read_bytes() for path in home.iterdir() if path != logbook]
    else:
        assert logbook.read_bytes() == before


def test_a_logbook_locked_for_a_while(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        calculates(shown)
        shown.send("\r")
        shown.wait_for("Kept at")
        folder = os.open(tmp_path / "gaugeside", os.O_RDONLY)
        with closing(sqlite3.connect(tmp_path / "gaugeside" / "logbook.sqlite3", isolation_level=None)) as other:
            other.execute("BEGIN EXCLUSIVE")
            fcntl.flock(folder, fcntl.LOCK_SH)
            shown.send("\x15" + "11 C\r")
            # The sheet answers on while the logbook waits.
            shown.wait_for("11.0 K")
            shown.send("\x15" + "12 C")
            shown.wait_for("12.0 K")
            other.execute("COMMIT")
            fcntl.flock(folder, fcntl.LOCK_UN)
        os.close(folder)
        shown.wait_for("entry 2")
    assert [readings["suction_temperature"] for readings in readings_kept(tmp_path)] == ["10 C", "11 C"]
