"""`gaugeside batch`: one check on every row of a table of readings, answered row by row."""

from __future__ import annotations

import csv
import io
import json
import os
import re
from argparse import Namespace
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import nullcontext
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, BinaryIO

from gaugeside.answering import Terms, answer_json, answered, terms
from gaugeside.checks.caution import model_remark
from gaugeside.checks.sheet import Answer, Check, Entry, FindingLine, Remark
from gaugeside.checks.typed import TypedLine, read_line
from gaugeside.checks.view import FOOTNOTE, sentence, site_line
from gaugeside.columns import Header, fitted, read_header
from gaugeside.disk import whole_path
from gaugeside.errors import Refusal
from gaugeside.files import STANDARD, Lines, cell, opened, refuse_own, written_whole
from gaugeside.logbook import Logbook
from gaugeside.quantities import Kind, Sense, Unit, with_sense, write
from gaugeside.refrigerants import find
from gaugeside.rows import DecimalCommas, records
from gaugeside.text import plain_text

Printer = Callable[[str], None]
LONGEST_LINE = 60_000  # [bytes]
MOST_NAMED = 10  # columns, notes
_DECIMAL_COMMA = re.compile(r"\d,\d")
_LAST = ("cautions", "notes", "refused")


def run_batch(arguments: Namespace, put: Printer, tell: Printer) -> int:
    """Answer every row of a table of readings; return 0 when none was refused, else 2.

    put: takes each line of the answer. tell: takes each sentence about it.
    """
    check: Check = arguments.check
    under = terms(check, arguments)
    _open_refrigerant(check, under)
    words = _words(check, arguments, under)
    target = None if arguments.to in (None, STANDARD) else whole_path(arguments.to)
    if target is not None:
        refuse_own(target, under.home.logbook_file)
    with opened(arguments.file) as file:
        _refuse_same(file, target)
        lines = Lines(file, arguments.file, LONGEST_LINE)
        numbered = enumerate(lines, 1)
        header = read_header(check, _first(numbered), words, under.dress, under.site)
        batch = _Batch(header, under, Logbook(under.home.logbook_file), tell, "," if arguments.decimal_comma else ".")
        with nullcontext() if target is None else written_whole(str(target), arguments.replace) as out:
            if out is not None:
                put = _into(out, lines.marked and not arguments.json)
            for line in batch.json_lines(numbered) if arguments.json else batch.csv_lines(numbered):
                put(line)
        batch.say_the_end(lines.windows)
    return 2 if batch.refused else 0


def _open_refrigerant(check: Check, under: Terms) -> None:
    """Raise Refusal where no row at all could be answered for this refrigerant."""
    if check.needs_refrigerant:
        # Imported here: it brings the property library.
        from gaugeside.refrigerants import Datum, open_fluid

        try:
            open_fluid(find(under.refrigerant), Datum(under.settings.datum))
        except Refusal as refusal:
            raise refusal.about("refrigerant") from None


def _words(check: Check, arguments: Namespace, under: Terms) -> dict[str, str]:
    """Return the readings that the command line says for every row; Refusal for one that is not understood."""
    found = {}
    for line in check.reading_lines():
        text = getattr(arguments, line.name, None) if line.positional and line.entry is not Entry.EITHER else None
        if text is not None:
            refusal = read_line(line, text, {}, under.dress, under.site).refusal
            if refusal is not None:
                raise refusal
            found[line.name] = text
    return found


def _refuse_same(file: BinaryIO, target: Path | None) -> None:
    try:
        same = target is not None and os.path.samestat(os.fstat(file.fileno()), os.stat(target))
    except (OSError, ValueError):
        return
    if same:
        raise Refusal("The answer would replace the readings it comes from.", "Name another file behind --to.")


def _first(numbered: Iterator[tuple[int, str | Refusal]]) -> str:
    """Return the header: the first line that is not empty."""
    for _, line in numbered:
        if isinstance(line, Refusal):
            raise Refusal(f"The header cannot be read: {line.message}", line.hint)
        if line.strip():
            return line
    raise Refusal("The table is empty.", "Its first line names the columns.")


def _into(out: BinaryIO, marked: bool) -> Printer:
    """Return what writes lines into a file as UTF-8, with a byte order mark where the readings had one."""
    if marked:
        out.write(b"\xef\xbb\xbf")
    return lambda line: (out.write(f"{line}\n".encode()), None)[1]


@dataclass
class _Row:
    """One row: its cells as they stand, what was understood, and the answer or why there is none."""

    number: int
    cells: Sequence[str] = ()
    typed: dict[str, TypedLine] = field(default_factory=dict)
    answer: Answer | None = None
    refusal: Refusal | None = None


class _Batch:
    """The rows under one header; nothing of a row is kept when the next one is read."""

    def __init__(self, header: Header, under: Terms, logbook: Logbook, tell: Printer, point: str) -> None:
        self.refused = 0
        self._answered = 0
        self._header = header
        self._under = under
        self._logbook = logbook
        self._tell = tell
        self._point = point
        self._commas = DecimalCommas(said=point == ",")
        self._told: set[object] = set()
        # The same in every row, so it is told once.
        self._model = model_remark(find(under.refrigerant)) if under.refrigerant else None
        self._say_the_beginning()

    def _say_the_beginning(self) -> None:
        settings = self._under.settings
        for trouble in self._under.troubles:
            self._tell(f"Note: {trouble}")
        self._tell(
            f"Note: site {site_line(self._under.site)}; units {settings.dress.upper()}, a pressure without gauge or "
            f"absolute is taken for {settings.bare_pressure}; datum of enthalpies {settings.datum.upper()}. {FOOTNOTE}"
        )
        for words in self._header.said:
            self._tell(words)
        carried = self._header.carried
        if carried:
            more = f" and {len(carried) - MOST_NAMED} more" if len(carried) > MOST_NAMED else ""
            self._tell(f"Not read, only carried along: {', '.join(carried[:MOST_NAMED])}{more}.")

    def say_the_end(self, windows: bool) -> None:
        """Say how many rows there were, and how their text was read."""
        if windows:
            self._tell("The file is not UTF-8 throughout; the rest was read as Windows-1252.")
        rows = self._answered + self.refused
        self._tell(f"{rows} {'row' if rows == 1 else 'rows'}: {self._answered} answered, {self.refused} refused.")

    def _rows(self, numbered: Iterator[tuple[int, str | Refusal]]) -> Iterator[_Row]:
        for number, cells in records(numbered, self._header.delimiter, LONGEST_LINE):
            row = _Row(number)
            try:
                if isinstance(cells, Refusal):
                    raise cells
                row.cells = cells
                if not any(text.strip() for text in cells):
                    continue
                row.cells = fitted(self._header, row.cells)
                self._answer(row)
            except Refusal as refusal:
                row.refusal = refusal
            self.refused += row.answer is None
            self._answered += row.answer is not None
            yield row

    def _answer(self, row: _Row) -> None:
        dress, site = self._under.dress, self._under.site
        row.typed = self._header.read(self._header.texts(row.cells), dress, site)
        self._commas.look(self._header.measured(row.typed))
        try:
            row.answer, _ = answered(self._header.check, row.typed, self._under, self._logbook)
        except Refusal:
            raise
        except Exception as fault:
            # The rows behind it are not to go down with one on which the program fails.
            words = f"The program met a fault on these readings ({type(fault).__name__})."
            raise Refusal(words, "The other rows are answered all the same.") from fault
        for what, words in self._header.assumed(row.typed, dress).items():
            self._tell_once(what, words)
        if "split" not in self._told and self._header.could_be_split(row.cells):
            self._tell_once("split", "In a comma table 2,6 is two cells; double quotes hold a decimal comma together.")
        if self._model in row.answer.notes and self._model is not None:
            self._tell_once(self._model.text, f"Note: {sentence(self._model, dress, site)}")

    def _tell_once(self, what: object, words: str) -> None:
        # A column may be understood in as many ways as there are units.
        if what not in self._told and len(self._told) < MOST_NAMED * (1 + len(self._header.columns)):
            self._told.add(what)
            self._tell(words)

    def csv_lines(self, numbered: Iterator[tuple[int, str | Refusal]]) -> Iterator[str]:
        """Yield the lines of the answer as a table: the columns that came, the findings, cautions and refusals."""
        columns = self._finding_columns()
        headings = [*self._header.names, *(heading for _, _, heading in columns), *_LAST]
        yield self._csv_line([cell(name) for name in headings])
        for row in self._rows(numbered):
            self._say_the_point(row)
            cells = [self._carried(row, place) for place in range(len(self._header.names))]
            cells += [self._found(row.answer, line, to) for line, to, _ in columns]
            cautions, notes = ((), ()) if row.answer is None else (row.answer.cautions, row.answer.notes)
            cells += [self._remarks(cautions), self._remarks([note for note in notes if note != self._model])]
            yield self._csv_line([*cells, cell(_told(row))])

    def _say_the_point(self, row: _Row) -> None:
        """Say once that numbers are written with a point where the readings have commas."""
        understood = (line.text for line in row.typed.values() if line.value is not None)
        # Where a comma parts the cells, another one in them would part them again.
        if self._point == "." and self._header.delimiter != "," and any(map(_DECIMAL_COMMA.search, understood)):
            self._tell_once("point", "Numbers are written with a point; --decimal-comma writes commas.")

    def _remarks(self, remarks: Iterable[Remark]) -> str:
        return cell(" ".join(sentence(remark, self._under.dress, self._under.site) for remark in remarks))

    def _finding_columns(self) -> list[tuple[FindingLine, Unit | None, str]]:
        """Return every finding with the unit and the heading of its column."""
        there = {name.strip() for name in self._header.names}
        for name in _LAST:
            if name in there:
                raise Refusal(f"The answer has a column {name} of its own.", "Give yours another name.")
        columns = []
        for line in self._header.check.finding_lines():
            to = self._unit(line.kind)
            unit = f" [{to.label}]" if to is not None and to.label else ""
            heading = f"{line.name.replace('_', ' ')}{unit}"
            if heading in there:
                heading = f"{line.name.replace('_', ' ')} found{unit}"
            if heading in there:
                raise Refusal(f"The answer has a column {heading} of its own.", "Give yours another name.")
            columns.append((line, to, heading))
        return columns

    def _unit(self, kind: Kind) -> Unit | None:
        if kind is Kind.WORDS:
            return None
        unit = self._under.dress.unit(kind)
        return with_sense(unit, Sense.ABSOLUTE) if kind is Kind.PRESSURE else unit

    def _found(self, answer: Answer | None, line: FindingLine, to: Unit | None) -> str:
        value = None if answer is None else answer.findings.get(line.name)
        if value is None:
            return ""
        if to is None or isinstance(value, str):
            return cell(str(value))
        text = write(value, to, line.kind, self._under.site)
        return text.removesuffix(to.label).strip().removesuffix("-").replace(".", self._point)

    def _carried(self, row: _Row, place: int) -> str:
        text = row.cells[place] if place < len(row.cells) else ""
        column = next((column for column in self._header.columns if column.place == place), None)
        typed = None if column is None else row.typed.get(column.line.name)
        is_number = typed is not None and typed.value is not None and not isinstance(typed.value, str)
        return plain_text(text) if is_number else cell(text)

    def _csv_line(self, cells: Sequence[str]) -> str:
        text = io.StringIO()
        csv.writer(text, delimiter=self._header.delimiter, lineterminator="").writerow(cells)
        return text.getvalue()

    def json_lines(self, numbered: Iterator[tuple[int, str | Refusal]]) -> Iterator[str]:
        """Yield one JSON object a row."""
        read = {column.place for column in self._header.columns}
        places = [place for place in range(len(self._header.names)) if place not in read]
        names = list(zip(places, _told_apart(self._header.names[place] for place in places), strict=True))
        for row in self._rows(numbered):
            found: dict[str, Any] = {"row": row.number}
            if row.answer is not None:
                found |= answer_json(self._header.check, row.answer, row.typed, self._under)
            elif row.refusal is not None:
                refusal = row.refusal
                found["error"] = {"field": refusal.field, "message": refusal.message, "hint": refusal.hint}
            carried = {name: plain_text(row.cells[place]) for place, name in names if place < len(row.cells)}
            yield json.dumps(found | ({"carried": carried} if carried else {}))


def _told_apart(headings: Iterable[str]) -> list[str]:
    """Return headings as names, a number behind those that were there before."""
    names: dict[str, None] = {}
    for heading in headings:
        name = plain = plain_text(heading.strip())
        number = 1
        while name in names:
            number += 1
            name = f"{plain} ({number})"
        names[name] = None
    return list(names)


def _told(row: _Row) -> str:
    """Return why a row has no answer; where none of its cells could be read, also which row it is."""
    if row.refusal is None:
        return ""
    where = row.refusal.field.replace("_", " ") if row.refusal.field else "" if row.cells else f"row {row.number}"
    return f"{where}: {row.refusal.sentence()}" if where else row.refusal.sentence()
