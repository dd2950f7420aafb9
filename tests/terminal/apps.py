"""The program in a terminal, ready for a test: settings beforehand, a slow helper, what it kept."""

from __future__ import annotations

import json
import sqlite3
import time
from collections.abc import Mapping
from contextlib import closing
from pathlib import Path
from typing import Any

from terminal.harness import Terminal, app_command

READY = "F10 leave"
# Seconds in which an end must come; a busy machine gets more than the program promises.
AT_ONCE = 5.0


def app(
    home: Path,
    *arguments: str,
    refrigerant: str = "R-134a",
    columns: int = 80,
    rows: int = 24,
    environ: Mapping[str, str | None] | None = None,
    **settings: Any,
) -> Terminal:
    """Open the program in a terminal of its own on `home`, with these settings unless it has been there before."""
    folder = home / "gaugeside"
    if not folder.exists():
        folder.mkdir(mode=0o700, parents=True)
        (folder / "settings.json").write_text(json.dumps({"refrigerant": refrigerant, **settings}))
    return Terminal(app_command(*arguments), home, columns, rows, environ)


def with_helper(home: Path, before_loading: str) -> dict[str, str]:
    """Return the environment in which every helper process runs `before_loading` first, in Python."""
    folder = home / "interpreter"
    folder.mkdir()
    (folder / "sitecustomize.py").write_text(
        "import sys\nif 'gaugeside.engine.worker' in sys.orig_argv:\n"
        + "".join(f"    {line}\n" for line in before_loading.splitlines())
    )
    return {"PYTHONPATH": str(folder)}


def helper_of(shown: Terminal) -> int:
    """Return the process number of the helper, which is a child of the program."""
    shown.wait_for(lambda terminal: any("gaugeside.engine.worker" in line for line in terminal.children().values()))
    pid = next(pid for pid, line in shown.children().items() if "gaugeside.engine.worker" in line)
    parent = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[1]
    assert int(parent) == shown.process.pid
    return pid


def draft_holds(home: Path, text: str, seconds: float = 10.0) -> bool:
    """Tell whether the half-typed forms on the disk hold a text, waiting a while for it."""
    deadline = time.monotonic() + seconds
    file = home / "gaugeside" / "draft.json"
    while not (file.exists() and text in file.read_text()):
        if time.monotonic() > deadline:
            return False
        time.sleep(0.02)
    return True


def readings_kept(home: Path) -> list[dict[str, str]]:
    """Return the readings of every entry, oldest first, read without the program."""
    with closing(sqlite3.connect(home / "gaugeside" / "logbook.sqlite3")) as connection:
        return [json.loads(text) for (text,) in connection.execute("SELECT readings FROM entries ORDER BY number")]


def no_process_left(shown: Terminal) -> None:
    """Wait a moment until nothing of the program runs any more."""
    deadline = time.monotonic() + AT_ONCE
    while shown.processes() and time.monotonic() < deadline:
        time.sleep(0.02)
    assert shown.processes() == {}


def is_restored(shown: Terminal) -> bool:
    """Tell whether the terminal is as it was before the program, on its own screen and with its cursor."""
    raw = bytes(shown.raw)
    wraps = raw.rfind(b"\x1b[?7h") > raw.rfind(b"\x1b[?7l") or b"\x1b[?7l" not in raw
    return shown.attributes() == shown.attributes_before and shown.modes() - {7} == {25} and wraps
