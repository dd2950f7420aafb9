"""A field: what is typed or pasted is taken whole, or left out and said."""

from __future__ import annotations

import pytest
from textual import events

from app.sheets import Sheet, sheet
from gaugeside.app.widgets.field import LONGEST_TYPED, TextField


async def paste(shown: Sheet, text: str) -> None:
    shown.app.post_message(events.Paste(text))
    await shown.press("end")


def field(shown: Sheet) -> TextField:
    """The field that has the focus."""
    found = shown.app.focused
    assert isinstance(found, TextField)
    return found


async def test_a_paste_longer_than_a_field_leaves_it_as_it_was_and_is_said() -> None:
    async with sheet() as shown:
        await shown.type("2.6 bar g")
        await shown.see("2.60 bar g")
        await paste(shown, "7" * 300)
        await shown.see("Not taken: 309 characters, and this field holds 200; it stays as it was.")
        assert field(shown).value == "2.6 bar g"
        assert shown.pane("superheat").typed["suction_pressure"].value is not None
        await shown.press("backspace")
        await shown.wait(lambda: "Not taken" not in shown.text())
        assert field(shown).value == "2.6 bar "


async def test_a_field_takes_what_just_fits_and_says_it_of_the_next_key() -> None:
    async with sheet() as shown:
        await paste(shown, "1" * LONGEST_TYPED)
        assert field(shown).value == "1" * LONGEST_TYPED
        assert "Not taken" not in shown.text()
        await shown.type("2")
        await shown.see("Not taken: 201 characters")
        assert field(shown).value == "1" * LONGEST_TYPED


async def test_a_paste_over_a_selection_counts_without_what_it_replaces() -> None:
    async with sheet() as shown:
        await shown.type("5" * 150)
        field(shown).select_all()
        await paste(shown, "6" * 180)
        assert field(shown).value == "6" * 180
        field(shown).select_all()
        await paste(shown, "8" * 201)
        await shown.see("Not taken: 201 characters")
        assert field(shown).value == "6" * 180


@pytest.mark.parametrize("text", ["2.6 bar g\n", "\r\n2.6 bar g\r\n \r\n", "2.6 bar g"])
async def test_one_line_with_its_end_is_one_line(text: str) -> None:
    async with sheet() as shown:
        await paste(shown, text)
        assert field(shown).value == "2.6 bar g"
        assert "lines pasted" not in shown.text()


async def test_of_several_lines_the_first_is_taken_and_it_is_said() -> None:
    async with sheet() as shown:
        await paste(shown, "2.6 bar g\n2 C\n14.1 bar g\n")
        await shown.see("Only the first of the 3 lines pasted goes into a field.")
        assert field(shown).value == "2.6 bar g"
        await shown.wait(lambda: shown.pane("superheat").answer is not None)
        assert "Only the first of the 3 lines" in shown.word


@pytest.mark.parametrize("key", ["f8", "f9"])
async def test_a_dialog_says_it_on_its_own_screen(key: str) -> None:
    async with sheet() as shown:
        await shown.press(key)
        await shown.type("rack")
        await paste(shown, "7" * 300)
        await shown.see("Not taken: 304 characters")
        assert field(shown).value == "rack"
        await shown.type("s")
        await shown.wait(lambda: "Not taken" not in shown.text())


async def test_a_machine_has_at_most_the_name_that_is_kept() -> None:
    async with sheet() as shown:
        await shown.press("f9")
        await paste(shown, "7" * 61)
        await shown.see("Not taken: 61 characters, and this field holds 60")
        await paste(shown, "7" * 60)
        await shown.press("enter", "enter")
        await shown.wait(lambda: shown.app.settings.tag == "7" * 60)


async def test_logbook_and_site_say_it_too() -> None:
    async with sheet() as shown:
        for key in ("f6", "f7"):
            await shown.press(key)
            await paste(shown, "7" * 300)
            await shown.see("Not taken: 300 characters")
