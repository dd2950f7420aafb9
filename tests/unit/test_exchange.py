"""The logbook goes out whole and comes in whole: nothing twice, nothing halved, nothing another hand slipped in."""

from __future__ import annotations

import csv
import io
import itertools
import json
import os
import signal
import sqlite3
import stat
import subprocess
import sys
import time
from contextlib import closing
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

import pytest

from bench import faults
from gaugeside.cli import main
from gaugeside.errors import Refusal
from gaugeside.logbook import Entry, Logbook
from gaugeside.logbook.exchange import entry_json, json_lines, read_document
from terminal.harness import clean_environ
from unit.hostile import HOSTILE, JSON_FILES, is_sentence, obeyed

MOMENT = datetime(2026, 3, 14, 9, 30, tzinfo=UTC)


def invented(note: str = "", hours: float = 0, **changes: object) -> Entry:
    """An entry of an invented machine, some hours after MOMENT."""
    at = MOMENT + timedelta(hours=hours)
    return replace(faults.invented_entry(note), **{"kept_at": at, **changes})  # type: ignore[arg-type]


def machine(note: str, hours: float, **changes: object) -> Entry:
    """The sheet of an invented machine."""
    findings = {"heat_absorbed": {"value": 2e4, "unit": "W"}, "heat_rejected": {"value": 26e3, "unit": "W"}}
    return invented(note, hours, check="machine", findings=findings, **changes)


def upper_stage(note: str, hours: float, below: str, number: int | None = None) -> Entry:
    """The sheet of an invented machine that names another sheet as its stage below."""
    return machine(
        note, hours, number=number, readings={"suction_pressure": "38 psig", "stage_below": below},
        values={"suction_pressure": 363_300.0, "stage_below.entry": float(below)},
    )  # fmt: skip


@pytest.fixture
def book(isolated: Path) -> Logbook:
    return Logbook(isolated / "logbook.sqlite3")


@pytest.fixture
def filled(book: Logbook) -> Logbook:
    book.keep(invented("newest", 5, tag="north rack"))
    book.keep(invented("oldest", 0, cautions=["A2L: burns."], notes=["n"], options={"datum": "iir"}))
    book.keep(machine("between", 2))
    return book


def document(*entries: Entry, **changes: object) -> str:
    """What an export of these entries holds."""
    text = "\n".join(json_lines(entries))
    return json.dumps({**json.loads(text), **changes}) if changes else text


def took(folder: Path, text: str | bytes, capfd: pytest.CaptureFixture[str], *words: str) -> tuple[int, str, str]:
    """Take a file of this content in; return the status, what was said and what was complained of."""
    path = folder / "taken.json"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    capfd.readouterr()
    status = main(["logbook", "import", str(path), *words])
    out, err = capfd.readouterr()
    assert "Traceback" not in err
    return status, out, err


def without_numbers(text: str) -> list[dict[str, Any]]:
    return [{**entry, "number": None} for entry in json.loads(text)["entries"]]


# Out


def test_export_is_every_field_oldest_first(filled: Logbook, capfd: pytest.CaptureFixture[str]) -> None:
    assert main(["logbook", "export"]) == 0
    out, err = capfd.readouterr()
    found = json.loads(out)
    assert err == ""
    assert out.isascii()
    assert {name: found[name] for name in found if name != "entries"} == {"format": "gaugeside logbook", "version": 1}
    assert [entry["note"] for entry in found["entries"]] == ["oldest", "between", "newest"]
    oldest = found["entries"][0]
    kept = filled.entry(2)
    assert oldest["number"] == 2
    assert oldest["kept_at"] == "2026-03-14T09:30:00+00:00"
    for name in ("check", "refrigerant", "tag", "note", "readings", "options", "values", "findings", "notes",
                 "cautions", "headline", "program_version", "library_version"):  # fmt: skip
        assert oldest[name] == getattr(kept, name)
    assert main(["logbook", "export", "RACK", "North"]) == 0
    assert [entry["note"] for entry in json.loads(capfd.readouterr().out)["entries"]] == ["newest"]


def test_an_empty_logbook_goes_out_empty_and_nothing_is_made(isolated: Path, capfd: pytest.CaptureFixture[str]) -> None:
    assert main(["logbook", "export"]) == 0
    assert json.loads(capfd.readouterr().out)["entries"] == []
    assert main(["logbook", "export", "--csv"]) == 0
    assert (
        capfd.readouterr().out
        == "number,kept_at,check,refrigerant,tag,note,headline,site,site pressure [Pa],datum,cautions\n"
    )
    assert not isolated.exists()


def test_many_entries_go_out_each_once(book: Logbook, capfd: pytest.CaptureFixture[str]) -> None:
    for number in range(120):
        book.keep(invented(f"{number}", hours=120 - number))
    assert main(["logbook", "export"]) == 0
    found = json.loads(capfd.readouterr().out)["entries"]
    assert [entry["note"] for entry in found] == [str(number) for number in reversed(range(120))]


def test_csv_has_a_column_for_every_reading_and_finding(filled: Logbook, capfd: pytest.CaptureFixture[str]) -> None:
    filled.keep(invented("more", 9, readings={"reading": "-5 °C"}, findings={"glide": {"value": 7.5, "unit": "K"}}))
    assert main(["logbook", "export", "--csv"]) == 0
    rows = list(csv.DictReader(io.StringIO(capfd.readouterr().out)))
    assert list(rows[0]) == [
        "number", "kept_at", "check", "refrigerant", "tag", "note", "headline", "site", "site pressure [Pa]", "datum",
        "suction pressure", "suction temperature", "reading", "superheat [K]", "heat absorbed [W]",
        "heat rejected [W]", "glide [K]", "cautions",
    ]  # fmt: skip
    assert [row["note"] for row in rows] == ["oldest", "between", "newest", "more"]
    assert rows[0]["suction pressure"] == "38 psig"
    assert float(rows[0]["superheat [K]"]) == 9.2
    assert rows[0]["cautions"] == "A2L: burns."
    assert (rows[1]["superheat [K]"], float(rows[1]["heat absorbed [W]"])) == ("", 2e4)
    assert (rows[3]["reading"], rows[3]["suction pressure"]) == ("-5 °C", "")


# What a spreadsheet takes for a formula: its first character, as OWASP's page "CSV Injection" lists them.
@pytest.mark.parametrize("text", ["=1+1", "+1+1", "-1+1", "@SUM(A1)", "-2+3+cmd|' /C calc'!A0", "＝1+1", " =1", "\t=1"])
def test_no_cell_of_the_csv_is_a_formula(text: str, book: Logbook, capfd: pytest.CaptureFixture[str]) -> None:
    evil = {text: {"value": text, "unit": text}}
    book.keep(invented(text, tag=text, readings={text: text}, findings=evil, cautions=[text], headline=text))
    assert main(["logbook", "export", "--csv"]) == 0
    (header, row) = csv.reader(io.StringIO(capfd.readouterr().out))
    cells = [one for one in header + row if text.strip() in one]
    assert len(cells) == 8
    assert all(one.startswith("'") for one in cells)


@pytest.mark.parametrize("text", ["-5", "-5 °C", "-0,3 bar g", "-10 C, x 0.3", "+3 K", "−5 C"])
def test_a_reading_below_zero_is_no_formula(text: str, book: Logbook, capfd: pytest.CaptureFixture[str]) -> None:
    book.keep(invented(readings={"reading": text}))
    assert main(["logbook", "export", "--csv"]) == 0
    assert next(csv.DictReader(io.StringIO(capfd.readouterr().out)))["reading"] == text


@pytest.mark.parametrize("option", [[], ["--csv"]])
def test_a_file_is_the_owner_s_alone_and_what_is_there_is_left(
    option: list[str], filled: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "out.txt"
    before = os.umask(0)
    try:
        assert main(["logbook", "export", "--to", str(path), *option]) == 0
    finally:
        os.umask(before)
    assert capfd.readouterr() == ("", "")
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    assert main(["logbook", "export", *option]) == 0
    assert path.read_text() == capfd.readouterr().out
    path.write_text("mine")
    assert main(["logbook", "export", "--to", str(path), *option]) == 2
    assert "is there already. Name another file, or add --replace." in capfd.readouterr().err
    assert path.read_text() == "mine"
    assert main(["logbook", "export", "--to", str(path), "--replace", *option]) == 0
    assert path.read_text() != "mine"
    assert [file.name for file in tmp_path.iterdir()] == ["out.txt"]


def test_only_a_file_s_place_is_written(filled: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    there = tmp_path / "there"
    there.write_text("mine")
    (tmp_path / "link").symlink_to(there)
    (tmp_path / "dangling").symlink_to(tmp_path / "made")
    (tmp_path / "loop").symlink_to(tmp_path / "loop")
    (tmp_path / "folder").mkdir()
    os.mkfifo(tmp_path / "pipe")
    for name in ("link", "dangling", "loop", "folder", "pipe", "/dev/null", "there/in", "no/folder", "x" * 300, ""):
        for more in ([], ["--replace"]):
            assert main(["logbook", "export", "--to", str(tmp_path / name), *more]) == 2, name
            out, err = capfd.readouterr()
            assert out == ""
            assert is_sentence(err.strip()), err
    assert main(["logbook", "export", "--to", str(filled.path), "--replace"]) == 2
    assert "is the logbook itself" in capfd.readouterr().err
    assert filled.count() == 3
    assert there.read_text() == "mine"
    assert not (tmp_path / "made").exists()
    assert not [file for file in tmp_path.iterdir() if file.name.startswith(".")]


# In


def test_out_and_in_again_is_the_same_but_for_the_numbers(
    filled: Logbook, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    assert main(["logbook", "export"]) == 0
    before = capfd.readouterr().out
    # Into the logbook it comes from, nothing is new.
    assert took(tmp_path, before, capfd)[:2] == (0, "0 entries taken, 3 were there already, 0 refused.\n")
    monkeypatch.setenv("GAUGESIDE_HOME", str(tmp_path / "other"))
    assert took(tmp_path, before, capfd)[:2] == (0, "3 entries taken, 0 were there already, 0 refused.\n")
    assert main(["logbook", "export"]) == 0
    after = capfd.readouterr().out
    assert without_numbers(after) == without_numbers(before)
    assert [entry["number"] for entry in json.loads(after)["entries"]] == [1, 2, 3]
    assert took(tmp_path, after, capfd)[:2] == (0, "0 entries taken, 3 were there already, 0 refused.\n")
    assert Logbook(tmp_path / "other" / "logbook.sqlite3").entries("newest")[0].tag == "north rack", (
        "it is found by words"
    )
    assert stat.S_IMODE((tmp_path / "other" / "logbook.sqlite3").stat().st_mode) == 0o600


def test_only_what_is_new_is_taken(filled: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    known, other = filled.entry(1), invented("new", 7, number=1)
    later = replace(known, kept_at=known.kept_at + timedelta(seconds=1))
    status, out, _ = took(tmp_path, document(known, other, later, other), capfd)
    assert (status, out) == (0, "2 entries taken, 2 were there already, 0 refused.\n")
    assert filled.entry(4).note == "new"
    assert json.loads(took(tmp_path, document(invented("9", 9)), capfd, "--json")[1])["taken"] == 1


def test_standard_input_utf_16_and_a_link_are_taken(
    book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    # What some shells make of a redirected output.
    assert took(tmp_path, document(invented("a")).encode("utf-16"), capfd)[0] == 0
    (tmp_path / "link").symlink_to(tmp_path / "taken.json")
    assert main(["logbook", "import", str(tmp_path / "link")]) == 0
    done = subprocess.run(
        [sys.executable, "-m", "gaugeside", "logbook", "import", "-", "--logbook", str(book.path)],
        env=clean_environ(tmp_path), input=document(invented("a"), invented("b")).encode(), capture_output=True,
        check=False,
    )  # fmt: skip
    assert done.stdout == b"1 entry taken, 1 were there already, 0 refused.\n", done


def test_other_json_may_say_it_in_another_order(
    book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    found = json.loads(document(invented("a"), invented("b", 1)))
    text = json.dumps({"entries": found["entries"], "x": [1], "version": 1, "format": found["format"]}, indent=3)
    assert took(tmp_path, f"\ufeff  {text}\r\n\n", capfd)[1].startswith("2 entries taken")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("number,kept_at,check\n1,2026", "is the CSV of a logbook"), ("", "no JSON document"), ("[]", "no JSON"),
        ("{}", "does not name that format"), (document(invented(), format="other"), "does not name that format"),
        (document(invented(), version=2), "newer version of gaugeside, so nothing of it is taken"),
        (document(invented(), version="1"), "not say which version"), (document(invented(), version=True), "say which"),
        (document(invented(), entries={}), "has no list"), (document(invented(), entries=None), "has no list"),
        (document(invented())[:-3], "ends in the middle"),
        ('{"format": "gaugeside logbook", "version": 1}', "has no list of entries"),
        (document(invented()) + "x", "damaged (not readable as JSON) at line 3"),
        (document(invented()).replace('"note": ', '"note" '), "damaged (not readable as JSON) at line 2"),
        ('{"entries": ' + "[" * 100_000, "nested too deeply"), ('{"a": ' * 50_000, "nested too deeply"),
        ('{"entries": [' + "9" * 10_000, "damaged"), ('{"entries": ["' + "x" * 6_000_000 + '"]}', "more than an entry"),
        ('{"entries": [' + "1," * 100_001 + "1]}", "more than 100000 entries"),
        ("{" + '"":0,' * 21 + '"a": 1}', "more than 20 members"),
        (b"\xff\xfa{", "not UTF-8"),
    ],
)  # fmt: skip
def test_what_is_no_exported_logbook_is_refused_whole(
    text: str | bytes, words: str, book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    status, out, err = took(tmp_path, text, capfd)
    assert (status, out) == (2, "")
    assert words in err
    assert is_sentence(err.strip())
    assert not book.path.exists()


WRONG = {
    "kept_at": [None, 5, "", "yesterday", "2026-03-14T09:30:00", "0001-01-01T00:00:00Z", "9999-12-31T23:59:59Z", []],
    "check": [None, 5, "", " ", "x" * 61], "tag": [["rack"], "x" * 61], "note": [None, "x" * 2001],
    "headline": ["x" * 501, {}], "readings": [None, [], {"a": 5}, {"a": "x" * 501}, {"x" * 61: ""},
                                              {str(n): "" for n in range(201)}],
    "options": ["", {"a": None}], "values": [{"a": float("nan")}, {"a": 10**400}, {"a": float("inf")}, {"a": True},
                                             {"a": "5"}, 5],
    "findings": [{"a": {"value": 1, "unit": "K", "more": 1}},
                 {f"{n}": {"value": '"' * 500, "unit": '"' * 500, "uncertainty": '"' * 500} for n in range(200)},
                 {"a": 5}, {"a": {}}, {"a": {"value": float("-inf")}}, {"a": {"value": 1, "unit": []}}, []],
    "notes": ["n", [5], ["x" * 501], [""] * 201], "cautions": [{}, [None]], "program_version": [1],
}  # fmt: skip


def test_an_entry_that_is_not_sound_is_told_and_the_others_are_taken(
    book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    sound = entry_json(invented("sound"))
    bad = [{**sound, name: value} for name, values in WRONG.items() for value in values]
    bad += [{name: sound[name] for name in sound if name != "values"}, {**sound, "\x1b[2Jmore": 1}, [], None, "x"]
    status, out, err = took(tmp_path, document(entries=[*bad, sound], format="gaugeside logbook", version=1), capfd)
    assert (status, out) == (2, f"1 entry taken, 0 were there already, {len(bad)} refused.\n")
    told = err.splitlines()
    assert told[0] == "Entry 1 of the file: kept_at is no moment with its time zone."
    assert len(told) == 6
    assert told[-1] == f"And {len(bad) - 5} more."
    for one in bad:
        status, _, err = took(tmp_path, document(entries=[one], format="gaugeside logbook", version=1), capfd)
        assert status == 2
        assert is_sentence(err.strip()), err
    assert [entry.note for entry in book.entries()] == ["sound"]


@pytest.mark.parametrize("text", HOSTILE.values(), ids=HOSTILE)
def test_hostile_texts_come_in_harmless_or_not_at_all(
    text: str, book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    one = {**entry_json(invented()), "tag": text[:60], "note": text[:2000], "headline": text[:500]}
    cut = text[:50]
    one |= {"readings": {cut: cut}, "findings": {cut: {"value": cut, "unit": cut}}, "cautions": [cut], "check": cut}
    whole = {**one, "note": text, "kept_at": text}
    both = json.dumps({"format": "gaugeside logbook", "version": 1, "entries": [one, whole]})
    _, out, err = took(tmp_path, both, capfd)
    assert not obeyed(out + err)
    assert len(err) < 2000
    for words in (["list"], ["export"], ["export", "--csv"], ["show", "1"]):
        main(["logbook", *words])
        assert not obeyed(capfd.readouterr().out)
    assert not [path for path in tmp_path.rglob("*") if path.name == "owned"]


@pytest.mark.parametrize("content", JSON_FILES.values(), ids=JSON_FILES)
def test_files_of_any_content_are_refused_in_a_sentence(
    content: bytes, book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    status, out, err = took(tmp_path, content, capfd)
    assert (status, out) == (2, "")
    assert is_sentence(err.strip())
    assert not book.path.exists()


def test_what_is_no_file_is_not_waited_for(tmp_path: Path, capfd: pytest.CaptureFixture[str]) -> None:
    os.mkfifo(tmp_path / "pipe")
    (tmp_path / "zero").symlink_to("/dev/zero")
    (tmp_path / "loop").symlink_to(tmp_path / "loop")
    for name in ("pipe", "zero", "loop", ".", "absent", "a\x00b", "x" * 300, "../" * 50 + "absent"):
        assert main(["logbook", "import", str(tmp_path / name)]) == 2, name
        assert is_sentence(capfd.readouterr().err.strip())


def limited(home: Path, path: Path, limit: str, **options: Any) -> subprocess.CompletedProcess[bytes]:
    """Take a file in under a limit of the system."""
    code = f"import resource, sys; resource.setrlimit(*{limit}); from gaugeside.cli import main; sys.exit(main())"
    return subprocess.run(
        [sys.executable, "-c", code, "logbook", "import", str(path)], env=clean_environ(home), capture_output=True,
        timeout=60, check=False, **options,
    )  # fmt: skip


def test_no_file_takes_all_memory(tmp_path: Path) -> None:
    limit = "(resource.RLIMIT_AS, (600_000_000, 600_000_000))"
    path = tmp_path / "bomb"
    head = '{"format": "gaugeside logbook", "version": 1, "entries": ['
    for text in (head + "[" + "[]," * 9_000_000 + "[]]]}", head + "{}," * 9_000_000, head + '"' + "x" * 30_000_000,
                 " " * 51_000_000):  # fmt: skip
        path.write_text(text)
        done = limited(tmp_path, path, limit)
        assert done.returncode == 2, done.stderr[-500:]
        assert is_sentence(done.stderr.decode().strip())
    with open("/dev/zero", "rb") as endless:
        done = limited(tmp_path, Path("-"), limit, stdin=endless)
    assert b"larger than 50 MB. Export fewer entries at a time: " in done.stderr


# All or none

MANY = 3000


@pytest.fixture(scope="module")
def many(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("many") / "many.json"
    path.write_text(document(*(invented(f"note {n}", hours=n / 60, number=n) for n in range(1, MANY + 1))))
    return path


def test_a_full_disk_takes_none(many: Path, book: Logbook, tmp_path: Path) -> None:
    book.keep(invented("mine", -1))
    home = book.path.parent.parent
    done = limited(home, many, "(resource.RLIMIT_FSIZE, (500_000, 500_000))")
    assert done.returncode == 2
    assert done.stdout == b""
    assert is_sentence(done.stderr.decode().strip())
    assert [entry.note for entry in book.entries()] == ["mine"]
    done = limited(home, many, "(resource.RLIMIT_FSIZE, (-1, -1))")
    assert done.stdout == b"3000 entries taken, 0 were there already, 0 refused.\n", done.stderr


def test_a_kill_in_the_middle_leaves_all_or_none(many: Path, book: Logbook, tmp_path: Path) -> None:
    book.keep(invented("mine", -1))
    journal = Path(f"{book.path}-journal")
    command = [sys.executable, "-m", "gaugeside", "logbook", "import", str(many), "--logbook", str(book.path)]
    counts = []
    for seconds in (0, 0.01, 0.05, 0.1):
        with subprocess.Popen(command, env=clean_environ(tmp_path), stdout=subprocess.DEVNULL) as process:
            while not journal.exists() and process.poll() is None:
                time.sleep(0.001)
            time.sleep(seconds)
            process.send_signal(signal.SIGKILL)
        counts.append(book.count())
        with closing(sqlite3.connect(book.path)) as connection:
            assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
    assert set(counts) <= {1, MANY + 1}
    assert counts[0] == 1, "the first was killed at its first change"
    assert subprocess.run(command, env=clean_environ(tmp_path), capture_output=True, check=False).returncode == 0
    assert book.count() == MANY + 1


# An entry that names another one


def notes_by_number(book: Logbook) -> dict[int | None, str]:
    return {entry.number: entry.note for entry in book.entries()}


@pytest.mark.parametrize("newest_first", [False, True])
def test_a_stage_below_is_named_by_its_new_number(
    newest_first: bool, book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    for hours in range(4):
        book.keep(machine(f"in the way {hours}", hours))
    lower, upper = machine("lower", 10, number=2), upper_stage("upper", 11, below="2", number=3)
    top = upper_stage("top", 12, below="3", number=7)
    text = document(*([top, upper, lower] if newest_first else [lower, upper, top]))
    for _ in range(2):
        assert took(tmp_path, text, capfd)[0] == 0
        found = {entry.note: entry for entry in book.entries()}
        assert len(found) == 7
        assert found["upper"].readings["stage_below"] == str(found["lower"].number)
        assert found["upper"].values["stage_below.entry"] == found["lower"].number
        assert found["top"].readings["stage_below"] == str(found["upper"].number)
        assert found["lower"].number not in (1, 2, 3, 4)
        assert found["top"].cautions == []


def test_a_stage_below_that_stayed_behind_names_no_other_entry(
    book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    book.keep(machine("not meant", 0))
    upper = upper_stage("upper", 11, below="1", number=3)
    for times in (1, 0):
        assert took(tmp_path, document(upper), capfd)[1].startswith(f"{times} ")
    found = book.entry(2)
    assert found.readings["stage_below"] == "1 of another logbook"
    assert found.cautions == ["Its stage below is entry 1 of the logbook it was taken from, not of this one."]
    # Opened again, the sheet does not take it for entry 1 of this logbook.
    words = ["machine", "R-134a", "--suction-pressure", "1 bar g", "--stage-below", found.readings["stage_below"]]
    assert main(words) == 2
    assert "is not the number of a logbook entry" in capfd.readouterr().err


def test_an_upper_stage_alone_comes_back_to_its_own_logbook_as_known(
    book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    book.keep(machine("lower", 0))
    book.keep(upper_stage("upper", 1, below="1"))
    assert main(["logbook", "export", "upper"]) == 0
    text = capfd.readouterr().out
    assert took(tmp_path, text, capfd)[1] == "0 entries taken, 1 were there already, 0 refused.\n"


def test_rings_and_numbers_that_come_twice_name_nothing(
    book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    ring = [upper_stage("a", 1, "2", number=1), upper_stage("b", 2, "1", number=2), upper_stage("c", 3, "3", number=3)]
    twice = [machine("d", 4, number=5), machine("e", 5, number=5), upper_stage("f", 6, "5", number=6)]
    assert took(tmp_path, document(*ring, *twice), capfd)[0] == 0
    found = {entry.note: entry for entry in book.entries()}
    assert len(found) == 6
    for note in ("c", "f"):
        assert found[note].readings["stage_below"].endswith("of another logbook")
        assert len(found[note].cautions) == 1
    named = {found[note].readings["stage_below"] for note in "ab"} - {"1 of another logbook", "2 of another logbook"}
    assert named <= {str(found["a"].number), str(found["b"].number)}


def test_a_long_chain_of_stages_is_put_in_its_order() -> None:
    from gaugeside.logbook.links import linked_first

    chain = [upper_stage(str(n), n, below=str(n - 1), number=n) for n in range(20_000, 1, -1)]
    assert [entry.number for entry in linked_first([*chain, machine("1", 0, number=1)])] == list(range(1, 20_001))


def test_read_document_is_the_one_door() -> None:
    whole = invented("whole", number=3)
    assert read_document(document(whole).encode()).entries == [whole]
    with pytest.raises(Refusal, match="no JSON document"):
        read_document(b"\x00")


def test_numbers_of_the_csv_have_no_digits_that_no_reading_has(
    book: Logbook, capfd: pytest.CaptureFixture[str]
) -> None:
    exact = {"superheat": 20 / 3, "heat absorbed": -12345678.9, "mass flow": 1 / 7e6, "share": 1, "region": "wet"}
    book.keep(invented("a", findings={name: {"value": value, "unit": ""} for name, value in exact.items()}))
    assert main(["logbook", "export", "--csv"]) == 0
    (row,) = csv.DictReader(io.StringIO(capfd.readouterr().out))
    # By hand, to seven digits.
    assert row["superheat"] == "6.666667"
    assert float(row["heat absorbed"]) == -12345680
    assert row["mass flow"] == "1.428571e-07"
    assert float(row["share"]) == 1
    assert row["region"] == "wet"
    assert main(["logbook", "export"]) == 0
    (entry,) = json.loads(capfd.readouterr().out)["entries"]
    assert {name: one["value"] for name, one in entry["findings"].items()} == exact


@pytest.mark.skipif(not hasattr(time, "tzset"), reason="the zone of a process is set so on POSIX systems alone")
def test_the_moment_of_the_csv_is_local_with_its_offset(
    book: Logbook, capfd: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    for month in (7, 12):
        moment = datetime(2026, month, 1, 19, 4, 14, 987654, tzinfo=UTC)
        book.keep(replace(invented(f"{month}"), kept_at=moment))
    # Central European rules: an hour ahead, two from the last Sunday of March to that of October.
    monkeypatch.setenv("TZ", "CET-1CEST,M3.5.0,M10.5.0/3")
    time.tzset()
    try:
        assert main(["logbook", "export", "--csv"]) == 0
        rows = list(csv.DictReader(io.StringIO(capfd.readouterr().out)))
        assert [row["kept_at"] for row in rows] == ["2026-07-01 21:04:14+02:00", "2026-12-01 20:04:14+01:00"]
    finally:
        monkeypatch.undo()
        time.tzset()


def test_gauge_readings_of_the_csv_can_be_worked_again(isolated: Path, capfd: pytest.CaptureFixture[str]) -> None:
    asked = ["superheat", "R-134a", "--suction-pressure", "2 bar g", "--suction-temperature", "5 C", "--keep"]
    assert main([*asked, "--altitude", "1600 m", "--datum", "ashrae"]) == 0
    capfd.readouterr()
    assert main(["logbook", "export", "--csv"]) == 0
    (row,) = csv.DictReader(io.StringIO(capfd.readouterr().out))
    # ISO 2533: 101325 Pa (1 - 2.25577e-5 * 1600)^5.25588.
    atmosphere = 101325 * (1 - 2.25577e-5 * 1600) ** 5.25588
    assert float(row["site pressure [Pa]"]) == pytest.approx(atmosphere, rel=1e-5)
    assert "1600" in row["site"]
    assert row["datum"] == "ashrae"
    again = [*asked[:-1], "--barometer", f"{row['site pressure [Pa]']} Pa", "--json"]
    assert main(again) == 0
    found = json.loads(capfd.readouterr().out)["findings"]["superheat"]["value"]
    assert float(row["superheat [K]"]) == pytest.approx(found, abs=1e-3)


def test_an_entry_that_says_no_site_has_blank_cells_for_it(book: Logbook, capfd: pytest.CaptureFixture[str]) -> None:
    book.keep(invented("a", options={}))
    book.keep(invented("b", hours=1, options={"site pressure": "=1+1", "datum": "iir"}))
    assert main(["logbook", "export", "--csv"]) == 0
    first, second = csv.DictReader(io.StringIO(capfd.readouterr().out))
    assert (first["site"], first["site pressure [Pa]"], first["datum"]) == ("", "", "")
    assert (second["site pressure [Pa]"], second["datum"]) == ("'=1+1", "iir")


def test_the_columns_of_a_list_stand_where_they_are_whatever_an_entry_lacks(
    book: Logbook, capfd: pytest.CaptureFixture[str]
) -> None:
    book.keep(invented("", hours=1, tag="", headline="superheat 5.0 K"))
    book.keep(invented("door open", hours=2, tag="rack 2", headline="superheat 12.0 K"))
    book.keep(invented("by night", hours=3, check="stream", refrigerant="", tag="", headline="heat absorbed 3.1 kW"))
    book.keep(invented("long", hours=4, tag="t" * 60, headline="h" * 300))
    assert main(["logbook", "list"]) == 0
    long, stream, rack, bare = capfd.readouterr().out.splitlines()
    tag, headline, note = rack.index("rack 2"), rack.index("superheat 12"), rack.index("door open")
    assert bare[tag:].split() == ["-", "superheat", "5.0", "K", "-"]
    assert (bare[headline:note].strip(), bare[note:]) == ("superheat 5.0 K", "-")
    assert stream[:tag].split()[-2:] == ["stream", "-"]
    assert (stream[tag:headline].strip(), stream[headline:note].strip()) == ("-", "heat absorbed 3.1 kW")
    assert stream[note:] == "by night"
    # One long text is written out and moves no other line.
    assert "t" * 60 in long
    assert long.endswith(f"{'h' * 300}  long")
    assert max(map(len, (stream, rack, bare))) < 140


@pytest.mark.parametrize("order", list(itertools.permutations("abc")))
def test_an_entry_with_two_links_waits_for_both(
    order: tuple[str, ...], book: Logbook, tmp_path: Path, capfd: pytest.CaptureFixture[str]
) -> None:
    book.keep(machine("in the way", 0))
    both = machine("c", 3, number=3, readings={"one": "1", "other": "2"}, values={"one.entry": 1.0, "other.entry": 2.0})
    found = {"a": machine("a", 1, number=1), "b": machine("b", 2, number=2), "c": both}
    assert took(tmp_path, document(*(found[note] for note in order)), capfd)[0] == 0
    here = {entry.note: entry for entry in book.entries()}
    assert here["c"].readings == {"one": str(here["a"].number), "other": str(here["b"].number)}
    assert here["c"].cautions == []


@pytest.mark.parametrize("option", [[], ["--csv"], ["--to", "out"]])
def test_a_part_that_could_not_be_read_is_told_where_it_is_missing(
    option: list[str], filled: Logbook, tmp_path: Path, monkeypatch: pytest.MonkeyPatch,
    capfd: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    monkeypatch.chdir(tmp_path)
    with closing(sqlite3.connect(filled.path)) as connection, connection:
        connection.execute("UPDATE entries SET findings = '{' WHERE number IN (1, 3)")
    assert main(["logbook", "export", *option]) == 0
    assert capfd.readouterr().err == "Of entries 1, 3 a part could not be read and is left out.\n"
