"""What stands in every cell of the terminal, so that only cells that change are sent.

The screen library paints whole widgets, and the whole pane when one line comes or goes; over a slow link that is
seconds.
"""

from __future__ import annotations

import re
from functools import cache

from rich.cells import get_character_cell_size

# A cell: its character ("" for the right half of a wide one) and its style, the parameters of SGR.
Cell = tuple[str, str]

_BLANK: Cell = (" ", "")
_TOKEN = re.compile(r"\x1b\[([0-9;]*)([Hm])|(\r?\n)|([^\x00-\x1f\x7f]+)")
# What changes nothing on the screen: modes, questions, keyboard reports, titles.
_SILENT = re.compile(r"(?:\x1b\[\?[0-9;]+(?:[hl]|\$p)|\x1b\[[<>=][0-9;]*u|\x1b\][^\x07\x1b]*(?:\x07|\x1b\\)|\x07)*")
_CODE = re.compile(r"(?:(38|48);(?:5;\d+|2;\d+;\d+;\d+)|(\d+))(?:;|$)")
# Sending a few unchanged cells is shorter than moving over them.
_BRIDGE = 5
# What ends bold, dim, italic, underlined, reversed (ECMA-48, SGR); bold and dim end together.
_ENDS = {"1": "22", "2": "22", "3": "23", "4": "24", "7": "27"}
_ERASE_FROM = 5


class Cells:
    """The terminal's cells as they were last sent; None where that is not known.

    erases_in_colour: whether the terminal erases with the ground set last (terminfo `bce`), not with its own.
    """

    def __init__(self, erases_in_colour: bool = False) -> None:
        self._erases_in_colour = erases_in_colour
        self._size = (0, 0)
        self._rows: list[list[Cell | None]] = []
        self._cursor = (0, 0)

    def forget(self) -> None:
        """Nothing is known of the screen: the next paint sends everything."""
        self._size = (0, 0)

    def clear(self, width: int, height: int) -> None:
        """The screen has been cleared to the terminal's own colours."""
        self._fill(width, height, _BLANK)

    def changes(self, data: str, width: int, height: int) -> str:
        """Return the shortest that has the effect of `data` on a screen of this size, `data` where that is unclear."""
        if _SILENT.fullmatch(data):
            return data
        if self._size != (width, height):
            self._fill(width, height, None)
        painted = self._paint(data)
        if painted is None:
            self.forget()
            return data
        changed, cursor = painted
        sent = self._sent(changed)
        if not sent and cursor == self._cursor:
            return ""
        self._cursor = cursor
        return f"{sent}\x1b[{cursor[1] + 1};{cursor[0] + 1}H"

    def _fill(self, width: int, height: int, cell: Cell | None) -> None:
        self._size = (width, height)
        self._rows = [[cell] * width for _ in range(height)]
        self._cursor = (-1, -1)

    def _paint(self, data: str) -> tuple[dict[int, set[int]], tuple[int, int]] | None:
        """Put `data` into the cells; return the columns that changed by row, and where the cursor is left."""
        changed: dict[int, set[int]] = {}
        x = y = position = 0
        style = ""
        while position < len(data):
            token = _TOKEN.match(data, position)
            if token is None:
                return None
            position = token.end()
            parameters, final, newline, text = token.groups()
            if text is not None:
                if 0 <= y < len(self._rows):
                    x = self._write(self._rows[y], x, text, style, changed.setdefault(y, set()))
            elif newline is not None:
                x, y = 0, y + 1
            elif final == "m":
                style = _style(parameters)
            else:
                row, _, column = parameters.partition(";")
                x, y = int(column or 1) - 1, int(row or 1) - 1
        return changed, (x, y)

    def _write(self, row: list[Cell | None], x: int, text: str, style: str, changed: set[int]) -> int:
        blank = (" ", _blank_style(style))
        for character in text:
            wide = 1 if character.isascii() else get_character_cell_size(character)
            if wide == 0:
                before = row[x - 1] if 0 < x <= len(row) else None
                if before is not None:
                    row[x - 1] = (before[0] + character, before[1])
                    changed.add(x - 1)
                continue
            for place in range(x, min(x + wide, len(row))):
                cell = blank if character == " " else (character if place == x else "", style)
                if row[place] != cell:
                    self._part(row, place, changed)
                    row[place] = cell
                    changed.add(place)
            x += wide
        return x

    def _part(self, row: list[Cell | None], place: int, changed: set[int]) -> None:
        """Blank the other half of a wide character of which one half is written over, as terminals do."""
        before = row[place]
        if before is None:
            return
        after = row[place + 1] if place + 1 < len(row) else None
        other = place - 1 if before[0] == "" else place + 1 if after is not None and after[0] == "" else None
        if other is not None:
            row[other] = (" ", _blank_style(before[1]))
            changed.add(other)

    def _sent(self, changed: dict[int, set[int]]) -> str:
        out: list[str] = []
        style = ""
        for y, columns in sorted(changed.items()):
            row = self._rows[y]
            cursor = -1
            for start, end in _runs(row, sorted(columns)):
                out.append(f"\x1b[{start - cursor}C" if cursor >= 0 else f"\x1b[{y + 1};{start + 1}H")
                tail = self._tail(row, start, end)
                for cell in row[start:tail]:
                    if cell is None or _shows_alike(cell, style):
                        out.append(cell[0] if cell else "")
                        continue
                    out.append(_change(style, cell[1]))
                    style = cell[1]
                    out.append(cell[0])
                if tail < end:
                    ground = (row[-1] or _BLANK)[1]
                    out.append(("" if _blank_style(style) == ground else _change(style, ground)) + "\x1b[K")
                    style = style if _blank_style(style) == ground else ground
                    break
                cursor = end
        if style:
            out.append("\x1b[0m")
        return "".join(out)

    def _tail(self, row: list[Cell | None], start: int, end: int) -> int:
        """Return where the blanks at the row's end begin that are shorter erased than sent, `end` if nowhere."""
        ground = row[-1]
        if ground is None or ground[0] != " " or _has_lines(ground[1]) or (ground[1] and not self._erases_in_colour):
            return end
        tail = len(row)
        while tail > start and row[tail - 1] == ground:
            tail -= 1
        return tail if end - tail >= _ERASE_FROM else end


def _shows_alike(cell: Cell, style: str) -> bool:
    """Whether a cell looks the same in this style: its own, or for a blank any on the same ground."""
    return cell[1] == style or (cell[0] == " " and cell[1] == _blank_style(style))


def _runs(row: list[Cell | None], columns: list[int]) -> list[tuple[int, int]]:
    """Return [start, end) of what is sent in one go."""
    runs: list[tuple[int, int]] = []
    for column in columns:
        first = row[column]
        start = column - 1 if first is not None and first[0] == "" and column > 0 else column
        if runs:
            last_start, last_end = runs[-1]
            if start <= last_end or (start - last_end <= _BRIDGE and _alike(row[last_end - 1 : start])):
                runs[-1] = (last_start, max(last_end, column + 1))
                continue
        runs.append((start, column + 1))
    return runs


def _alike(cells: list[Cell | None]) -> bool:
    """Whether these cells are known and sent in the style of the first."""
    first = cells[0]
    return first is not None and all(cell is not None and _shows_alike(cell, first[1]) for cell in cells)


@cache
def _change(before: str, after: str) -> str:
    """Return the shortest from one style to another."""
    old, new = _parts(before), _parts(after)
    if not after:
        return "\x1b[0m"
    afresh = f"\x1b[0;{after}m" if before else f"\x1b[{after}m"
    gone = old[2] - new[2]
    # Terminals of few colours are also those that may not know how to end bold alone.
    if gone and not (gone <= _ENDS.keys() and ";5;" in before):
        return afresh
    ends = {_ENDS[code] for code in gone}
    codes = sorted(ends) + sorted(code for code in new[2] if code not in old[2] or _ENDS.get(code) in ends)
    codes += [
        (colour or plain) for colour, was, plain in ((new[0], old[0], "39"), (new[1], old[1], "49")) if colour != was
    ]
    gradual = f"\x1b[{';'.join(codes)}m"
    return min(gradual, afresh, key=len)


@cache
def _parts(style: str) -> tuple[str, str, frozenset[str]]:
    """Return a style as colour of the letters, of the ground, and the rest."""
    letters = ground = ""
    rest = set()
    for code in _codes(style):
        if code.startswith("38;") or (code.isdigit() and (30 <= int(code) <= 37 or 90 <= int(code) <= 97)):
            letters = code
        elif code.startswith("48;") or (code.isdigit() and (40 <= int(code) <= 47 or 100 <= int(code) <= 107)):
            ground = code
        else:
            rest.add(code)
    return letters, ground, frozenset(rest)


def _codes(style: str) -> list[str]:
    return [found[0].rstrip(";") for found in _CODE.finditer(style)]


@cache
def _style(parameters: str) -> str:
    """Return SGR parameters, which follow a reset, in one order and without the terminal's own colours."""
    codes = _codes(parameters)
    if not codes or "0" in codes:
        codes = codes[len(codes) - codes[::-1].index("0") :] if codes else []
    letters, ground, rest = _parts(";".join(code for code in codes if code not in ("39", "49")))
    return ";".join(code for code in (*sorted(rest), letters, ground) if code)


@cache
def _has_lines(style: str) -> bool:
    """Whether a style shows in a blank otherwise than by its ground: underlined, reversed, struck through."""
    return not _parts(style)[2].isdisjoint({"4", "7", "9", "21", "53"})


@cache
def _blank_style(style: str) -> str:
    """Return what of a style can be seen in a blank."""
    return style if _has_lines(style) else _parts(style)[1]
