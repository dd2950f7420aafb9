"""What a person has to read stands whole: long refusals, wide tables, the help; a cleared sheet starts at its top."""

from __future__ import annotations

from app.sheets import sheet
from gaugeside.app.frame import PANES
from gaugeside.app.help_text import help_lines
from gaugeside.app.panes.answer_lines import side_by_side
from gaugeside.checks import CHECKS
from gaugeside.checks.view import TableText
from gaugeside.quantities import Dress


def test_tables_that_do_not_fit_beside_each_other_stand_below_each_other() -> None:
    tables = [TableText("", ("pressure", "dew"), (("bar", "12.4"), ("psi", "179.8")), None)] * 2
    assert [line.count("pressure") for line in side_by_side(tables, 60)] == [2, 0, 0]
    assert [line.count("pressure") for line in side_by_side(tables, 30)] == [1, 0, 0, 1, 0, 0]


def test_help_names_every_pane_and_gives_no_unit_for_words() -> None:
    for name, check in CHECKS.items():
        text = "\n".join(line for line, _ in help_lines(check, {}, Dress(), [], 80))
        assert all(key in text for key in (*PANES.values(), "Ctrl+G")), name
        assert not [line for line in text.splitlines() if line.endswith("alone:")], name


async def test_a_refusal_too_long_for_two_lines_stands_whole_on_the_sheet() -> None:
    async with sheet(size=(50, 24)) as shown:
        await shown.type("31 inHg vac")
        refusal = shown.pane("superheat").refusal
        assert refusal is not None
        await shown.wait(lambda: refusal.sentence() in " ".join(shown.findings()), "the whole sentence")


async def test_a_cleared_sheet_has_the_cursor_in_its_first_field() -> None:
    async with sheet() as shown:
        await shown.press("down", "down")
        await shown.press("ctrl+o", "c")
        await shown.wait(lambda: shown.focus == "suction_pressure", "the first field")
