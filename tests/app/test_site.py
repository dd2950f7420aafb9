"""The site's pane: what it says about each setting is what the program does."""

from __future__ import annotations

import pytest

from app.sheets import sheet
from gaugeside.app.widgets.field import ChoiceField


@pytest.mark.parametrize(
    ("bare", "unit", "said", "understood"),
    [
        ("gauge", "bar", "12 bar is read as gauge", "12.00 bar g"),
        ("absolute", "inHg", "12 inHg is read as absolute", "12.00 inHg abs"),
        ("gauge", "inHg", "inHg is refused without vac, g or abs", "? not understood"),
        ("gauge", "mmHg", "mmHg is refused without vac, g or abs", "? not understood"),
    ],
)
async def test_it_says_what_a_bare_pressure_is(bare: str, unit: str, said: str, understood: str) -> None:
    async with sheet(bare_pressure=bare, units={"pressure": unit}) as shown:
        await shown.press("f7")
        await shown.see("bare pressure is")
        assert shown.line("bare pressure is").endswith(said)
        await shown.press("f3")
        await shown.wait(lambda: shown.focus == "suction_pressure")
        await shown.type(f"12 {unit}")
        await shown.wait(lambda: understood in shown.line("suction pressure"))


@pytest.mark.parametrize(
    ("environ", "used"), [({"TERM": "xterm-256color"}, "log sheet dark"), ({"TERM": "vt100"}, "terminal colours")]
)
async def test_a_theme_that_is_not_there_is_told_and_the_one_in_use_is_shown(
    environ: dict[str, str], used: str
) -> None:
    async with sheet(theme="neon", environ=environ) as shown:
        assert shown.app.theme == used
        await shown.press("f7", "up")
        await shown.see(f"The theme 'neon' named in the settings is not there; {used} is used.")
        line = shown.app.base.query_one("#theme", ChoiceField)
        assert line.value == used
        assert shown.line("theme").endswith("'neon' is not there")
        await shown.press("right")
        await shown.wait(lambda: "is not there" not in shown.line("theme"))
        assert shown.app.settings.theme == line.value != used


async def test_a_theme_this_terminal_cannot_show_stays_chosen() -> None:
    async with sheet(theme="log sheet light", environ={"TERM": "vt100"}) as shown:
        await shown.press("f7")
        await shown.see("this terminal shows terminal colours light")
        assert shown.line("theme").startswith("theme               log sheet light")
