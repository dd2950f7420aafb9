"""What a person has to read stands whole: long refusals, wide tables, the help; a cleared sheet starts at its top."""

from __future__ import annotations

import pytest

from app.sheets import sheet
from gaugeside.app.frame import PANES
from gaugeside.app.help_text import help_lines
from gaugeside.app.panes.answer_lines import answer_lines, side_by_side
from gaugeside.checks import CHECKS
from gaugeside.checks.sheet import Answer, Remark
from gaugeside.checks.view import TableText
from gaugeside.quantities import SEA_LEVEL, Dress
from gaugeside.refrigerants.secondary import SOLUTIONS
from unit.check_tools import ask


def test_tables_that_do_not_fit_beside_each_other_stand_below_each_other() -> None:
    tables = [TableText("", ("pressure", "dew"), (("bar", "12.4"), ("psi", "179.8")), None)] * 2
    assert [line.count("pressure") for line in side_by_side(tables, 60)] == [2, 0, 0]
    assert [line.count("pressure") for line in side_by_side(tables, 30)] == [1, 0, 0, 1, 0, 0]


def test_help_names_every_pane_and_gives_no_unit_for_words() -> None:
    for name, check in CHECKS.items():
        text = "\n".join(line for line, _ in help_lines(name, check, {}, Dress(), [], ["R-454C: its harm"], 80))
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


async def test_what_a_refrigerant_asks_stands_on_the_screen_once() -> None:
    harm = "R-454C: mildly flammable (A2L). Ventilate, no ignition, follow local code."
    model = "The model itself is uncertain by about 0.6 K"
    async with sheet("R-454C") as shown:
        await shown.type("38 psig\t28 F")
        await shown.see("superheat  ")
        assert shown.text().count("mildly flammable") == 1
        assert harm in shown.lines()
        assert "Estimates (the model alone ±0.6 K); maker's figures and local rules come first." in shown.lines()
        assert model not in shown.text()
        await shown.press("f1")
        await shown.see(model)
        assert harm in shown.text()
        await shown.press("f1")
        assert shown.app.stands_already() == [harm, f"{model}: HFO blend, older tables differ."]
        # Where the window has no room beside the sheet it goes onto the sheet.
        await shown.pilot.resize_terminal(60, 16)
        await shown.wait(lambda: harm not in shown.lines())
        assert shown.app.stands_already() == []


def test_what_stands_around_the_sheet_is_not_on_it() -> None:
    remarks = (Remark("harm"), Remark("leak"))
    answer = Answer("superheat", "R-454C", {"superheat": 5.0}, {}, (Remark("model"),), remarks, (), None, "")
    whole = [text for text, _ in answer_lines(CHECKS["superheat"], answer, Dress(), SEA_LEVEL, 79, [])]
    assert whole[1:] == ["harm", "leak", "model"]
    rest = [text for text, _ in answer_lines(CHECKS["superheat"], answer, Dress(), SEA_LEVEL, 79, ["harm", "model"])]
    assert rest == [whole[0], "leak"]


def test_the_help_of_a_field_leaves_the_line_under_it_to_what_stands_there() -> None:
    for check in CHECKS.values():
        for line in check.reading_lines():
            # A list of the words to choose from may be longer.
            if line.help != ", ".join(line.choices) + ".":
                assert len(f"{line.label}: {line.help}") < 80, (check.name, line.name)


@pytest.mark.parametrize(
    ("kind", "texts"),
    [
        ("condenser", {"inlet": "9.1 bar g, 68 C", "outlet": "SC 4 K"}),
        ("gas-cooler", {"inlet": "60 bar g, 5 C", "outlet": "80 bar g, 5 C"}),
        ("liquid-suction", {"inlet": "9 bar g, SC 4 K", "suction_inlet": "1 bar g, x 0.9", "suction_outlet": "20 C"}),
    ],
)
def test_states_and_numbers_stand_under_the_names_of_their_columns(kind: str, texts: dict[str, str]) -> None:
    answer = ask("component", "R-744" if kind == "gas-cooler" else "R-134a", component=kind, **texts)
    lines = [line for line, _ in answer_lines(CHECKS["component"], answer, Dress(), SEA_LEVEL, 79)]
    start = next(n for n, line in enumerate(lines) if line.split() == ["inlet", "outlet"])
    inlet, outlet = lines[start].index("inlet"), lines[start].index("outlet")
    shown = dict.fromkeys((answer.findings["inlet_region"], answer.findings["outlet_region"]))
    assert list(shown) == list(dict.fromkeys((lines[start + 1][inlet:outlet].strip(), lines[start + 1][outlet:])))
    for line in lines[start + 1 : start + 5]:
        # Each column begins after a blank and is not blank itself.
        assert [line[column - 1 : column].strip() for column in (inlet, outlet)] == ["", ""]
        assert all(line[column : column + 1].strip() for column in (inlet, outlet))
    assert max(map(len, lines)) <= 79


def test_the_help_of_a_stream_names_every_medium() -> None:
    for width in (80, 50):
        text = " ".join(line.strip() for line, _ in help_lines("stream", CHECKS["stream"], {}, Dress(), [], [], width))
        for name in ("water", "air", *SOLUTIONS):
            assert name in text


def test_logbook_and_site_have_a_help_of_their_own() -> None:
    for pane, word in (("logbook", "show entries with"), ("site", "altitude/barometer")):
        text = [line for line, _ in help_lines(pane, None, {}, Dress(), [], [], 80)]
        assert any(line.strip().startswith(word) for line in text), pane
        assert max(map(len, text)) <= 80
