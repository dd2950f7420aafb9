"""A logbook, a draft and settings of another hand: shown harmless on the screen and in the pipe, or left alone."""

from __future__ import annotations

import json
import random
import re
import sqlite3
from contextlib import closing
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import pytest

from app.sheets import sheet
from gaugeside.checks import CHECKS
from gaugeside.cli import main
from gaugeside.errors import Refusal
from gaugeside.logbook import Entry, Logbook, LogbookTrouble, schema
from gaugeside.logbook.entry import UNREADABLE
from terminal.harness import Terminal, app_command
from unit.hostile import EVIL, HOSTILE, TOML_FILES, obeyed

ENTRY = Entry(
    None, datetime(2026, 3, 14, 9, tzinfo=UTC), "superheat", "R-134a", readings={"suction_pressure": "2 bar g"},
    headline="superheat 5.0 K",
)  # fmt: skip


@pytest.fixture
def home(isolated: Path) -> Path:
    isolated.mkdir()
    return isolated


@pytest.mark.parametrize("text", HOSTILE.values(), ids=HOSTILE)
def test_tag_note_and_filter_come_back_harmless(text: str, home: Path, capfd: pytest.CaptureFixture[str]) -> None:
    book = Logbook(home / "logbook.sqlite3")
    kept = book.keep(replace(ENTRY, tag=text, note=text, headline=text, readings={text: text})).entry
    assert book.entries() == [kept]
    assert not obeyed(kept.tag + kept.note + kept.headline + "".join(kept.readings))
    assert len(kept.tag) <= 60
    assert len(kept.note) <= 2000
    assert isinstance(book.entries(text), list)
    assert book.change(1, tag="rack 2", note=text).note == kept.note
    assert main(["logbook", "list"]) == 0
    assert main(["logbook", "show", "1"]) == 0
    assert not obeyed(capfd.readouterr().out)


COLUMNS = ("kept_at", "check_name", "refrigerant", "tag", "note", "readings", "options", "si_values", "findings",
           "notes", "cautions", "headline", "program_version", "library_version", "likeness", "search")  # fmt: skip
REBUILT = {
    "a trigger that swallows": ["CREATE TRIGGER t BEFORE INSERT ON entries BEGIN SELECT RAISE(IGNORE); END"],
    "a trigger that empties": ["CREATE TRIGGER t AFTER INSERT ON entries BEGIN DELETE FROM entries; END"],
    "a trigger that fails": ["CREATE TRIGGER t BEFORE INSERT ON entries BEGIN SELECT RAISE(FAIL, 'no'); END"],
    "an endless view": [
        "ALTER TABLE entries RENAME TO hidden",
        "CREATE VIEW entries AS WITH RECURSIVE c(number) AS (SELECT 1 UNION ALL SELECT number + 1 FROM c) "
        f"SELECT c.number, {', '.join(COLUMNS)} FROM c, hidden",
    ],
    "a view of bytes": [
        "ALTER TABLE entries RENAME TO hidden",
        f"CREATE VIEW entries AS SELECT x'1b5b324a' AS number, {', '.join(COLUMNS)} FROM hidden",
    ],
    "a column less": ["ALTER TABLE entries DROP COLUMN note"],
    "a generated column": ["ALTER TABLE entries ADD COLUMN x TEXT AS (hex(zeroblob(400000000)))"],
    "another table": ["DROP TABLE entries", "CREATE TABLE Entries (number, kept_at)"],
    "no table": ["DROP TABLE entries"],
    "an index that computes": ["CREATE INDEX i ON entries (hex(zeroblob(1)))"],
}  # fmt: skip


@pytest.fixture
def book(home: Path) -> Logbook:
    made = Logbook(home / "logbook.sqlite3")
    made.keep(ENTRY)
    return made


@pytest.mark.parametrize("statements", REBUILT.values(), ids=REBUILT)
def test_a_rebuilt_logbook_is_refused_and_untouched(
    statements: list[str], book: Logbook, capfd: pytest.CaptureFixture[str]
) -> None:
    with closing(sqlite3.connect(book.path)) as connection, connection:
        for statement in statements:
            connection.execute(statement)
    before = book.path.read_bytes()
    for ask in (book.entries, book.count, lambda: book.entry(1), lambda: book.delete(1), lambda: book.keep(ENTRY),
                lambda: book.change(1, tag="x"), lambda: book.restore(replace(ENTRY, number=9))):  # fmt: skip
        with pytest.raises(LogbookTrouble, match="rebuilt by another program") as trouble:
            ask()  # type: ignore[operator]
        assert trouble.value.kind == "foreign"
    assert book.path.read_bytes() == before
    assert main(["logbook", "list"]) == 2
    assert main(["saturation", "R-134a", "5 C", "--keep"]) == 1
    assert "NOT KEPT" in capfd.readouterr().out


def spoil(path: Path, seed: int) -> None:
    """Write into a logbook what only other hands write."""
    chance = random.Random(seed)
    deep: Any = EVIL
    for _ in range(30):
        deep = {EVIL: [deep, "value"]}
    values = [
        EVIL, b"\xff\xfe\x00", 5, 1.5, "", "[" * 100_000, json.dumps({EVIL: EVIL}), json.dumps([EVIL, 5, None, deep]),
        json.dumps({"superheat": {"value": 1e308, "unit": EVIL}, "x": {"value": EVIL}}), "9" * 5000, "x" * 1_000_000,
        json.dumps({"suction_pressure": EVIL, "suction_temperature": "9" * 400}), "\ufeff", "9999-12-31T23:59:59Z",
    ]  # fmt: skip
    with closing(sqlite3.connect(path)) as connection, connection:
        for number in range(2, 40):
            connection.execute(
                f"INSERT INTO entries (number, {', '.join(COLUMNS)}) VALUES (?{', ?' * len(COLUMNS)})",
                [number, *(chance.choice(values) for _ in COLUMNS)],
            )
        connection.execute(f"INSERT INTO entries SELECT {2**63 - 2}, {', '.join(COLUMNS)} FROM entries LIMIT 1")
        connection.execute("UPDATE entries SET check_name = 'superheat', refrigerant = 'R-134a' WHERE number < 6")


def test_rows_of_another_hand_are_shown_harmless(book: Logbook, capfd: pytest.CaptureFixture[str]) -> None:
    spoil(book.path, 1)
    found = book.entries(limit=10**30)
    assert len(found) == 40
    for entry in found:
        assert not obeyed(repr(entry.readings).replace("\\n", "") + entry.tag + entry.note + entry.headline)
        assert entry.number is not None
        assert main(["logbook", "show", str(entry.number)]) == 0
        assert main(["logbook", "show", str(entry.number), "--json"]) == 0
    assert main(["logbook", "list", "--most", "9" * 40]) == 0
    out, err = capfd.readouterr()
    assert not obeyed(out)
    assert err == ""
    for number in (2, 3, 4):
        book.restore(book.delete(number))
    assert book.keep(replace(ENTRY, note="mine")).entry.number == 40


@pytest.mark.parametrize(
    ("numbers", "given"),
    [
        ([2**63 - 1], [2, 3, 4]),
        ([2**63 - 1, 7], [8, 9, 10]),
        ([-5, 10**9], [2, 3, 4]),
        ([999_999_997], [999_999_998, 999_999_999, 999_999_996]),
        ([999_999_999, 999_999_998], [999_999_997, 999_999_996, 999_999_995]),
    ],
)
@pytest.mark.parametrize("stays", [True, False])
def test_a_large_number_of_another_hand_leaves_numbers_for_mine(
    numbers: list[int], given: list[int], stays: bool, book: Logbook
) -> None:
    """One that was taken out again still counts as given, but for those beyond the numbers given here."""
    with closing(sqlite3.connect(book.path)) as connection, connection:
        for number in numbers:
            connection.execute(f"INSERT INTO entries SELECT {number}, {', '.join(COLUMNS)} FROM entries LIMIT 1")
        if not stays:
            connection.execute("DELETE FROM entries WHERE number <> 1")
    before = book.entries()
    mine = [book.keep(replace(ENTRY, note=f"round {place}")).entry for place in range(3)]
    fresh = [entry.number for entry in mine]
    assert len({1, *fresh}) == 4
    if stays:
        assert fresh == given
    assert sorted(map(repr, book.entries())) == sorted(map(repr, [*before, *mine]))


def test_the_number_of_a_deleted_entry_is_not_given_again_beside_a_large_one(book: Logbook) -> None:
    with closing(sqlite3.connect(book.path)) as connection, connection:
        connection.execute(f"INSERT INTO entries SELECT {2**63 - 1}, {', '.join(COLUMNS)} FROM entries LIMIT 1")
    deleted = book.keep(replace(ENTRY, note="deleted")).entry
    assert deleted.number == 2
    book.delete(2)
    assert book.keep(replace(ENTRY, note="after")).entry.number == 3
    book.restore(deleted)
    assert book.entry(2) == deleted


@pytest.mark.parametrize("spoilt", ["'many'", "NULL", "-3", "x'00'", "1e300"])
def test_a_spoilt_count_of_numbers_is_made_good(spoilt: str, book: Logbook) -> None:
    with closing(sqlite3.connect(book.path)) as connection, connection:
        connection.execute(f"UPDATE sqlite_sequence SET seq = {spoilt}")
    assert [book.keep(replace(ENTRY, note=note)).entry.number for note in "ab"] == [2, 3]


@pytest.mark.parametrize("column", COLUMNS)
def test_a_value_too_large_to_read_is_left_out_and_the_rest_is_there(
    column: str, book: Logbook, capfd: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    for note in ("first round", "second round"):
        book.keep(replace(ENTRY, tag="rack 2", note=note))
    before = book.entries()
    monkeypatch.setattr(schema, "LARGEST_VALUE", 100_000)
    with closing(sqlite3.connect(book.path)) as connection, connection:
        connection.execute(f"UPDATE entries SET {column} = ? WHERE number = 2", ["x" * 150_000])
    found = {entry.number: entry for entry in book.entries()}
    assert book.count() == len(found) == 3
    assert [found[3], found[1]] == [before[0], before[2]]
    # What search and likeness hold is not shown, so nothing of the entry is missing without them.
    assert (UNREADABLE in found[2].cautions) == (column not in ("likeness", "search"))
    assert replace(found[2], **{"cautions": [], **whole(before[1], column)}) == before[1]
    assert book.entry(2) == found[2]
    assert [entry.number for entry in book.entries(limit=1, offset=1)] == [3 if column == "kept_at" else 2]
    assert {entry.number for entry in book.entries("rack round")} == {2, 3}
    assert (book.count("rack round"), book.count("rack second")) == (2, 1)
    assert main(["logbook", "list"]) == 0
    assert main(["logbook", "show", "2"]) == 0
    assert (UNREADABLE in capfd.readouterr().out) == (column not in ("likeness", "search"))
    assert book.keep(replace(ENTRY, note="mine")).entry.number == 4


def whole(entry: Entry, column: str) -> dict[str, Any]:
    """Return what an entry has of the one column, under the name of its part."""
    name = {"check_name": "check", "si_values": "values"}.get(column, column)
    return {name: getattr(entry, name)} if hasattr(entry, name) else {}


@pytest.mark.parametrize("column", ["note", "headline", "kept_at"])
def test_what_is_too_large_to_read_is_not_lost_by_a_change(
    column: str, book: Logbook, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(schema, "LARGEST_VALUE", 100_000)
    with closing(sqlite3.connect(book.path)) as connection, connection:
        connection.execute(f"UPDATE entries SET {column} = ?", ["x" * 150_000])
    before = book.path.read_bytes()
    with pytest.raises(Refusal, match="Entry 1 cannot be changed: a part of it is larger"):
        book.change(1, tag="rack 2", note=book.entry(1).note)
    assert book.path.read_bytes() == before


# The screen

_OF_THE_PROGRAM = re.compile(rb"\x1b(?:\[[0-9;]*[HmCKJ]|\[\?[0-9;]+(?:[hl]|\$p)|\[[<>=][0-9;]*u)")


async def test_a_draft_of_another_hand_opens(home: Path) -> None:
    odd = {"texts": {"suction_pressure": EVIL}, "units": {EVIL: {EVIL: EVIL}}}
    forms: dict[str, Any] = dict.fromkeys(CHECKS, odd)
    forms |= {"machine": 5, "stream": {"texts": [EVIL], "units": 7}, EVIL: deep_list(15)}
    odd_units = {"inlet": {"pressure": EVIL, "temperature": 5}}
    forms["component"] = {"texts": {"inlet": [1, {}], "kind": EVIL}, "units": odd_units}
    (home / "draft.json").write_text(json.dumps({"pane": [EVIL], "note": {EVIL: 1}, "forms": forms}))
    async with sheet() as s:
        for key in ("f2", "f3", "f4", "f5", "f12", "f7", "f6", "f9", "f9", "f1"):
            await s.press(key)
            assert not obeyed(s.text())
        await s.press("f1", "f3")
        await s.type("2 bar g")


def deep_list(levels: int) -> list[Any]:
    made: list[Any] = []
    for _ in range(levels):
        made = [made]
    return made


def test_no_byte_that_a_terminal_obeys_comes_from_stored_or_pasted_text(home: Path, book: Logbook) -> None:
    spoil(book.path, 2)
    with closing(sqlite3.connect(book.path)) as connection, connection:
        for column in COLUMNS[3:]:
            connection.execute(f"UPDATE entries SET {column} = ? WHERE number = 3", [EVIL])
        connection.execute("UPDATE entries SET kept_at = '9998-01-01T00:00:00Z' WHERE number = 3")
    settings = dict.fromkeys(["tag", "site_pressure_text", "refrigerant", "theme"], EVIL[:50])
    (home / "settings.json").write_text(json.dumps({**settings, "site_pressure_from": "altitude", EVIL: 1}))
    for name in ("refrigerants.toml", "compressors.toml"):
        (home / name).write_bytes(TOML_FILES["evil"])
    (home / "themes").mkdir()
    (home / "themes" / "\x1b[31m\u202ex.toml").write_text(f"name = {json.dumps(EVIL)}")
    with Terminal(app_command(), home.parent) as terminal:
        terminal.wait_for("suction pressure")
        terminal.send("\x1b[200~1\x07\x0e\x9b31m[b]\u202e\u2066\x7f5 bar\x1b[201~")
        terminal.wait_for("? not understood")
        for key in ("\x1bOP", "\x1bOP", "\x1b[17~", "\x1b[20~", "\x1b[20~", *["\x1b[B"] * 4, *["\x1b[A"] * 4, "\r",
                    "\x1b[18~", "\x1b[19~", "\x1b[200~\x9b\x0e\x1b[201~", "\x1b[19~"):  # fmt: skip
            terminal.send(key)
            terminal.settle(0.1)
        sent = _OF_THE_PROGRAM.sub(b"", bytes(terminal.raw)).decode()
        assert not obeyed(sent.replace("\r\n", "\n")), sorted(set(obeyed(sent)))
        assert "OWNED" in sent, "the hostile text was on the screen"
        used = re.search(r"VmHWM:\s+(\d+) kB", Path(f"/proc/{terminal.process.pid}/status").read_text())
        assert used is not None
        assert int(used[1]) < 250_000
        terminal.send("\x1b[21~")
        assert terminal.wait_end() == 0
    assert not (home.parent / "owned").exists()
