"""The disk fails: the sheet goes on answering, says so, and touches no healthy file."""

from __future__ import annotations

import fcntl
import json
import os
import resource
import signal
import sqlite3
import stat
import subprocess
import sys
from collections.abc import Callable
from contextlib import closing
from pathlib import Path

import pytest

from gaugeside.logbook import Logbook
from terminal.apps import READY, app, draft_holds, readings_kept
from terminal.disks import (
    ENTRIES,
    SITE,
    OwnMount,
    after,
    calculates,
    contents,
    home_of_old,
    lists,
    ordinary,
    picks_the_refrigerant,
    retypes,
    says,
    told,
    word,
)
from terminal.harness import Terminal, clean_environ

VISITS = [f"invented visit {number}" for number in range(ENTRIES)]
WITHOUT_HOME = {"GAUGESIDE_HOME": None}


def pipes_kept(tmp_path: Path) -> list[str]:
    """The suction pipe of every entry that was kept on a sheet, oldest first, read without the program."""
    return [readings["suction_temperature"] for readings in readings_kept(tmp_path) if readings]


# Full


def test_a_disk_that_takes_no_byte_more(tmp_path: Path) -> None:
    # No file may grow: what a full disk does to every write.
    home = home_of_old(tmp_path)
    before = contents(home)
    with Terminal(after("import resource\nresource.setrlimit(resource.RLIMIT_FSIZE, (0, 0))"), tmp_path) as shown:
        calculates(shown)
        # Said when typing rests, and not at every key that could not be saved.
        said = says(shown, "NOT SAVED", "cannot be written", "not remembered")
        shown.send("\r")
        says(shown, "NOT KEPT", "cannot be written: its disk is full, over its quota or failing", "--logbook PATH")
        retypes(shown, 11)
        assert "NOT" not in word(shown)
        lists(shown, *VISITS)
        assert [message for message in told(shown) if "NOT SAVED" in message] == [said]
    assert contents(home) == before


def test_a_disk_that_fills_and_has_room_again(tmp_path: Path) -> None:
    home = home_of_old(tmp_path, entries=0)
    with app(tmp_path) as shown:
        calculates(shown)
        shown.send("\r")
        says(shown, "Kept at", "entry 1")
        before = (home / "logbook.sqlite3").read_bytes()
        _, most = resource.prlimit(shown.process.pid, resource.RLIMIT_FSIZE)
        resource.prlimit(shown.process.pid, resource.RLIMIT_FSIZE, (0, most))
        retypes(shown, 11)
        shown.send("\r")
        says(shown, "NOT KEPT", "disk is full")
        shown.wait_for(lambda terminal: "1 more: F1" in word(terminal))
        assert (home / "logbook.sqlite3").read_bytes() == before
        resource.prlimit(shown.process.pid, resource.RLIMIT_FSIZE, (most, most))
        shown.send("\r")
        says(shown, "Kept at", "entry 2")
        assert draft_holds(tmp_path, "11 C")
        messages = told(shown)
        assert [sum(start in message for message in messages) for start in ("NOT KEPT", "NOT SAVED")] == [1, 1]
    assert pipes_kept(tmp_path) == ["10 C", "11 C"]


def test_a_small_disk_that_fills_and_is_mounted_read_only(tmp_path: Path) -> None:
    home = home_of_old(tmp_path)
    disk = OwnMount(home, kilobytes=200)
    with Terminal(disk.command, tmp_path) as shown:
        calculates(shown)
        filler = disk.seen_by(shown) / "filler"
        with filler.open("wb", buffering=0) as file, pytest.raises(OSError, match="No space"):
            file.writelines([b"x" * 4096] * 1000)
        shown.send("\r")
        says(shown, "NOT KEPT", "disk is full", "Free some space")
        filler.unlink()
        shown.send("\r")
        says(shown, "Kept at", "entry 4")
        disk.remount(shown, "ro")
        retypes(shown, 11)
        shown.send("\r")
        says(shown, "NOT KEPT", "read-only", "--logbook PATH")
        lists(shown, "superheat 10.0 K", *VISITS)
        disk.remount(shown, "rw")
        shown.send("\r")
        says(shown, "Kept at", "entry 5")
        lists(shown, "superheat 11.0 K", "superheat 10.0 K", *VISITS)
        # A form that is being written has a name of its own until it is whole.
        healthy = {"settings.json", "draft.json", "logbook.sqlite3", "helper.log"}
        shown.wait_for(lambda _: {path.name for path in disk.seen_by(shown).iterdir()} <= healthy)


# Rights


def test_the_superuser_s_rights_are_gone_where_they_must_not_count(tmp_path: Path) -> None:
    shut = tmp_path / "shut"
    shut.mkdir(mode=0o000)
    ask = [sys.executable, "-c", f"import os; os.listdir({str(shut)!r})"]
    done = subprocess.run(ordinary(ask), env=clean_environ(tmp_path), capture_output=True, text=True, check=False)
    assert "PermissionError" in done.stderr


def test_a_home_that_is_read_only_and_then_is_not(tmp_path: Path) -> None:
    home = home_of_old(tmp_path)
    before = contents(home)
    for path in home.iterdir():
        path.chmod(0o400)
    home.chmod(0o500)
    with Terminal(ordinary(), tmp_path) as shown:
        calculates(shown)
        shown.send("\r")
        said = says(shown, "NOT KEPT", "read-only", "--logbook PATH", "GAUGESIDE_HOME")
        lists(shown, *VISITS)
        # It stands until a key changes something, and nothing that is told later covers it.
        shown.wait_for(lambda terminal: word(terminal) == f"{said} (1 more: F1)")
        assert contents(home) == before
        home.chmod(0o700)
        for path in home.iterdir():
            path.chmod(0o600)
        # What was not kept is still on the form.
        assert "10.0 K" in shown.line_with("superheat ")
        shown.send("\r")
        says(shown, "Kept at", "entry 4")
        lists(shown, "superheat 10.0 K", *VISITS)
        assert draft_holds(tmp_path, "292.785")
        assert [message.split(":")[0] for message in told(shown)][:2] == ["NOT KEPT", "NOT SAVED"]
    assert contents(home).keys() == {*before, "draft.json"}
    assert contents(home)["settings.json"] == before["settings.json"]


def test_a_folder_that_is_shut_and_then_opened(tmp_path: Path) -> None:
    home = home_of_old(tmp_path)
    before = contents(home)
    home.chmod(0)
    with Terminal(ordinary(), tmp_path) as shown:
        shown.wait_for(READY)
        says(shown, "folder cannot be read (permission denied)", "without settings and forms", "F7")
        picks_the_refrigerant(shown)
        calculates(shown)
        shown.send("\r")
        says(shown, "NOT KEPT", "permission denied", "GAUGESIDE_HOME")
        home.chmod(0o700)
        shown.send("\r")
        says(shown, "Kept at", "entry 4")
        assert draft_holds(tmp_path, "292.785")
    # The settings in there were never seen, so those of this start did not take their place.
    assert contents(home).keys() == {*before, "draft.json"}
    assert contents(home)["settings.json"] == before["settings.json"]
    with app(tmp_path) as shown:
        shown.wait_for("altitude 640 m")


# Missing


def test_the_first_start_makes_everything_for_its_owner_alone(tmp_path: Path) -> None:
    # Nothing is there, not even the home folder, and the system gives every new file to everybody.
    home = tmp_path / "not yet"
    environ = {**WITHOUT_HOME, "HOME": str(home)}
    with Terminal(after("import os\nos.umask(0)"), tmp_path, environ=environ) as shown:
        picks_the_refrigerant(shown)
        calculates(shown)
        shown.send("\r")
        says(shown, "Kept at", "entry 1")
        made = home / ".local" / "share" / "gaugeside"
        shown.wait_for(lambda _: (made / "draft.json").exists() and not list(made.glob(".*")))
        assert told(shown) == []
    modes = {path.relative_to(home).as_posix(): stat.S_IMODE(path.stat().st_mode) for path in home.rglob("*")}
    wanted = {".config/gaugeside/settings.json", ".local/share/gaugeside/draft.json",
              ".local/share/gaugeside/logbook.sqlite3", ".local/state/gaugeside/helper.log"}  # fmt: skip
    files = {name: mode for name, mode in modes.items() if (home / name).is_file()}
    assert files == dict.fromkeys(wanted, 0o600)
    folders = {name: mode for name, mode in modes.items() if name not in files}
    assert folders == dict.fromkeys(folders, 0o700)
    assert stat.S_IMODE(home.stat().st_mode) == 0o700


def test_no_home_is_known(tmp_path: Path) -> None:
    # A user without HOME, and without a line in the system's list of users.
    code = (
        "import pwd, runpy, sys\ndef unknown(number): raise KeyError(number)\npwd.getpwuid = unknown\n"
        "sys.argv[0] = 'gaugeside'\nrunpy.run_module('gaugeside', run_name='__main__', alter_sys=True)"
    )
    environ = {**WITHOUT_HOME, "HOME": None}
    with Terminal([sys.executable, "-c", code], tmp_path, environ=environ) as shown:
        picks_the_refrigerant(shown)
        calculates(shown)
        shown.send("\r")
        says(shown, "NOT KEPT", "No home folder is known", "Set GAUGESIDE_HOME")
        retypes(shown, 11)
    assert list(tmp_path.iterdir()) == []


def test_a_home_that_cannot_be(tmp_path: Path) -> None:
    in_the_way = tmp_path / "file"
    in_the_way.write_text("not a folder")
    with app(tmp_path, environ={"GAUGESIDE_HOME": str(in_the_way / "home")}) as shown:
        shown.wait_for(READY)
        says(shown, "folder cannot be read (not a directory)")
        picks_the_refrigerant(shown)
        calculates(shown)
        shown.send("\r")
        says(shown, "NOT KEPT", "not a directory", "GAUGESIDE_HOME")
        retypes(shown, 11)
    assert in_the_way.read_text() == "not a folder"


# Corrupt, truncated, newer


NEWER_SETTINGS = {**SITE, "gauges": {"blue": "suction"}}
DRAFT = {"pane": "superheat", "note": "", "forms": {"superheat": {"texts": {"suction_pressure": "3 bar"}, "units": {}}}}


@pytest.mark.parametrize(
    ("settings", "draft", "said", "aside"),
    [
        (json.dumps(SITE)[:-20], json.dumps(DRAFT), ["settings.json is damaged"], "settings.json"),
        (json.dumps(SITE), json.dumps(DRAFT)[:-20], ["draft.json is damaged"], "draft.json"),
        (json.dumps(NEWER_SETTINGS), '{"forms": [1, 2], "pane": 3}',
         ['"gauges" is not a setting of this version', "draft.json holds something else"], "draft.json"),
    ],
    ids=["truncated settings", "truncated forms", "newer settings, other forms"],
)  # fmt: skip
def test_settings_or_forms_that_are_none(
    tmp_path: Path, settings: str, draft: str, said: list[str], aside: str
) -> None:
    home = home_of_old(tmp_path, entries=1)
    (home / "settings.json").write_text(settings)
    (home / "draft.json").write_text(draft)
    before = contents(home)
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        says(shown, said[0])
        assert contents(home) == before
        messages = told(shown)
        assert len(messages) == len(said)
        assert all(words in message for words, message in zip(said, messages, strict=True))
        if aside == "settings.json":
            # The healthy neighbour is used.
            assert "3 bar" in shown.line_with("suction pressure")
        else:
            assert "altitude 640 m" in shown.lines()[0]
        picks_the_refrigerant(shown)
        shown.send("\x15")
        calculates(shown)
        shown.send("\x1b[20~")  # F9: another machine, so that settings and forms are both written
        shown.wait_for("For what is kept next")
        shown.send("rack 2\r\r")
        shown.wait_for("Kept next: machine rack 2")
        shown.wait_for(lambda _: "rack 2" in (home / "settings.json").read_text())
        assert draft_holds(tmp_path, "292.785")
        assert len(told(shown)) == len(said)
    after_it = contents(home)
    assert after_it.keys() == {*before, f"{aside}.unreadable"}
    assert after_it[f"{aside}.unreadable"] == before[aside]
    kept = json.loads(after_it["settings.json"])
    assert kept["tag"] == "rack 2"
    if aside != "settings.json":
        known = json.loads(settings)
        assert {name: kept[name] for name in known} == known


def garbage(path: Path) -> None:
    path.write_bytes(b"this is no logbook " * 300)


def truncated(path: Path) -> None:
    size = path.stat().st_size
    os.truncate(path, size * 2 // 3 // 4096 * 4096)


def newer(path: Path) -> None:
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.execute("PRAGMA user_version = 999")


@pytest.mark.parametrize(
    ("spoil", "lost"), [(garbage, "damaged or not a logbook"), (truncated, "damaged"), (newer, "newer version")]
)
def test_a_logbook_that_is_no_logbook(tmp_path: Path, spoil: Callable[[Path], None], lost: str) -> None:
    home = home_of_old(tmp_path, entries=30)
    logbook = home / "logbook.sqlite3"
    spoil(logbook)
    before = contents(home)
    with app(tmp_path) as shown:
        calculates(shown)
        shown.send("\x1b[17~")  # F6
        says(shown, lost)
        shown.send("\x1bOR")  # F3
        shown.wait_for("suction pressure")
        assert logbook.read_bytes() == before["logbook.sqlite3"]
        shown.send("\r")
        if spoil is newer:
            says(shown, "NOT KEPT", "newer version of gaugeside", "left as it is", "--logbook PATH")
        else:
            said = says(shown, "Kept as entry", "new logbook", "damaged one, set aside as logbook-")
            lists(shown, "superheat 10.0 K", *(["invented visit 1"] if spoil is truncated else []))
            assert len(told(shown)) == 1
    if spoil is newer:
        assert contents(home)["logbook.sqlite3"] == before["logbook.sqlite3"]
        assert contents(home).keys() == {*before, "draft.json"}
        return
    assert pipes_kept(tmp_path) == ["10 C"]
    (aside,) = home.glob("logbook-damaged-*.sqlite3")
    assert aside.read_bytes() == before["logbook.sqlite3"]
    if spoil is truncated:
        saved = [entry for entry in Logbook(logbook).entries() if entry.note.startswith("visit ")]
        assert len(saved) >= 10
        assert f"with {len(saved)} entries of the damaged one" in said


# Locked


HOLDER = """
import sqlite3, sys, time
from pathlib import Path
from gaugeside.logbook import Entry, Logbook, store
with Logbook(Path(sys.argv[1]))._writing() as connection:
    connection.execute("DELETE FROM entries")
    print("held", flush=True)
    time.sleep(60)
"""


def test_a_logbook_that_others_hold(tmp_path: Path) -> None:
    home = home_of_old(tmp_path, entries=0)
    logbook = home / "logbook.sqlite3"
    with app(tmp_path) as shown:
        calculates(shown)
        shown.send("\r")
        says(shown, "Kept at", "entry 1")
        with closing(sqlite3.connect(logbook, isolation_level=None)) as other:
            # Longer than is waited for: the sheet answers on meanwhile, and then says so.
            other.execute("BEGIN EXCLUSIVE")
            retypes(shown, 11)
            shown.send("\r")
            retypes(shown, 12)
            says(shown, "NOT KEPT", "in use by another program", "locked for 5 s", "try again")
            other.execute("COMMIT")
            # A moment, and the folder with it.
            folder = os.open(home, os.O_RDONLY)
            other.execute("BEGIN EXCLUSIVE")
            fcntl.flock(folder, fcntl.LOCK_SH)
            shown.send("\r")
            retypes(shown, 13)
            other.execute("COMMIT")
            os.close(folder)
        says(shown, "entry 2")
        command = [sys.executable, "-c", HOLDER, str(logbook)]
        with subprocess.Popen(command, stdout=subprocess.PIPE, env=clean_environ(tmp_path)) as holder:
            assert holder.stdout is not None
            assert holder.stdout.readline() == b"held\n"
            shown.send("\r")
            retypes(shown, 14)
            assert "entry 3" not in word(shown)
            holder.send_signal(signal.SIGKILL)
        says(shown, "entry 3")
        assert len(told(shown)) == 1
    assert pipes_kept(tmp_path) == ["10 C", "12 C", "13 C"]
    assert contents(home).keys() == {"settings.json", "draft.json", "logbook.sqlite3"}
