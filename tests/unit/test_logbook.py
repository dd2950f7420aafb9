"""The logbook: what it acknowledged is there, whatever happens to the program, the file and the disk."""

from __future__ import annotations

import json
import os
import sqlite3
import stat
import subprocess
import sys
import threading
from contextlib import closing
from dataclasses import replace
from datetime import UTC, datetime, timedelta, timezone
from pathlib import Path

import pytest

from bench import faults
from gaugeside.errors import Refusal
from gaugeside.logbook import Entry, Logbook, LogbookTrouble, NoSuchEntry
from gaugeside.logbook import damage as damage_module
from unit.ordinary_user import as_ordinary_user, reachable

MOMENT = datetime(2026, 3, 14, 9, 30, tzinfo=UTC)


def entry(note: str = "", **changes: object) -> Entry:
    """An invented calculation at MOMENT."""
    return replace(faults.invented_entry(note), **{"kept_at": MOMENT, **changes})  # type: ignore[arg-type]


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "data" / "logbook.sqlite3"


@pytest.fixture
def logbook(path: Path) -> Logbook:
    return Logbook(path)


def test_reading_an_absent_logbook_creates_nothing(logbook: Logbook, tmp_path: Path) -> None:
    assert logbook.entries() == []
    assert logbook.count() == 0
    for ask in (logbook.entry, logbook.delete, logbook.change):
        with pytest.raises(NoSuchEntry, match="no entry 1"):
            ask(1)
    assert list(tmp_path.iterdir()) == []


def test_everything_kept_comes_back(logbook: Logbook, path: Path) -> None:
    whole = entry(
        "door was open",
        options={"site_pressure": "640 m", "bare_pressure": "gauge"},
        findings={"superheat": {"value": 9.2, "unit": "K", "uncertainty": 1.4}, "glide": {"value": 7.9, "unit": "K"}},
        notes=["superheat is measured from the dew point"],
        cautions=["A2L"],
        program_version="0.1.0",
        library_version="CoolProp 8.0.0",
    )
    kept = logbook.keep(whole)
    assert not kept.already
    assert kept.entry == replace(whole, number=1)
    assert Logbook(path).entries() == [kept.entry]
    assert Logbook(path).entry(1) == kept.entry


def test_file_and_folder_are_the_owner_s_alone(logbook: Logbook, path: Path) -> None:
    before = os.umask(0)
    try:
        logbook.keep(entry())
    finally:
        os.umask(before)
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    assert stat.S_IMODE(path.parent.stat().st_mode) == 0o700
    assert [file.name for file in path.parent.iterdir()] == ["logbook.sqlite3"]


def test_an_existing_folder_is_not_changed(tmp_path: Path) -> None:
    tmp_path.chmod(0o755)
    Logbook(tmp_path / "logbook.sqlite3").keep(entry())
    assert stat.S_IMODE(tmp_path.stat().st_mode) == 0o755


def test_identical_within_ten_minutes_is_one(logbook: Logbook) -> None:
    first = logbook.keep(entry("a")).entry
    again = logbook.keep(entry("a", kept_at=MOMENT + timedelta(minutes=9, seconds=59)))
    assert again.already
    assert again.entry == first
    later = logbook.keep(entry("a", kept_at=MOMENT + timedelta(minutes=11)))
    assert not later.already
    assert logbook.count() == 2


@pytest.mark.parametrize(
    "change",
    [
        {"tag": "rack 3"},
        {"refrigerant": "R-448A"},
        {"check": "component"},
        {"readings": {"suction_pressure": "2.62 bar g", "suction_temperature": "28 F"}},
        {"options": {"site_pressure": "1600 m"}},
        {"values": {"suction_pressure": 363_000.0}},
        {"findings": {"superheat": {"value": 9.3, "unit": "K"}}},
    ],
    ids=lambda change: next(iter(change)),
)
def test_any_difference_makes_another_entry(logbook: Logbook, change: dict[str, object]) -> None:
    logbook.keep(entry())
    assert not logbook.keep(entry(**change)).already
    assert logbook.count() == 2


def test_last_digits_of_an_iteration_make_no_other_entry(logbook: Logbook) -> None:
    logbook.keep(entry())
    assert logbook.keep(entry(findings={"superheat": {"value": 9.2 + 1e-9, "unit": "K"}})).already


def test_newest_first_in_parts(logbook: Logbook) -> None:
    for day in (3, 1, 2):
        logbook.keep(entry(f"day {day}", kept_at=MOMENT + timedelta(days=day)))
    assert [found.note for found in logbook.entries()] == ["day 3", "day 2", "day 1"]
    assert [found.note for found in logbook.entries(limit=1, offset=1)] == ["day 2"]


def test_moments_are_kept_in_utc_and_need_a_zone(logbook: Logbook) -> None:
    summer = timezone(timedelta(hours=2))
    kept = logbook.keep(entry(kept_at=datetime(2026, 7, 1, 1, 0, tzinfo=summer)))
    assert logbook.entry(1).kept_at == kept.entry.kept_at == datetime(2026, 6, 30, 23, 0, tzinfo=UTC)
    with pytest.raises(ValueError, match="time zone"):
        logbook.keep(entry(kept_at=datetime(2026, 7, 1)))


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("", 2),
        ("r-454c", 1),
        ("R454C", 1),
        ("454 RACK", 1),
        ("component", 1),
        ("harbour", 2),
        ("harbour ammonia", 0),
        ("suction pressure", 1),
        ("psig", 1),
        ("9.2", 1),
        ("2026-03-14", 1),
        ("2026-03", 2),
        ("KÄLTE", 1),
        ("%", 0),
        ("_", 0),
        ("' OR 1=1 --", 0),
    ],
)
def test_every_word_of_the_filter_must_occur(logbook: Logbook, text: str, found: int) -> None:
    logbook.keep(entry("harbour store"))
    logbook.keep(
        entry(
            "Kälte, harbour",
            kept_at=MOMENT + timedelta(days=2),
            check="component",
            refrigerant="R-717",
            tag="chiller 1",
            readings={"inlet": "9.1 bar g, 68 C"},
            headline="heat rejected 21.4 kW",
        )
    )
    assert logbook.count(text) == found
    assert len(logbook.entries(text)) == found


def test_change_tag_and_note(logbook: Logbook) -> None:
    logbook.keep(entry("before"))
    changed = logbook.change(1, note="after")
    assert (changed.note, changed.tag) == ("after", "rack 2")
    assert logbook.change(1, tag="rack 9") == logbook.entry(1)
    assert (logbook.count("after"), logbook.count("before"), logbook.count("rack 9")) == (1, 0, 1)
    assert logbook.keep(entry("after", tag="rack 9")).already


def test_delete_and_put_back_under_the_same_number(logbook: Logbook) -> None:
    for note in ("a", "b", "c"):
        logbook.keep(entry(note))
    gone = logbook.delete(2)
    assert gone.note == "b"
    assert [found.note for found in logbook.entries()] == ["c", "a"]
    with pytest.raises(NoSuchEntry):
        logbook.delete(2)
    assert logbook.keep(entry("d")).entry.number == 4, "a number is never given twice"
    logbook.restore(gone)
    assert logbook.entry(2) == gone
    with pytest.raises(Refusal, match="Entry 2 is in the logbook already"):
        logbook.restore(gone)
    with pytest.raises(Refusal, match="never in the logbook"):
        logbook.restore(entry())
    assert logbook.count() == 4


def test_the_last_one_deleted_comes_back_with_its_number(logbook: Logbook) -> None:
    gone = logbook.delete(logbook.keep(entry("only")).entry.number or 0)
    assert logbook.keep(entry("next")).entry.number == 2
    logbook.restore(gone)
    assert logbook.entry(1).note == "only"


@pytest.mark.parametrize("number", [-1, 0, 7, 10**30])
def test_numbers_that_are_not_there(logbook: Logbook, number: int) -> None:
    logbook.keep(entry())
    with pytest.raises(NoSuchEntry):
        logbook.entry(number)


def test_control_characters_stay_out_and_lengths_are_bounded(logbook: Logbook) -> None:
    kept = logbook.keep(
        entry(
            "\x1b]52;c;eA==\x07[bold]x[/bold]\u202e\n" + "n" * 5000,
            tag="t" * 100,
            refrigerant="R-454C\x9b2J",
            readings={"suction_pressure": "38\x00 psig\ud800"},
        )
    ).entry
    found = logbook.entry(1)
    assert found == kept
    assert found.note.startswith("]52;c;eA==[bold]x[/bold] nnn")
    assert (len(found.note), len(found.tag)) == (2000, 60)
    assert found.refrigerant == "R-454C2J"
    assert found.readings["suction_pressure"] == "38 psig"


def test_a_result_that_is_no_number_is_refused(logbook: Logbook, path: Path) -> None:
    with pytest.raises(Refusal, match="not a finite number"):
        logbook.keep(entry(findings={"superheat": {"value": float("nan"), "unit": "K"}}))
    assert not path.exists()


def test_two_processes_keeping_at_once_lose_nothing(path: Path) -> None:
    keep_fifty = (
        "import sys; from pathlib import Path; from bench.faults import invented_entry; "
        "from gaugeside.logbook import Logbook; book = Logbook(Path(sys.argv[1]), busy_seconds=30); "
        "[print(book.keep(invented_entry(f'{sys.argv[2]} {n}')).entry.number) for n in range(50)]"
    )
    tests = str(Path(__file__).parent.parent)
    writers = [
        subprocess.Popen(
            [sys.executable, "-c", keep_fifty, str(path), name],
            stdout=subprocess.PIPE,
            env={**os.environ, "PYTHONPATH": tests},
        )
        for name in ("one", "two")
    ]
    numbers = [int(number) for writer in writers for number in writer.communicate(timeout=60)[0].split()]
    assert sorted(numbers) == list(range(1, 101))
    notes = {found.note for found in Logbook(path).entries(limit=-1)}
    assert notes == {f"{name} {n}" for name in ("one", "two") for n in range(50)}


def test_many_threads_share_one_logbook(logbook: Logbook) -> None:
    threads = [threading.Thread(target=logbook.keep, args=[entry(f"thread {n}")]) for n in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert logbook.count() == 8


def test_killed_writers_lose_nothing_acknowledged(tmp_path: Path) -> None:
    count = faults.kill_writers(tmp_path, rounds=4, seed=20260314)
    assert count.acknowledged > 8
    assert (count.lost, count.changed, count.damaged_files) == (0, 0, 0)


def test_locked_file_waits_then_says_so(path: Path) -> None:
    Logbook(path).keep(entry("first"))
    with closing(sqlite3.connect(path, isolation_level=None)) as other:
        other.execute("BEGIN EXCLUSIVE")
        with pytest.raises(LogbookTrouble, match=r"stayed locked for 0\.05 s") as trouble:
            Logbook(path, busy_seconds=0.05).keep(entry("second"))
        assert trouble.value.kind == "locked"
    assert [found.note for found in Logbook(path).entries()] == ["first"]
    assert [file.name for file in path.parent.iterdir()] == ["logbook.sqlite3"], "nothing is set aside"


def test_a_folder_held_by_others_waits_then_says_so(path: Path) -> None:
    book = Logbook(path, busy_seconds=0.05)
    book.keep(entry("first"))
    with damage_module.folder_held(path, 1, alone=True):
        for act in (book.entries, lambda: book.keep(entry("second"))):
            with pytest.raises(LogbookTrouble, match="stayed locked"):
                act()
    with damage_module.folder_held(path, 1):
        assert book.count() == 1


def test_a_lock_that_ends_in_time_is_waited_for(path: Path) -> None:
    Logbook(path).keep(entry("first"))
    other = sqlite3.connect(path, isolation_level=None, check_same_thread=False)
    other.execute("BEGIN EXCLUSIVE")
    release = threading.Timer(0.2, other.close)
    release.start()
    assert Logbook(path, busy_seconds=30).keep(entry("second")).entry.number == 2
    release.join()


def test_a_newer_file_is_refused_and_untouched(path: Path) -> None:
    book = Logbook(path)
    book.keep(entry())
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("PRAGMA user_version = 99")
    content = path.read_bytes()
    for act in (book.entries, book.count, lambda: book.keep(entry("x")), lambda: book.delete(1)):
        with pytest.raises(LogbookTrouble, match="newer version") as trouble:
            act()
        assert trouble.value.kind == "newer"
    assert path.read_bytes() == content


def test_the_database_of_another_program_is_refused_and_untouched(tmp_path: Path) -> None:
    path = tmp_path / "other.db"
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("PRAGMA journal_mode = WAL")
        connection.execute("CREATE TABLE stock (part TEXT)")
    content = path.read_bytes()
    for act in (Logbook(path).entries, lambda: Logbook(path).keep(entry())):
        with pytest.raises(LogbookTrouble, match="another program"):
            act()
    assert path.read_bytes() == content


def test_an_empty_file_is_an_empty_logbook(path: Path) -> None:
    path.parent.mkdir()
    path.touch()
    assert Logbook(path).entries() == []
    assert Logbook(path).keep(entry()).entry.number == 1


def test_a_garbage_file_is_set_aside_by_the_next_keep(path: Path) -> None:
    path.parent.mkdir()
    path.write_bytes(b"these are not the readings" * 400)
    (path.parent / "logbook.sqlite3-journal").write_bytes(b"old journal")
    book = Logbook(path)
    with pytest.raises(LogbookTrouble, match="damaged or not a logbook") as trouble:
        book.entries()
    assert trouble.value.kind == "damaged"
    assert path.read_bytes().startswith(b"these are not"), "reading alone changes nothing"
    assert book.keep(entry("after")).entry.number == 1
    (aside,) = path.parent.glob("logbook-damaged-*.sqlite3")
    assert aside.read_bytes() == b"these are not the readings" * 400
    assert book.messages == [
        f"Kept as entry 1. A new logbook is begun after the damaged one, set aside as {aside.name}."
    ]
    assert [found.note for found in Logbook(path).entries()] == ["after"]


def test_without_reading_first_the_keep_itself_sets_aside(path: Path) -> None:
    path.parent.mkdir()
    path.write_bytes(b"x" * 5000)
    book = Logbook(path)
    assert book.keep(entry("after")).entry.number == 1
    assert len(book.messages) == 1


def test_many_find_the_damage_at_once_and_one_sets_aside(path: Path) -> None:
    path.parent.mkdir()
    path.write_bytes(b"x" * 5000)
    books = [Logbook(path, busy_seconds=30) for _ in range(8)]
    threads = [threading.Thread(target=book.keep, args=[entry(f"thread {n}")]) for n, book in enumerate(books)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    (aside,) = path.parent.glob("logbook-damaged-*")
    assert aside.read_bytes() == b"x" * 5000
    assert len([message for book in books for message in book.messages]) == 1
    assert Logbook(path).count("thread") == 8


def test_a_document_named_by_mistake_is_never_set_aside(tmp_path: Path) -> None:
    document = tmp_path / "report.txt"
    document.write_text("visit of the cold store, page 1\n" * 50)
    book = Logbook(document)
    with pytest.raises(LogbookTrouble):
        book.entries()
    with pytest.raises(LogbookTrouble, match="left as it is"):
        book.keep(entry())
    assert document.read_text().startswith("visit of the cold store")
    assert [file.name for file in tmp_path.iterdir()] == ["report.txt"]


def test_what_a_truncated_file_still_holds_is_carried_over(path: Path) -> None:
    book = Logbook(path)
    keep_many(book, 60)
    size = path.stat().st_size
    with path.open("r+b") as file:
        file.truncate(size * 2 // 3 // 4096 * 4096)
    with pytest.raises(LogbookTrouble) as trouble:
        book.entries()
    assert trouble.value.kind == "damaged"
    fresh = book.keep(entry("after")).entry
    found = {kept.number: kept.note for kept in book.entries(limit=-1)}
    assert found.pop(fresh.number) == "after"
    (message,) = book.messages
    assert f"with {len(found)} entries of the damaged one" in message
    assert len(found) >= 30
    assert all(number and note == f"{number - 1} " + "n" * 600 for number, note in found.items())


def test_a_sound_file_put_there_meanwhile_is_not_set_aside(path: Path) -> None:
    path.parent.mkdir()
    path.write_bytes(b"x" * 5000)
    book = Logbook(path)
    with pytest.raises(LogbookTrouble):
        book.count()
    path.unlink()
    Logbook(path).keep(entry("another program's"))
    assert book.keep(entry("mine")).entry.number == 2
    assert book.messages == []
    assert damage_module.set_aside(path, damage_module.identity(path) or (0, 0), 1) is None


def test_read_only_folder_and_file(tmp_path: Path) -> None:
    with reachable(tmp_path) as home:
        path = home / "logbook.sqlite3"
        Logbook(path).keep(entry("first"))
        path.chmod(0o444)
        home.chmod(0o555)
        with as_ordinary_user(home):
            assert [found.note for found in Logbook(path).entries()] == ["first"]
            with pytest.raises(LogbookTrouble, match="read-only") as trouble:
                Logbook(path).keep(entry("second"))
            assert trouble.value.kind == "read-only"
            with pytest.raises(LogbookTrouble, match="permission denied"):
                Logbook(home / "none.sqlite3").keep(entry())
        assert [file.name for file in home.iterdir()] == ["logbook.sqlite3"]


def test_no_permission_to_read(tmp_path: Path) -> None:
    with reachable(tmp_path) as home:
        path = home / "logbook.sqlite3"
        Logbook(path).keep(entry("first"))
        path.chmod(0)
        with as_ordinary_user(home):
            for act in (Logbook(path).entries, lambda: Logbook(path).keep(entry("second"))):
                with pytest.raises(LogbookTrouble, match="no permission"):
                    act()


def test_the_folder_cannot_be_made(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("")
    path = tmp_path / "file" / "logbook.sqlite3"
    assert Logbook(path).entries() == []
    with pytest.raises(LogbookTrouble, match="cannot be created"):
        Logbook(path).keep(entry())


@pytest.mark.parametrize("make", [Path.mkdir, os.mkfifo], ids=["folder", "pipe"])
def test_not_a_file(tmp_path: Path, make: object) -> None:
    path = tmp_path / "logbook.sqlite3"
    make(path)  # type: ignore[operator]
    for act in (Logbook(path).entries, lambda: Logbook(path).keep(entry())):
        with pytest.raises(LogbookTrouble, match="not a file"):
            act()


def keep_many(book: Logbook, count: int) -> None:
    for number in range(count):
        book.keep(entry(f"{number} " + "n" * 600))


def test_a_path_with_control_characters_is_told_harmlessly(tmp_path: Path) -> None:
    path = tmp_path / "a\x1b[2J.sqlite3"
    path.mkdir()
    with pytest.raises(LogbookTrouble) as trouble:
        Logbook(path).entries()
    assert trouble.value.sentence().isprintable()


def test_a_kept_entry_outlasts_a_power_cut(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Write with the two settings under which an acknowledged entry is on the disk, its journal's end included.

    EXTRA is DELETE's only setting that syncs the folder after the journal is unlinked: SQLite, PRAGMA synchronous.
    """
    under: list[tuple[str, int]] = []

    class Watched(sqlite3.Connection):
        def execute(self, statement: str, *values: object) -> sqlite3.Cursor:  # type: ignore[override]
            if statement == "COMMIT" and self.total_changes:
                ((journal,),) = super().execute("PRAGMA journal_mode").fetchall()
                ((synchronous,),) = super().execute("PRAGMA synchronous").fetchall()
                under.append((journal, synchronous))
            return super().execute(statement, *values)  # type: ignore[arg-type]

    connect = sqlite3.connect
    monkeypatch.setattr(sqlite3, "connect", lambda *words, **options: connect(*words, factory=Watched, **options))
    book = Logbook(path)
    book.keep(entry("first"))
    book.change(1, note="changed")
    book.restore(book.delete(1))
    assert under == [("delete", 3)] * 4
    assert [file.name for file in path.parent.iterdir()] == ["logbook.sqlite3"]


def test_full_disk_keeps_what_was_there(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    book = Logbook(path)
    book.keep(entry("first"))
    connect = sqlite3.connect

    def on_a_full_disk(*arguments: object, **options: object) -> sqlite3.Connection:
        connection = connect(*arguments, **options)  # type: ignore[call-overload]
        connection.execute("PRAGMA max_page_count = 1")
        return connection  # type: ignore[no-any-return]

    with monkeypatch.context() as patch:
        patch.setattr(sqlite3, "connect", on_a_full_disk)
        with pytest.raises(LogbookTrouble, match="is full") as trouble:
            keep_many(book, 50)
    assert trouble.value.kind == "full"
    assert book.entries()[-1].note == "first"
    assert Logbook(path).keep(entry("later")).entry.number == book.count()


def test_entries_spoilt_by_other_hands_are_shown_as_far_as_they_go(path: Path) -> None:
    book = Logbook(path)
    book.keep(entry())
    spoilt = {
        "readings": "[" * 100_000,
        "findings": json.dumps(
            {"a": 1, "b": {"value": None}, "c": {"value": 1, "unit": "K\x1b[2J"}, "d": {"value": "wet"}}
        ),
        "si_values": '{"p": 1e999, "q": ' + "9" * 400 + "}",
        "notes": '["\\u001b[31mred", 5]',
        "kept_at": "yesterday",
        "tag": b"\xff\xfe",
        "headline": "x" * 1_000_000,
    }
    with closing(sqlite3.connect(path)) as connection, connection:
        for column, value in spoilt.items():
            connection.execute(f"UPDATE entries SET {column} = ?", [value])
    (found,) = book.entries()
    assert found.readings == {}
    assert found.findings == {"c": {"value": 1, "unit": "K[2J"}, "d": {"value": "wet"}}
    assert found.values == {}
    assert found.notes == ["[31mred"]
    assert found.tag == ""
    assert len(found.headline) == 500
    assert found.cautions == ["Part of this entry could not be read back and is left out."]
    assert book.delete(1) == found
    book.restore(found)
