"""What stands in the place of a file, a folder or a stream: told, never waited for, never a way out of the folder."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from gaugeside.cli import main
from gaugeside.engine import Engine, Reply
from gaugeside.settings import load_draft
from terminal.harness import clean_environ
from unit.hostile import is_sentence, obeyed

PLACES = ("settings.json", "draft.json", "refrigerants.toml", "compressors.toml", "themes", "themes/mine.toml",
          "helper.log", "logbook.sqlite3")  # fmt: skip


def _pipe(path: Path) -> None:
    os.mkfifo(path)


def _device(path: Path) -> None:
    path.symlink_to("/dev/zero")


def _loop(path: Path) -> None:
    path.symlink_to(path)


def _dangling(path: Path) -> None:
    path.symlink_to(Path(os.environ["HOME"], "outside", "made"))


THINGS = {"pipe": _pipe, "device": _device, "loop": _loop, "dangling": _dangling, "folder": Path.mkdir}


@pytest.mark.parametrize("make", THINGS.values(), ids=THINGS)
def test_what_is_no_file_is_told_and_never_waited_for(
    make: Callable[[Path], None], isolated: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    home = isolated
    home.mkdir()
    (home.parent / "outside").mkdir()
    for place in PLACES:
        path = home / place
        path.parent.mkdir(exist_ok=True)
        path.unlink(missing_ok=True)
        make(path)
        code = main(["saturation", "R-134a", "5 C", "--keep"])
        out, err = capfd.readouterr()
        assert "temperature" in out, (place, err)
        assert code == (1 if place == "logbook.sqlite3" else 0), (place, out, err)
        assert "Traceback" not in err
        load_draft(home / "draft.json")
        if path.is_symlink() or not path.is_dir():
            path.unlink()
        else:
            path.rmdir()
    assert not list((home.parent / "outside").iterdir()), "nothing is made outside"


def _answer(engine_log: Path) -> Reply:
    replies: list[Reply] = []
    engine = Engine(replies.append, lambda word: None, log=engine_log)
    engine.start()
    try:
        engine.ask("saturation", {"check": "none"})
        deadline = time.monotonic() + 20
        while not replies:
            assert time.monotonic() < deadline, "no answer"
            time.sleep(0.01)
        return replies[0]
    finally:
        engine.close()


def test_the_helper_s_log_is_no_way_out_and_no_trap(tmp_path: Path) -> None:
    log, other = tmp_path / "helper.log", tmp_path / "other"
    other.write_text("x" * 300_000)
    log.symlink_to(other)
    assert _answer(log).fault
    assert other.stat().st_size == 300_000
    log.unlink()
    os.mkfifo(log)
    assert _answer(log).fault


ODD = {
    "a file": "{tmp}/file", "under a file": "{tmp}/file/x", "device": "/dev/null", "pipe": "{tmp}/pipe",
    "long name": "{tmp}/" + "x" * 300, "long path": "{tmp}" + "/xxxxxxxxx" * 600, "nobody": "~nobody-of-that-name/x",
    "escape": "{tmp}/file/\x1b[2J\u202e", "bytes": "{tmp}/file/\udcff", "root": "/", "loop": "{tmp}/loop",
    "proc": "/proc/self/fd", "dots": "{tmp}/../../../../../../../../proc/x",
}  # fmt: skip


@pytest.fixture
def odd_places(tmp_path: Path) -> Path:
    (tmp_path / "file").write_text("a document")
    os.mkfifo(tmp_path / "pipe")
    _loop(tmp_path / "loop")
    return tmp_path


@pytest.mark.parametrize("name", ODD.values(), ids=ODD)
def test_odd_homes_and_logbooks(
    name: str, odd_places: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    where = name.format(tmp=odd_places)
    logbook = where if where != "/" else "/proc"
    for words in (["logbook", "list"], ["saturation", "R-134a", "5 C", "--keep"]):
        code = main([*words, "--logbook", logbook])
        out, err = capfd.readouterr()
        assert code in (1, 2) or "The logbook is empty" in out, (code, out, err)
        assert not obeyed(out + err)
        assert len(err) < 8000
    if where not in ("/", "/proc/self/fd"):
        monkeypatch.setenv("GAUGESIDE_HOME", where)
        code = main(["saturation", "R-134a", "5 C", "--keep"])
        out, err = capfd.readouterr()
        assert code in (1, 2)
        assert "NOT KEPT" in out or is_sentence(err.strip())
        assert not obeyed(out + err)
    assert (odd_places / "file").read_text() == "a document"


def test_the_folder_it_was_started_in_is_gone(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    before = Path.cwd()
    gone = tmp_path / "gone"
    gone.mkdir()
    os.chdir(gone)
    gone.rmdir()
    try:
        assert main(["logbook", "list", "--logbook", "mine.sqlite3"]) == 2
        assert "started in is gone" in capfd.readouterr().err
        assert main(["convert", "5 bar g"]) == 0
    finally:
        os.chdir(before)


@pytest.mark.parametrize("closed", ["<&-", "<&- >&-", "<&- >&- 2>&-", "2>&-"])
def test_closed_streams(closed: str, tmp_path: Path) -> None:
    program = f'"{sys.executable}" -m gaugeside'
    shell = f'{program} convert "5 barx" {closed}; echo $? >code; {program} {closed}; echo $? >>code'
    done = subprocess.run(
        ["/bin/sh", "-c", shell], cwd=tmp_path, env=clean_environ(tmp_path), capture_output=True,
        timeout=30, check=False,
    )  # fmt: skip
    # Where no answer can go, nothing is answered; the app without a terminal is refused as ever.
    nowhere = " >&-" in f" {closed}".replace(" 2>&-", "")
    assert (tmp_path / "code").read_text().split() == ["1" if nowhere else "2", "2"]
    assert b"Traceback" not in done.stderr
