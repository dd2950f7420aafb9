"""Disks that fail under the program in a terminal: rights, room, mounts, and what a network's files refuse."""

from __future__ import annotations

import errno
import json
import os
import re
import shutil
import subprocess
import sys
from collections.abc import Sequence
from datetime import UTC, datetime
from pathlib import Path

import pytest

from gaugeside.logbook import Entry, Logbook
from terminal.apps import READY
from terminal.calls import Rule, refusing
from terminal.harness import PATIENCE, Terminal, app_command

ENTRIES = 3
SITE = {"refrigerant": "R-134a", "site_pressure_text": "640 m", "site_pressure_from": "altitude"}

# A superuser's rights come from capabilities. Without them, and without a way to get them back by starting a program,
# permissions bind it like everybody else, and it still reaches its own interpreter and folders.
_ORDINARY = """
import ctypes, os
library = ctypes.CDLL(None)
zero = ctypes.c_ulong(0)
if os.geteuid() == 0:
    assert library.prctl(47, ctypes.c_ulong(4), zero, zero, zero) == 0, "ambient capabilities"
    assert library.prctl(28, ctypes.c_ulong(3), zero, zero, zero) == 0, "no rights of the superuser"
"""
_LOCK_COMMANDS = (5, 6, 7, 36, 37, 38)  # F_GETLK, F_SETLK, F_SETLKW and those of open file descriptions
NO_LOCKS = [Rule("fcntl", errno.ENOLCK, 1, _LOCK_COMMANDS), Rule("flock", errno.ENOLCK)]
STALE_LOCKS = [Rule("fcntl", errno.ESTALE, 1, _LOCK_COMMANDS), Rule("flock", errno.ESTALE)]
NO_SYNC = [Rule("fsync", errno.ESTALE), Rule("fdatasync", errno.EIO)]
NO_NEW_NAMES = [Rule(call, errno.EIO) for call in ("link", "linkat", "rename", "renameat", "renameat2")]


def after(code: str, argv: Sequence[str] | None = None) -> list[str]:
    """Return a command that runs Python `code` and becomes `argv`, the program when None."""
    script = f"{code}\nimport os, sys\nos.execvp(sys.argv[1], sys.argv[1:])"
    return [sys.executable, "-c", script, *(argv or app_command())]


def ordinary(argv: Sequence[str] | None = None) -> list[str]:
    """Return a command for `argv`, the program when None, that permissions bind whoever runs the tests."""
    return after(_ORDINARY, argv)


def on_a_network(rules: Sequence[Rule]) -> list[str]:
    """Return a command for the program under which calls fail as those on a network's files do."""
    return after(refusing(rules))


class OwnMount:
    """A small disk in the place of a folder, seen by one program alone; skips where the system allows none."""

    def __init__(self, folder: Path, kilobytes: int) -> None:
        self._folder = folder
        self._user = [] if os.geteuid() == 0 else ["--user", "--map-root-user"]
        if shutil.which("unshare") is None or self._run("unshare", *self._user, "--mount", "true") != 0:
            pytest.skip("no mount of one's own on this system; limits and permissions are tried everywhere")
        # The settings that are there go along.
        script = (
            f"cd / && cp -a \"$0\" \"$0.copy\" && mount -t tmpfs -o size={kilobytes}k,mode=700 none \"$0\" "
            "&& cp -a \"$0.copy/.\" \"$0\" && exec \"$@\""
        )  # fmt: skip
        self.command = ["unshare", *self._user, "--mount", "/bin/sh", "-c", script, str(folder), *app_command()]

    def seen_by(self, shown: Terminal) -> Path:
        """The folder as the program sees it."""
        return Path(f"/proc/{shown.process.pid}/root{self._folder}")

    def remount(self, shown: Terminal, how: str) -> None:
        """Make the disk "ro" under the running program, or "rw" again."""
        user = ["--user", "--preserve-credentials"] if self._user else []
        where = ["nsenter", "--target", str(shown.process.pid), *user, "--mount"]
        # The program's helper holds its log open, so the disk itself cannot be made read-only; a view of it can.
        shut = 'mount --bind "$0" "$0" && mount -o remount,bind,ro "$0"'
        script = shut if how == "ro" else 'umount "$0"'
        assert self._run(*where, "/bin/sh", "-c", script, str(self._folder)) == 0

    def _run(self, *argv: str) -> int:
        return subprocess.run(argv, capture_output=True, timeout=PATIENCE, check=False).returncode


def home_of_old(tmp_path: Path, entries: int = ENTRIES, **settings: object) -> Path:
    """Make the program's folder with settings and a logbook of that many entries, and return it."""
    home = tmp_path / "gaugeside"
    home.mkdir(mode=0o700)
    (home / "settings.json").write_text(json.dumps({**SITE, **settings}))
    for number in range(entries):
        note = f"visit {number} " + "n" * 600
        Logbook(home / "logbook.sqlite3").keep(
            Entry(None, datetime.now(UTC), "superheat", "R-134a", note=note, headline=f"invented visit {number}")
        )
    return home


def contents(home: Path) -> dict[str, bytes]:
    """Return every file of the program's folder by name, but the helper's log and what a kill left half written."""
    files = (path for path in sorted(home.iterdir()) if path.name != "helper.log" and not path.name.startswith("."))
    return {path.name: path.read_bytes() for path in files}


def calculates(shown: Terminal) -> None:
    """Type a suction pressure and its pipe and see the superheat, 10 K above the dew point."""
    shown.wait_for(READY)
    # Saturated R-134a at 0 °C: 292.785 kPa, VDI Heat Atlas 2010.
    shown.send("292.785 kPa abs\t10 C")
    shown.wait_for("superheat ")
    shown.wait_for("10.0 K")


def picks_the_refrigerant(shown: Terminal) -> None:
    """Pick R-134a by its name."""
    shown.wait_for(READY)
    shown.send("\x1b[19~")  # F8
    shown.wait_for("Pick the refrigerant")
    shown.send("134a\r")
    shown.wait_for("R-134a  A1")


def retypes(shown: Terminal, degrees: int) -> None:
    """Type another suction pipe temperature [°C] and see its superheat."""
    shown.send(f"\x15{degrees} C")
    shown.wait_for(f"{degrees}.0 K")


def word(shown: Terminal) -> str:
    """The two lines under the sheet as one sentence."""
    return " ".join(" ".join(shown.lines()[-3:-1]).split())


def says(shown: Terminal, *parts: str) -> str:
    """Wait until the two lines under the sheet hold all `parts`; return them, whole and not cut short."""
    shown.wait_for(lambda terminal: all(part in word(terminal) for part in parts))
    assert not word(shown).endswith("..."), shown.framed()
    return word(shown)


def told(shown: Terminal) -> list[str]:
    """What the program had to tell since its start, as its help keeps it."""
    shown.send("\x1bOP")  # F1
    shown.wait_for("goes back")
    text = " ".join(line.strip() for line in shown.lines()[2:])
    shown.send("\x1bOP")
    shown.wait_for(READY)
    head = re.split(r" (?:Superheat: |Keys )", f" {text}")[0]
    return [message.strip() for message in head.split(" ! ") if message.strip()]


def lists(shown: Terminal, *headlines: str) -> None:
    """Open the logbook, see these headlines, and go back to the sheet."""
    shown.send("\x1b[17~")  # F6
    for headline in headlines:
        shown.wait_for(headline)
    shown.send("\x1bOR")  # F3
    shown.wait_for("suction pressure")
