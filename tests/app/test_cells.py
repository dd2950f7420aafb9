"""Only changed cells are sent: the terminal must show the same as if everything had been."""

from __future__ import annotations

import pyte
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from gaugeside.app.cells import Cells
from gaugeside.app.charset import ascii_cells, keyboard_encoding, speaks_utf8

WIDTH, HEIGHT = 24, 5

STYLES = [
    "39;49",
    "0",
    "1;36;49",
    "4",
    "4;7",
    "38;5;110;48;5;234",
    "1;38;5;110;48;5;234",
    "4;38;5;110;48;5;234",
    "1;3;7;38;5;110;48;5;234",
    "48;5;234",
    "2;39;49",
    "30;47",
]
TEXTS = st.one_of(st.text("ab12 .°-", min_size=1, max_size=WIDTH), st.integers(1, WIDTH).map(lambda count: " " * count))
PIECES = st.one_of(
    st.tuples(
        st.integers(1, HEIGHT - 1),
        st.integers(1, WIDTH),
        st.lists(st.tuples(st.sampled_from(STYLES), TEXTS), max_size=3),
    ),
    # Wide characters are only ever replaced whole: widgets do not overlap by half a character.
    st.tuples(
        st.just(HEIGHT),
        st.sampled_from([1, 5, 9]),
        st.lists(st.tuples(st.sampled_from(STYLES), st.sampled_from(["温度", "abcd", "    "])), max_size=3),
    ),
)
PAINTS = st.lists(st.lists(PIECES, min_size=1, max_size=6), min_size=1, max_size=6)


class Shown(pyte.Screen):
    """A terminal that erases in the ground set last, or does not."""

    def __init__(self, erases_in_colour: bool) -> None:
        super().__init__(WIDTH, HEIGHT)
        self.erases_in_colour = erases_in_colour
        # Lines are never wrapped here, as in the program.
        self.reset_mode(7, private=True)

    def erase_in_line(self, how: int = 0, private: bool = False) -> None:
        attributes = self.cursor.attrs
        if not self.erases_in_colour:
            self.cursor.attrs = self.default_char
        super().erase_in_line(how, private)
        self.cursor.attrs = attributes


def painted(pieces: list[tuple[int, int, list[tuple[str, str]]]]) -> str:
    """What the screen library writes for some pieces of lines, each cut at the window's edge as it does."""
    out = []
    for row, column, segments in pieces:
        out.append(f"\x1b[{row};{column}H")
        left = WIDTH - column + 1
        for style, text in segments:
            cells = 2 * len(text) if text == "温度" else len(text)
            if cells > left:
                break
            left -= cells
            out.append(f"\x1b[{style}m{text}\x1b[0m")
    return "".join(out) + "\x1b[1;1H"


def looks(screen: pyte.Screen) -> list[list[tuple[object, ...]]]:
    """Return what can be seen of every cell."""
    rows = []
    for y in range(HEIGHT):
        row = []
        for x in range(WIDTH):
            cell = screen.buffer[y][x]
            letters = (cell.fg, cell.bold, cell.italics) if cell.data.strip() or cell.underscore or cell.reverse else ()
            row.append((cell.data, cell.bg, cell.underscore, cell.reverse, *letters))
        rows.append(row)
    return rows


@settings(max_examples=150, deadline=None)
@given(paints=PAINTS, erases_in_colour=st.booleans(), cleared=st.booleans())
def test_the_screen_is_the_same_as_if_all_had_been_sent(
    paints: list[list[tuple[int, int, list[tuple[str, str]]]]], erases_in_colour: bool, cleared: bool
) -> None:
    whole, lean = Shown(erases_in_colour), Shown(erases_in_colour)
    to_whole, to_lean = pyte.Stream(whole), pyte.Stream(lean)
    cells = Cells(erases_in_colour)
    if cleared:
        cells.clear(WIDTH, HEIGHT)
    for pieces in paints:
        data = painted(pieces)
        to_whole.feed(data)
        to_lean.feed(cells.changes(data, WIDTH, HEIGHT))
        assert looks(lean) == looks(whole)
        assert (lean.cursor.x, lean.cursor.y) == (whole.cursor.x, whole.cursor.y)
        if len(pieces) == 1 and len(pieces[0][2]) == 1:
            assert cells.changes(data, WIDTH, HEIGHT) == "", "sent twice"


def test_nothing_is_sent_for_what_stands_there_already() -> None:
    cells = Cells()
    first = "\x1b[2;3H\x1b[1;36msuperheat 5.0 K\x1b[0m\x1b[5;1H"
    assert "superheat 5.0 K" in cells.changes(first, WIDTH, HEIGHT)
    assert cells.changes(first, WIDTH, HEIGHT) == ""
    changed = cells.changes(first.replace("5.0", "5.1"), WIDTH, HEIGHT)
    assert changed == "\x1b[2;15H\x1b[1;36m1\x1b[0m\x1b[5;1H"


def test_a_resize_and_a_repaint_send_everything() -> None:
    cells = Cells()
    data = "\x1b[1;1Hsuperheat\x1b[1;1H"
    cells.changes(data, WIDTH, HEIGHT)
    assert "superheat" in cells.changes(data, WIDTH + 1, HEIGHT)
    assert cells.changes(data, WIDTH + 1, HEIGHT) == ""
    cells.forget()
    assert "superheat" in cells.changes(data, WIDTH + 1, HEIGHT)


@pytest.mark.parametrize("mode", ["\x1b[?25l", "\x1b[?2004h", "\x1b]0;title\x07", "\x07", "\x1b[<u", ""])
def test_what_paints_nothing_passes_and_leaves_the_cells_known(mode: str) -> None:
    cells = Cells()
    data = "\x1b[1;1Hsuperheat\x1b[1;1H"
    cells.changes(data, WIDTH, HEIGHT)
    assert cells.changes(mode, WIDTH, HEIGHT) == mode
    assert cells.changes(data, WIDTH, HEIGHT) == ""


def test_what_is_not_understood_passes_whole_and_makes_the_screen_unknown() -> None:
    cells = Cells()
    data = "\x1b[1;1Hsuperheat\x1b[1;1H"
    cells.changes(data, WIDTH, HEIGHT)
    scrolled = "\x1b[2;4r\x1b[3Tx"
    assert cells.changes(scrolled, WIDTH, HEIGHT) == scrolled
    assert "superheat" in cells.changes(data, WIDTH, HEIGHT)


@pytest.mark.parametrize(
    ("environ", "stream", "utf8", "keyboard"),
    [
        ({"LANG": "de_DE.UTF-8"}, "utf-8", True, "utf-8"),
        ({"LANG": "C.UTF-8"}, "UTF8", True, "utf-8"),
        ({"LANG": "C"}, "utf-8", False, "utf-8"),
        ({}, "utf-8", False, "utf-8"),
        ({"LANG": "C.UTF-8", "LC_ALL": "POSIX"}, "utf-8", False, "utf-8"),
        ({"LANG": "de_DE.ISO-8859-15@euro"}, "utf-8", False, "iso8859-15"),
        ({"LANG": "C.UTF-8"}, "latin-1", False, "utf-8"),
        ({"LANG": "xx.no-such-set"}, "utf-8", False, "utf-8"),
        ({"LC_CTYPE": "UTF-8"}, "utf-8", True, "utf-8"),
        ({"LANG": "en_US"}, "utf-8", False, "utf-8"),
    ],
)
def test_what_the_locale_promises(environ: dict[str, str], stream: str, utf8: bool, keyboard: str) -> None:
    assert speaks_utf8(environ, stream) is utf8
    assert keyboard_encoding(environ) == keyboard


def test_ascii_keeps_every_cell_in_its_place(monkeypatch: pytest.MonkeyPatch) -> None:
    assert ascii_cells("-5 °C") == "-5 °C"
    monkeypatch.setattr("gaugeside.app.charset._ascii", True)
    assert ascii_cells("-5 °C · 温|e\u0301") == "-5  C / ??|e"
