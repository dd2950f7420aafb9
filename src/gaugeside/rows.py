"""The rows of a table of readings: the lines each is made of, and the decimal commas in them."""

from __future__ import annotations

import csv
import re
from collections import deque
from collections.abc import Iterator, Mapping
from itertools import chain

from gaugeside.errors import Refusal
from gaugeside.quantities import quoted
from gaugeside.text import plain_text

MOST_LINES = 100  # of one row: what a stray quote takes along is looked at again
_COMMA = re.compile(r"(?<![0-9,])[0-9]+,[0-9]+(?![0-9,.])")
_GROUPED = re.compile(r"(?<![0-9.,])(?=[0-9]*[1-9][0-9]*\.)(?P<whole>[0-9]{1,3})\.(?P<rest>[0-9]{3})(?![0-9.,eE])")

Numbered = Iterator[tuple[int, str | Refusal]]


def misquoted(fault: csv.Error) -> Refusal:
    """Return what is said where the quotes of a line do not fit."""
    return Refusal(
        f"The quotes in this line do not fit ({plain_text(str(fault), 80)}).",
        "Put a cell with a quote in it into quotes, and write the quote twice.",
    )


def records(numbered: Numbered, delimiter: str, longest: int) -> Iterator[tuple[int, list[str] | Refusal]]:
    """Yield the cells of each row, or why there are none, with the number of its first line.

    A cell in quotes may go on over the ends of lines, up to `longest` [characters] a row. Where its quote is not
    closed the first line alone is refused, for the ones behind it may be rows.
    """
    ahead: deque[tuple[int, str | Refusal]] = deque()
    for number, line in _given(ahead, numbered):
        if isinstance(line, Refusal):
            yield number, line
            continue
        taken: list[tuple[int, str | Refusal]] = []
        lines = _joined(line, _given(ahead, numbered), taken, longest)
        try:
            yield number, next(csv.reader(lines, delimiter=delimiter, strict=True), [])
        except csv.Error as fault:
            ahead.extendleft(reversed(taken))
            yield number, misquoted(fault)


def _given(ahead: deque[tuple[int, str | Refusal]], numbered: Numbered) -> Numbered:
    while True:
        found = ahead.popleft() if ahead else next(numbered, None)
        if found is None:
            return
        yield found


def _joined(line: str, behind: Numbered, taken: list[tuple[int, str | Refusal]], longest: int) -> Iterator[str]:
    """Yield a line, and as long as they are asked for those behind it, which go into `taken`."""
    size = 0
    for one in chain([(0, line)], behind):
        if one[0]:
            taken.append(one)
        if isinstance(one[1], Refusal) or len(taken) > MOST_LINES:
            return
        size += len(one[1]) + 1
        if taken and size > longest:
            return
        yield f"{one[1]}\n"


class DecimalCommas:
    """Whether a table has decimal commas; where it has, a point before three digits may group thousands."""

    def __init__(self, said: bool) -> None:
        self.found = said

    def look(self, texts: Mapping[str, str]) -> None:
        """Look at the readings of a row, by their names; Refusal for one that could be read in two ways."""
        self.found = self.found or any(_COMMA.search(text) for text in texts.values())
        for name, text in texts.items() if self.found else ():
            grouped = _GROUPED.search(text)
            if grouped is not None:
                whole, rest = grouped["whole"], grouped["rest"]
                raise Refusal(
                    f"In a table with decimal commas {quoted(text.strip())} can be {whole},{rest} or {whole}{rest}.",
                    f"Write {whole},{rest.rstrip('0') or '0'} or {whole}{rest}.",
                    name,
                )
