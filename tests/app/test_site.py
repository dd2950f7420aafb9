"""The site's pane: what it says about each setting is what the program does."""

from __future__ import annotations

import pytest

from app.sheets import sheet


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
