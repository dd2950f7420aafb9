"""How it feels under the fingers: dialogs, keeping, drafts, refusals, themes; the helper answers all alike."""

from __future__ import annotations

import csv
import json
import os
import signal
import sqlite3
import stat
import sys
import threading
from contextlib import closing
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest
from textual.widgets import Input

from app.sheets import CANNED, Sheet, sheet
from gaugeside.app.frame import HIGH, MENU, PANES, WIDE, head_line, keys_line, rule_line, tabs_line, word_lines
from gaugeside.checks.sheet import Remark
from gaugeside.checks.view import FOOTNOTE
from gaugeside.logbook import Logbook
from gaugeside.quantities.site import SEA_LEVEL
from gaugeside.refrigerants import find
from gaugeside.settings import load_draft, places


def entries() -> list[dict[str, str]]:
    """Return the readings of every entry on the disk, newest first."""
    return [dict(entry.readings) for entry in Logbook(places().logbook_file).entries()]


async def kept(shown: Sheet, count: int) -> None:
    await shown.wait(lambda: len(entries()) == count, f"{count} entries on the disk")


async def test_the_refrigerant_is_picked_by_part_of_its_name() -> None:
    async with sheet("") as shown:
        assert "no refrigerant: F8" in shown.lines()[0]
        assert "Press F8" in shown.text()
        await shown.press("f8")
        await shown.type("1234ze")
        assert any(line.startswith("> R-1234ze(E)") for line in shown.lines())
        await shown.press("ctrl+u")
        await shown.type("propane\n")
        assert shown.lines()[0].startswith(" R-290  A3  pure")
        assert shown.focus == "suction_pressure"
    assert json.loads(places().settings_file.read_text())["refrigerant"] == "R-290"


async def test_the_picker_says_what_is_not_modelled_and_what_is_not_there() -> None:
    async with sheet("R-134a") as shown:
        await shown.press("f8")
        await shown.type("r-11")
        unmodelled = next((line for line in shown.lines() if "NOT MODELLED" in line), None)
        await shown.press("ctrl+u")
        await shown.type("r-999z")
        assert "No refrigerant of the catalogue" in shown.text()
        await shown.press("enter")
        assert "none; see the line below" in shown.text(), "Enter takes nothing"
        if unmodelled is not None:
            await shown.press("ctrl+u")
            await shown.type(unmodelled.split()[0].lstrip("> ") + "\n")
        await shown.press("f8")
        assert shown.lines()[0].startswith(" R-134a")


async def test_every_action_stands_in_the_menu_under_a_letter_of_its_own() -> None:
    letters = [letter for letter, _, _ in MENU]
    assert len(set(letters)) == len(letters)
    assert {action for _, _, action in MENU} >= {f"pane('{name}')" for name in PANES}
    async with sheet() as shown:
        await shown.press("ctrl+o")
        for letter, words, _ in MENU:
            assert f"  {letter}  {words}" in shown.lines()
        for letter, _, action in MENU:
            if action.startswith("pane("):
                await shown.press("ctrl+o", letter) if len(shown.app.screen_stack) == 1 else await shown.press(letter)
                await shown.wait(lambda action=action: action == f"pane('{shown.app.now}')", action)
        await shown.press("ctrl+o", "enter")
        assert len(shown.app.screen_stack) == 1
        await shown.press("ctrl+o", "h")
        await shown.see("How a reading is written")
        await shown.press("f1", "ctrl+o", "8")
        await shown.see("Pick the refrigerant")


async def test_the_menu_keeps_clears_deletes_and_brings_back() -> None:
    async with sheet() as shown:
        await shown.type("38 psig")
        await shown.wait(lambda: shown.pane("superheat").answer)
        await shown.press("ctrl+o", "k")
        await kept(shown, 1)
        await shown.press("ctrl+o", "c")
        await shown.wait(lambda: not any(shown.pane("superheat").texts().values()), "an empty form")
        await shown.press("f6")
        await shown.see("1 shown")
        await shown.press("ctrl+o", "d")
        await kept(shown, 0)
        await shown.press("ctrl+o", "u")
        await kept(shown, 1)


async def test_help_says_what_each_field_accepts() -> None:
    async with sheet() as shown:
        for name in ("saturation", "superheat", "component", "machine", "stream"):
            await shown.press(PANES[name].lower())
            check = shown.pane(name).check
            await shown.press("f1")
            text = " ".join(shown.text().split())
            for line in check.reading_lines():
                assert line.label in text
                assert " ".join(line.help.split()) in text
            assert "185 psig, 12,4 bar g, -5 °C, 23 inHg vac" in text
            assert max(len(line) for line in shown.lines()) <= WIDE
            await shown.press("space")
            assert len(shown.app.screen_stack) == 1


async def test_machine_and_note_go_with_what_is_kept_next() -> None:
    async with sheet() as shown:
        await shown.press("f9")
        await shown.type("rack 2\nsight glass clear\n")
        assert 'Kept next: machine rack 2; note "sight glass clear".' in shown.word
        assert "rack 2" in shown.lines()[0]
        await shown.type("38 psig\n")
        await kept(shown, 1)
        await shown.see("as entry 1 for rack 2")
        await shown.type("\t2 C\n")
        await kept(shown, 2)
    first, second = reversed(Logbook(places().logbook_file).entries())
    assert (first.tag, first.note) == ("rack 2", "sight glass clear")
    assert (second.tag, second.note) == ("rack 2", ""), "a note belongs to one entry, the machine to all that follow"


async def test_enter_twice_is_one_entry_and_says_so() -> None:
    async with sheet() as shown:
        await shown.type("38 psig\n")
        await shown.see("Kept at")
        await shown.press("enter")
        await shown.see("Already kept at")
        assert len(entries()) == 1
        # The same readings typed again within ten minutes are the same entry, too.
        await shown.press("backspace")
        await shown.type("g\n")
        await shown.see("Already kept at")
        assert len(entries()) == 1
        await shown.type("\t2 C\n")
        await kept(shown, 2)
    assert entries()[0] == {"suction_pressure": "38 psig", "suction_temperature": "2 C"}


async def test_keys_that_arrive_at_once_find_the_screen_as_the_one_before_left_it() -> None:
    async with sheet("") as shown:
        burst = "38 psig\t2 C\t14 bar g"
        await shown.press("f8", *"134a", "enter", *burst, "enter", "f6", "f9", *"rack 7", "enter", *"a note", "enter")
        await shown.see("note: a note")
        assert shown.app.base.query_one("#filter", Input).value == ""
    entry = Logbook(places().logbook_file).entries()[0]
    assert (entry.tag, entry.note, entry.refrigerant) == ("rack 7", "a note", "R-134a")
    assert entry.readings["suction_pressure"] == "38 psig"
    assert entry.readings["suction_temperature"] == "2 C"
    assert entry.readings["liquid_pressure"] == "14 bar g"


async def test_what_is_on_the_forms_comes_back() -> None:
    async with sheet() as shown:
        await shown.type("38 psig\t2,5 C\tnot yet a")
        await shown.press("f2")
        await shown.type("-0.5")
        await shown.press("f10")
    async with sheet() as shown:
        assert shown.app.now == "saturation"
        assert shown.pane("saturation").texts() == {"reading": "-0.5"}
        await shown.press("f3")
        texts = shown.pane("superheat").texts()
        assert (texts["suction_pressure"], texts["suction_temperature"]) == ("38 psig", "2,5 C")
        assert texts["liquid_pressure"] == "not yet a"


async def test_a_unit_typed_stays_the_fields_own() -> None:
    async with sheet() as shown:
        await shown.type("38 psig\t")
        field = shown.pane("superheat").query_one("#suction_pressure", Input)
        assert field.placeholder == "bar g"
        await shown.press("shift+tab", "ctrl+u")
        assert field.placeholder == "psi g"
        await shown.type("40")
        # 40 psi on 101.325 kPa: 275.79 kPa more (NIST SP 811: 6.894757 kPa a psi).
        assert "40 psi g = 2.76 bar g 3.77 bar abs" in shown.line("suction pressure")
    async with sheet() as shown:
        field = shown.pane("superheat").query_one("#suction_pressure", Input)
        assert field.placeholder == "psi g", "at the next start too"


async def test_refused_input_stays_and_says_field_reason_and_instead() -> None:
    async with sheet() as shown:
        await shown.type("38 psik")
        await shown.see("not understood")
        await shown.see("Did you mean")
        assert shown.word.startswith("suction pressure: 'psik' is not a unit of pressure known here.")
        # What was told of "38 psi" is marked for as long as a unit may be half typed, then it goes.
        if shown.findings():
            assert shown.rule == "-- STILL OF THE READINGS BEFORE"
        await shown.wait(lambda: not shown.findings())
        assert shown.rule == ""
        await shown.type("\n")
        await shown.see("Not kept: ")
        await shown.type("\t1,234 kpa")
        assert shown.pane("superheat").texts()["suction_pressure"] == "38 psik"
        await shown.press("shift+tab", "end", "backspace")
        assert shown.pane("superheat").texts()["suction_pressure"] == "38 psi"
        await shown.see("suction pipe: ")
        assert entries() == []


@pytest.mark.parametrize(
    ("typed", "said"),
    [
        ("30 c", "suction pressure"),
        ("-2 bar g", "suction pressure"),
        ("40 inhg vac", "suction pressure"),
        ("[b]9[/b] bar", "suction pressure"),
        ("9" * 190 + " bar", "suction pressure"),
    ],
)
async def test_each_bad_pressure_is_refused_by_name(typed: str, said: str) -> None:
    async with sheet() as shown:
        await shown.type(typed)
        await shown.wait(lambda: shown.pane("superheat").refusal is not None, "a refusal")
        refusal = shown.pane("superheat").refusal
        assert refusal is not None
        assert refusal.message
        assert refusal.hint, "what to write instead"
        await shown.wait(lambda: shown.word[:60] == f"{said}: {refusal.sentence()}"[:60], "field and sentence")
        assert shown.pane("superheat").texts()["suction_pressure"] == typed


async def test_open_back_delete_and_undo() -> None:
    async with sheet() as shown:
        await shown.type("38 psig\t2 C\n")
        await kept(shown, 1)
        await shown.press("ctrl+o", "c")
        await shown.press("f8", *"290", "enter", "f6")
        await shown.see("1 shown")
        await shown.press("delete")
        await shown.see("Entry 1 is deleted; Ctrl+Z brings it back.")
        await kept(shown, 0)
        await shown.press("delete")
        await shown.see("There is no entry to delete.")
        await shown.press("ctrl+z")
        await shown.see("Entry 1 is back.")
        await shown.press("ctrl+z")
        await shown.see("Nothing was deleted since the start.")
        await shown.press("enter")
        await shown.wait(lambda: shown.app.now == "superheat")
        await shown.see("Entry 1 with its readings.")
        assert shown.lines()[0].startswith(" R-134a"), "with its own refrigerant"
        assert shown.pane("superheat").texts()["suction_temperature"] == "2 C"
    assert json.loads(places().settings_file.read_text())["refrigerant"] == "R-134a"


async def test_an_entry_from_another_site_says_so() -> None:
    async with sheet() as shown:
        await shown.type("38 psig\n")
        await kept(shown, 1)
        await shown.press("f7")
        await shown.type("640 m")
        await shown.press("f6", "enter")
        await shown.see("Entry 1 with its readings.")
        assert "The site was then: standard atmosphere at sea level; now: altitude 640 m" in shown.word


async def test_a_locked_logbook_never_stops_the_screen() -> None:
    async with sheet() as shown:
        await shown.type("38 psig\n")
        await kept(shown, 1)
        with closing(sqlite3.connect(places().logbook_file, isolation_level=None)) as other:
            other.execute("BEGIN EXCLUSIVE")
            await shown.type("\t2 C\n")
            await shown.type("\t14 bar g")
            assert "14.00 bar g" in shown.line("liquid pressure"), "typing goes on while the logbook waits"
            other.execute("ROLLBACK")
        await kept(shown, 2)


async def test_a_logbook_that_cannot_be_written_is_told() -> None:
    where = places()
    where.logbook_file.mkdir(parents=True)
    async with sheet() as shown:
        await shown.type("38 psig\n")
        await shown.see("NOT KEPT: ")
        assert shown.pane("superheat").texts()["suction_pressure"] == "38 psig"


async def test_every_theme_can_be_chosen_and_is_remembered() -> None:
    async with sheet() as shown:
        names = list(shown.app.themes)
        assert len(names) >= 4
        await shown.press("f7", "up")
        assert shown.focus == "theme"
        seen = []
        for _ in names:
            seen.append(shown.app.theme)
            await shown.press("right")
        assert sorted(seen) == sorted(names)
        await shown.press("right")
        chosen = shown.app.theme
    async with sheet() as shown:
        assert shown.app.theme == chosen


async def test_a_bad_theme_file_is_told_and_the_good_ones_are_there() -> None:
    folder = places().themes_folder
    folder.mkdir(parents=True)
    (folder / "bad.toml").write_text('name = "bad"\n[colours]\nprimary = "mauve-ish"\n')
    (folder / "worse.toml").write_text("\x00\x1b[2J")
    (folder / "own.toml").write_text('name = "own"\n[colours]\nprimary = "#00ff00"\n')
    async with sheet() as shown:
        assert "bad.toml is not used: it has a bad colour primary" in shown.word
        assert "(1 more: F1)" in shown.word
        assert "own" in shown.app.themes
        await shown.press("f1")
        assert "worse.toml is not used" in " ".join(shown.text().split())
        await shown.press("f1")
        await shown.type("3")
        assert "bad.toml" not in shown.word, "read once, it makes room"


async def test_a_damaged_draft_is_told_and_does_not_stop_the_start() -> None:
    where = places()
    where.draft_file.parent.mkdir(parents=True)
    where.draft_file.write_text('{"pane": ["no"], "forms": {"superheat": {"texts": [], "units": 3}, "site": 7}}')
    async with sheet() as shown:
        assert shown.app.now == "superheat"
        await shown.type("38 psig")
        await shown.wait(lambda: shown.pane("superheat").answer)
    where.draft_file.write_text('{"pane": ')
    async with sheet() as shown:
        assert "is damaged" in shown.word


async def test_a_helper_that_dies_is_told_and_the_next_key_works(tmp_path: Path) -> None:
    count = tmp_path / "starts"
    slow = CANNED.replace("import json, sys", f"import json, sys, time\nopen({str(count)!r}, 'a').write('x')").replace(
        'print(json.dumps({"ready": 1}), flush=True)',
        f'time.sleep(0.5 * (len(open({str(count)!r}).read()) > 1))\nprint(json.dumps({{"ready": 1}}), flush=True)',
    )
    async with sheet(command=[sys.executable, "-S", "-c", slow]) as shown:
        await shown.type("3")
        await shown.see("superheat             5.0 K")
        pid = shown.app.engine.pid
        assert pid is not None
        os.kill(pid, signal.SIGKILL)
        await shown.see("The property helper ended; it is started again.")
        await shown.type("8 psig")
        await shown.wait(lambda: any("363325" in line for line in shown.findings()), "the answer to 38 psig")
        assert "helper" not in shown.word
        assert shown.app.engine.pid != pid


async def test_garbage_from_the_helper_never_becomes_a_number() -> None:
    nonsense = CANNED.replace('"findings": {"superheat": 5.0}', '"findings": [5.0]')
    assert nonsense != CANNED
    async with sheet(command=[sys.executable, "-S", "-c", nonsense]) as shown:
        await shown.type("38 psig")
        await shown.see("The property helper's answer makes no sense.")
        assert shown.findings() == []


async def test_only_the_answer_to_what_stands_on_the_form_is_shown(tmp_path: Path) -> None:
    slow = CANNED.replace("    request =", "    import time; time.sleep(0.05)\n    request =")
    async with sheet(command=[sys.executable, "-S", "-c", slow]) as shown:
        shown_notes: set[str] = set()
        for length in range(1, 5):
            await shown.press("ctrl+u", *"2.75"[:length])
            shown_notes.update(line for line in shown.findings() if line.startswith("asked"))
        # 2.75 bar on 101.325 kPa.
        await shown.wait(lambda: any("376325" in line for line in shown.findings()), "the newest answer")
        await shown.press("ctrl+u")
        await shown.pilot.pause(0.3)
        assert not [line for line in shown.findings() if line.startswith("asked")], "nothing typed, nothing found"


async def test_ctrl_c_leaves_nothing_behind_and_says_how_to_leave() -> None:
    async with sheet() as shown:
        await shown.press("ctrl+c")
        assert "F10 or Ctrl+Q leaves." in shown.word


@pytest.mark.parametrize("size", [(80, 24), (40, 10), (20, 5), (300, 100)])
async def test_every_pane_and_dialog_at_every_size(size: tuple[int, int]) -> None:
    async with sheet("R-454C", size=size) as shown:
        await shown.type("38 psig\t2 C")
        for key in (*PANES.values(), "F8", "F9", "F1", "ctrl+o"):
            await shown.press(key.lower())
            await shown.pilot.pause()
            if len(shown.app.screen_stack) > 1:
                await shown.press("f10")
        assert len(shown.app.screen_stack) == 1


@pytest.mark.parametrize("size", [(40, 10), (20, 5)])
async def test_typing_scrolls_the_field_into_a_low_window(size: tuple[int, int]) -> None:
    async with sheet(size=size) as shown:
        assert f"{size[0]}x{size[1]}" in shown.lines()[-1]
        await shown.press(*["tab"] * 5)
        await shown.wait(lambda: shown.focus == "discharge_temperature")
        field, pane = shown.app.focused, shown.pane("superheat")
        assert field is not None
        await shown.wait(lambda: pane.region.contains_region(field.region), "the field typed in to be seen")
        assert "PgDn" in shown.lines()[-1] or "PageDown" in shown.lines()[-1]


def test_the_frame_fits_its_window() -> None:
    for width in (20, 40, 79, 80, 120):
        for pane in PANES:
            assert len(tabs_line(pane, width)) <= max(width, 40)
            assert len(keys_line(pane, width, HIGH)) <= width
        assert len(rule_line(width, above=True, below=True)) == width
        assert all(len(line) < width for line in word_lines("word " * 100, FOOTNOTE, width))
        assert all(len(line) <= width for line in word_lines("", FOOTNOTE, width))
    assert word_lines("one line", FOOTNOTE, 80) == ["one line", FOOTNOTE]
    head = head_line(find("R-454C"), SEA_LEVEL, "a very long name of a machine", 80)
    assert len(head) <= 80
    assert "454C" in head
    assert "101.33 kPa abs" in head


async def test_no_thread_and_no_helper_outlive_the_app() -> None:
    async with sheet() as shown:
        await shown.type("38 psig\n")
        await kept(shown, 1)
        pid = shown.app.engine.pid
    names = {thread.name for thread in threading.enumerate()}
    assert not [name for name in names if name in ("engine", "saver") or name.startswith("logbook")]
    assert not Path(f"/proc/{pid}").exists()


async def test_the_logbook_goes_into_a_file_and_a_file_that_is_there_stays(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    async with sheet() as shown:
        await shown.type("2 bar g\t5 C\n")
        await shown.see("Kept at")
        table = tmp_path / "mine.csv"
        # All in one burst, from another sheet.
        await shown.press("ctrl+o", "w", "ctrl+u", *"mine.txt\n")
        await shown.see("Write the whole logbook into a file")
        await shown.see("must end in .csv or .json")
        await shown.press("backspace", "backspace", "backspace")
        await shown.type("csv\n")
        await shown.see("Written:")
        rows = list(csv.DictReader(table.read_text().splitlines()))
        assert [(row["suction pressure"], row["suction temperature"]) for row in rows] == [("2 bar g", "5 C")]
        assert stat.S_IMODE(table.stat().st_mode) == 0o600
        table.write_text("another's")
        await shown.press("ctrl+o", "w")
        await shown.see("Write the whole logbook into a file")
        await shown.press("ctrl+u")
        await shown.type("mine.csv\n")
        await shown.see("there already")
        assert table.read_text() == "another's"
        await shown.press("ctrl+u")
        await shown.type("mine.json\n")
        await shown.see("Written:")
        assert [entry["readings"] for entry in json.loads((tmp_path / "mine.json").read_text())["entries"]] == [
            {"suction_pressure": "2 bar g", "suction_temperature": "5 C"}
        ]


async def test_what_is_typed_keeps_its_meaning_when_the_units_change() -> None:
    async with sheet() as shown:
        # On a sheet that is open, and on one that was left in the draft of an earlier start.
        shown.app.saved["forms"] = {"machine": {"texts": {"suction_pressure": "1.0", "electrical_power": "8"}}}
        await shown.type("2.6\t5\t14,1 bar\tabc")
        await shown.press("f7", "down", "right")
        await shown.see("Readings that were typed keep the units they had.")
        shown.app.saver.flush()
        saved, _ = load_draft(places().draft_file)
        assert saved["forms"]["superheat"]["texts"]["suction_pressure"] == "2.6 bar g"
        assert saved["forms"]["machine"]["texts"]["electrical_power"] == "8 kW"
        await shown.press("f3")
        texts = shown.pane("superheat").texts()
        assert [texts[name] for name in ("suction_pressure", "suction_temperature", "liquid_temperature")] == [
            "2.6 bar g",
            "5 °C",
            "abc",
        ]
        assert "37.7 psi g" in shown.line("suction pressure")
        await shown.press("f5")
        await shown.see("F5 MACHINE")
        texts = shown.pane("machine").texts()
        assert (texts["suction_pressure"], texts["electrical_power"]) == ("1.0 bar g", "8 kW")


async def test_one_place_is_answered_without_another_that_is_not_understood() -> None:
    async with sheet() as shown:
        await shown.type("2 bar g\t5 C\tabc")
        await shown.wait(lambda: shown.rule == "-- WITHOUT WHAT IS NOT UNDERSTOOD")
        await shown.see('asked ("suction_pressure": 301325.0, "suction_temperature": 278.15)')
        assert shown.word.startswith("liquid pressure: 'abc' does not start with a number.")
        await shown.type("\n")
        await shown.see("Not kept: liquid pressure: 'abc'")
        assert entries() == []
        await shown.press("ctrl+u")
        await shown.wait(lambda: shown.rule == "")


async def test_what_was_cleared_or_replaced_comes_back() -> None:
    async with sheet() as shown:
        await shown.type("2 bar g\n")
        await kept(shown, 1)
        await shown.press("tab")
        await shown.type("5")
        before = shown.pane("superheat").texts()
        await shown.press("ctrl+o", "c")
        await shown.see("The sheet is cleared; Ctrl+Z brings back what stood here.")
        assert not any(shown.pane("superheat").texts().values())
        await shown.press("ctrl+z")
        await shown.see("What stood here before is back.")
        assert shown.pane("superheat").texts() == before
        await shown.press("f6", "enter")
        await shown.see("Entry 1 with its readings. Ctrl+Z brings back what stood here.")
        assert shown.pane("superheat").texts()["suction_temperature"] == ""
        await shown.press("ctrl+z")
        await shown.wait(lambda: shown.pane("superheat").texts() == before)


async def test_a_note_makes_no_second_entry_of_the_next_enter_and_an_hour_later_there_is_one() -> None:
    async with sheet() as shown:
        await shown.press("f9")
        await shown.type("rack 2\nclear\n")
        await shown.type("2 bar g\n")
        await shown.see("Kept at")
        await shown.press("enter")
        await shown.see("Already kept at")
        assert len(entries()) == 1
        pane = shown.pane("superheat")
        assert pane.kept_as is not None
        pane.kept_as = replace(pane.kept_as, kept_at=pane.kept_as.kept_at - timedelta(hours=1))
        await shown.press("enter")
        await kept(shown, 2)


async def test_an_entry_that_is_deleted_may_be_kept_again() -> None:
    async with sheet() as shown:
        await shown.type("2 bar g\n")
        await kept(shown, 1)
        await shown.press("f6", "delete")
        await kept(shown, 0)
        await shown.press("f3", "enter")
        await kept(shown, 1)


async def test_the_frame_follows_the_window_at_once() -> None:
    async with sheet() as shown:
        for width, narrow in ((40, True), (80, False), (120, False), (39, True)):
            await shown.pilot.resize_terminal(width, 24)
            await shown.wait(lambda narrow=narrow: shown.app.base.has_class("-narrow") == narrow, f"{width} columns")


async def test_a_picture_of_nothing_says_so() -> None:
    async with sheet() as shown:
        await shown.press("ctrl+g")
        await shown.see("There is nothing to draw yet; Ctrl+G brings the form back.")


async def test_a_caution_below_the_window_is_said_when_typing_rests() -> None:
    async with sheet() as shown:
        await shown.press("f5")
        await shown.type("1 bar")
        pane = shown.pane("machine")
        await shown.wait(lambda: pane.answer is not None)
        assert pane.answer is not None
        pane.answer = replace(pane.answer, cautions=(Remark("The readings do not agree."),))
        pane.say_word(settled=False)
        assert not shown.word.startswith("The readings do not agree.")
        pane.settle()
        assert shown.word.startswith("The readings do not agree.")
