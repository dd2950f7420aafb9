"""An answer as lines of text for a window of some width."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from gaugeside.app.charset import has_braille
from gaugeside.app.widgets.lines import CAUTION, MAIN, MUTED, Styled
from gaugeside.checks.picture import Picture
from gaugeside.checks.sheet import Answer, Check, Remark
from gaugeside.checks.view import FindingText, TableText, every_pressure, findings, sentence, table, wrapped
from gaugeside.drawing import draw
from gaugeside.engine import Reply
from gaugeside.errors import Refusal
from gaugeside.quantities import Dress, Site


def answer_of(reply: Reply) -> tuple[Answer | None, Refusal | None]:
    """Return what a reply answers and what it refuses; one that makes no sense is refused."""
    answer = None
    unresolved: dict[str, Any] | None = reply.error or {"field": None, "message": reply.fault, "hint": ""}
    try:
        if reply.answer is not None:
            answer = Answer.from_plain(reply.answer)
            unresolved = answer.unresolved
        if unresolved is None:
            return answer, None
        return answer, Refusal(str(unresolved["message"]), str(unresolved["hint"] or ""), unresolved["field"])
    except (KeyError, TypeError, ValueError, AttributeError):
        return None, Refusal("The property helper's answer makes no sense.", "Change a reading to try again.")


def answer_lines(
    check: Check, answer: Answer, dress: Dress, site: Site, width: int, standing: Sequence[str] = ()
) -> list[Styled]:
    """Return findings, cautions, tables and notes, each line with its style.

    standing: remarks that stand on the screen already.
    """
    lines: list[Styled] = []
    for found in findings(check, answer, dress, site):
        style = MAIN if found.main else MUTED if found.heading else ""
        lines += [(text, style) for text in finding_lines(found, width)]
    # Cautions stand before the tables: what can hurt somebody is not left below the window's end.
    lines += _remarks(answer.cautions, dress, site, width, CAUTION, standing)
    tables = [table(raw, dress, site) for raw in answer.tables]
    pressures = every_pressure(answer, dress, site) if check.name == "saturation" else None
    if pressures is not None:
        tables.insert(0, pressures)
    if len(tables) == 1:
        # Alone it stands under its title, which says the units.
        lines += [(text, MUTED) for text in wrapped(tables[0].title, width)]
    lines += [(text, "") for text in side_by_side(tables, width)]
    return lines + _remarks(answer.notes, dress, site, width, MUTED, standing)


def picture_lines(plain: Mapping[str, Any] | None, dress: Dress, site: Site, width: int, height: int) -> list[Styled]:
    """Return the picture that came with an answer as lines; a sentence where there is none."""
    if plain is None:
        return [("There is nothing to draw for these readings. Ctrl+G shows the numbers.", MUTED)]
    drawing = draw(Picture.from_plain(plain), width, height, dress, site, ascii_alone=not has_braille())
    return [(line, "") for line in drawing.lines()]


def refusal_words(check: Check, refusal: Refusal | None) -> str:
    """Return a refusal with the label of its field before it, empty without one."""
    if refusal is None:
        return ""
    labels = {line.name: line.label for line in check.reading_lines()}
    field = labels.get(refusal.field or "")
    return f"{field}: {refusal.sentence()}" if field else refusal.sentence()


def _remarks(
    remarks: Sequence[Remark], dress: Dress, site: Site, width: int, style: str, standing: Sequence[str]
) -> list[Styled]:
    texts = [text for remark in remarks if (text := sentence(remark, dress, site)) not in standing]
    return [(line, style) for text in texts for line in wrapped(text, width, "  ")]


def finding_lines(found: FindingText, width: int) -> list[str]:
    """Return one finding as lines; what does not fit beside the numbers goes on under itself."""
    if width < 60:
        words = f"{found.label}  {found.first}  {found.second}  {found.remark}".strip()
        return wrapped(words, width, "    ")
    label, first, second = (21, 13, 12)
    if found.paired:
        label, first = max(16, found.widths[0]), max(17, found.widths[1])
        # The last column gives way, so that what stands beside begins where it always does.
        second = max(13, 47 - label - first)
    # Words may be wider than their column: two blanks keep them apart.
    apart = "  " if len(found.first) > first else " "
    head = f"{found.label:<{label}} {found.first:<{first}}{apart}{found.second:<{second}} "
    beside = wrapped(found.remark, max(12, width - len(head))) or [""]
    return [(head + beside[0]).rstrip(), *(" " * len(head) + more for more in beside[1:])]


def side_by_side(tables: list[TableText], width: int) -> list[str]:
    """Return tables as lines, beside each other, or below each other in a window too narrow for that."""
    blocks = [_block(one) for one in tables]
    if sum(max(map(len, block)) + 3 for block in blocks) - 3 > width:
        return [line for block in blocks for line in block]
    height = max((len(block) for block in blocks), default=0)
    lines = []
    for row in range(height):
        cells = [block[row] if row < len(block) else " " * len(block[0]) for block in blocks]
        lines.append("   ".join(cells).rstrip())
    return lines


def _block(one: TableText) -> list[str]:
    rows = (one.headings, *one.rows)
    widths = [max(len(row[place]) for row in rows) for place in range(len(one.headings))]
    lines = []
    for number, row in enumerate(rows, -1):
        cells = [f"{row[0]:<{widths[0]}}", *(f"{c:>{w}}" for c, w in zip(row[1:], widths[1:], strict=True))]
        lines.append(("> " if number == one.marked else "  ") + "  ".join(cells))
    return lines
