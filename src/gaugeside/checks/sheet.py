"""What a check is: a declaration of its readings and findings, and a pure function between them.

The form on the screen, the options of the one-shot command, the JSON, the logbook entry and the printed
sheet are all derived from the declaration.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import Field, dataclass, field, fields
from enum import StrEnum
from typing import TYPE_CHECKING, Any

from gaugeside.errors import Refusal
from gaugeside.quantities import SI_UNIT, Kind, Site

if TYPE_CHECKING:
    from gaugeside.checks.compressor_map import CompressorMap
    from gaugeside.refrigerants import Datum, Fluid, Refrigerant


class Entry(StrEnum):
    """How the text of a reading is read."""

    QUANTITY = "quantity"
    EITHER = "one of several kinds"
    STATE = "state"
    CHOICE = "choice"
    WORDS = "words"
    LOGBOOK_ENTRY = "number of a logbook entry"


@dataclass(frozen=True)
class ReadingLine:
    """One line of the form.

    name: full words with underscores, as in JSON. label: as on the screen. help: one line, what belongs here.
    kind: for a quantity. kinds: for one of several kinds. choices: for a choice. positional: given without an option
    name on the command line. only: the choices of the form's first line under which this line has a meaning; empty
    for all.
    """

    name: str
    label: str
    entry: Entry
    help: str
    kind: Kind = Kind.WORDS
    kinds: tuple[Kind, ...] = ()
    choices: tuple[str, ...] = ()
    positional: bool = False
    only: tuple[str, ...] = ()

    def meant(self, chosen: str | None) -> bool:
        """Whether the line has a meaning under what is chosen in the form's first line."""
        return not self.only or chosen in self.only


@dataclass(frozen=True)
class FindingLine:
    """One finding: its name in JSON, label on the screen, kind, and whether it is what people came for.

    row, column: findings with a column stand side by side in the row of that label; column "" has its own line, and
    "beside" stands at the end of the row.
    """

    name: str
    label: str
    kind: Kind
    main: bool = False
    row: str = ""
    column: str = ""


@dataclass(frozen=True)
class Remark:
    """A sentence with numbers still in SI: `{name}` in the text stands for a value of a kind."""

    text: str
    values: Mapping[str, tuple[float, Kind]] = field(default_factory=dict)


@dataclass(frozen=True)
class Table:
    """Rows of SI numbers (and words) beside the findings; `marked` is the row that is the reading itself."""

    title: str
    columns: tuple[tuple[str, Kind], ...]
    rows: tuple[tuple[float | str, ...], ...]
    marked: int | None = None


@dataclass(frozen=True)
class Surroundings:
    """What every check may ask for besides its readings.

    grid: origin and step [K] of the whole degrees in which the reader counts, for table rows.
    """

    datum: Datum
    site: Site
    grid: tuple[float, float] = (273.15, 1.0)


@dataclass(frozen=True)
class Conditions(Surroundings):
    """The surroundings, the refrigerant ready to be asked, and the machine's polynomials where it has any."""

    fluid: Fluid = field(kw_only=True)
    refrigerant: Refrigerant = field(kw_only=True)
    compressor: CompressorMap | None = field(default=None, kw_only=True)


@dataclass
class Outcome:
    """What a check found: a findings dataclass, and the words that go with it.

    remarks: finding name -> what stands beside the number. notes: assumptions and explanations. cautions: what
    can hurt a person or a machine. unresolved: why the question itself could not be answered although some
    findings could. no_finding: what to say should no finding at all come out.
    """

    findings: Any
    remarks: dict[str, Remark] = field(default_factory=dict)
    notes: list[Remark] = field(default_factory=list)
    cautions: list[Remark] = field(default_factory=list)
    tables: list[Table] = field(default_factory=list)
    unresolved: Refusal | None = None
    no_finding: Refusal | None = None

    def note(self, text: str, **values: tuple[float, Kind]) -> None:
        """Add an assumption or explanation."""
        self.notes.append(Remark(text, values))

    def caution(self, text: str, **values: tuple[float, Kind]) -> None:
        """Add a caution."""
        self.cautions.append(Remark(text, values))

    def remark(self, name: str, text: str, **values: tuple[float, Kind]) -> None:
        """Set what stands beside the finding `name`."""
        self.remarks[name] = Remark(text, values)


@dataclass(frozen=True)
class Check:
    """A check: name on the command line, label on the screen, its two dataclasses and its function.

    needs_refrigerant: the function takes Conditions; else Surroundings. places: readings that are answered together,
    each group without the others; none where all belong together.
    """

    name: str
    label: str
    summary: str
    readings: type[Any]
    findings: type[Any]
    run: Callable[[Any, Any], Outcome]
    needs_refrigerant: bool = True
    places: tuple[tuple[str, ...], ...] = ()

    def reading_lines(self) -> tuple[ReadingLine, ...]:
        """Return the declared readings in their order."""
        return tuple(_line(f, "reading") for f in fields(self.readings))

    def finding_lines(self) -> tuple[FindingLine, ...]:
        """Return the declared findings in their order."""
        return tuple(_line(f, "finding") for f in fields(self.findings))

    def reading_line(self, name: str) -> ReadingLine:
        """Return one declared reading."""
        return next(line for line in self.reading_lines() if line.name == name)


def _line(item: Field[Any], what: str) -> Any:
    declared = item.metadata[what]
    return type(declared)(**{**declared.__dict__, "name": item.name})


def reading(label: str, kind: Kind, help: str, *, only: tuple[str, ...] = ()) -> Any:
    """Declare a reading that is one quantity."""
    return field(default=None, metadata={"reading": ReadingLine("", label, Entry.QUANTITY, help, kind, only=only)})


def state(label: str, help: str, *, only: tuple[str, ...] = ()) -> Any:
    """Declare a reading that is a state of the refrigerant; its value maps property names to SI numbers."""
    return field(default=None, metadata={"reading": ReadingLine("", label, Entry.STATE, help, only=only)})


def either(label: str, kinds: tuple[Kind, ...], help: str, *, positional: bool = False) -> Any:
    """Declare a reading that is one of several kinds, told apart by its unit; its value maps the kind to a number."""
    line = ReadingLine("", label, Entry.EITHER, help, kinds=kinds, positional=positional)
    return field(default=None, metadata={"reading": line})


def words(label: str, help: str, *, positional: bool = False) -> Any:
    """Declare a reading that is text."""
    return field(default=None, metadata={"reading": ReadingLine("", label, Entry.WORDS, help, positional=positional)})


def entry(label: str, help: str) -> Any:
    """Declare a reading that is the number of a logbook entry; its value maps names of that entry's findings to SI."""
    return field(default=None, metadata={"reading": ReadingLine("", label, Entry.LOGBOOK_ENTRY, help)})


def choice(label: str, choices: tuple[str, ...], help: str, *, positional: bool = False) -> Any:
    """Declare a reading that is one of a few words."""
    line = ReadingLine("", label, Entry.CHOICE, help, choices=choices, positional=positional)
    return field(default=None, metadata={"reading": line})


def finding(label: str, kind: Kind, *, main: bool = False, row: str = "", column: str = "") -> Any:
    """Declare a finding; None in the result means that the readings do not give it."""
    return field(default=None, metadata={"finding": FindingLine("", label, kind, main, row, column)})


@dataclass(frozen=True)
class Answer:
    """An outcome without its types: what goes through a pipe, into JSON and into the logbook."""

    check: str
    refrigerant: str
    findings: dict[str, float | str]
    remarks: dict[str, Remark]
    notes: tuple[Remark, ...]
    cautions: tuple[Remark, ...]
    tables: tuple[Table, ...]
    unresolved: dict[str, str | None] | None
    library_version: str

    def plain(self) -> dict[str, Any]:
        """Return the answer as JSON types."""
        return {
            "check": self.check,
            "refrigerant": self.refrigerant,
            "findings": dict(self.findings),
            "remarks": {name: _plain_remark(r) for name, r in self.remarks.items()},
            "notes": [_plain_remark(r) for r in self.notes],
            "cautions": [_plain_remark(r) for r in self.cautions],
            "tables": [
                {
                    "title": t.title,
                    "columns": [[label, kind.value] for label, kind in t.columns],
                    "rows": [list(row) for row in t.rows],
                    "marked": t.marked,
                }
                for t in self.tables
            ],
            "unresolved": self.unresolved,
            "library_version": self.library_version,
        }

    @classmethod
    def from_plain(cls, plain: Mapping[str, Any]) -> Answer:
        """Return the answer that `plain` gave; KeyError, TypeError or ValueError when it did not."""
        return cls(
            check=plain["check"],
            refrigerant=plain["refrigerant"],
            findings=dict(plain["findings"]),
            remarks={name: _remark(r) for name, r in plain["remarks"].items()},
            notes=tuple(_remark(r) for r in plain["notes"]),
            cautions=tuple(_remark(r) for r in plain["cautions"]),
            tables=tuple(
                Table(
                    t["title"],
                    tuple((label, Kind(kind)) for label, kind in t["columns"]),
                    tuple(tuple(row) for row in t["rows"]),
                    t["marked"],
                )
                for t in plain["tables"]
            ),
            unresolved=plain["unresolved"],
            library_version=plain["library_version"],
        )


def _plain_remark(remark: Remark) -> list[Any]:
    return [remark.text, {name: [value, kind.value] for name, (value, kind) in remark.values.items()}]


def _remark(plain: Any) -> Remark:
    text, values = plain
    return Remark(text, {name: (value, Kind(kind)) for name, (value, kind) in values.items()})


def answer(check: Check, conditions: Surroundings, values: Mapping[str, Any], library_version: str) -> Answer:
    """Run `check` on SI `values` (reading name -> value) and return its answer; Refusal when there is none."""
    outcome = check.run(conditions, check.readings(**values))
    found = {
        line.name: value
        for line in check.finding_lines()
        if (value := getattr(outcome.findings, line.name)) is not None
    }
    unresolved = outcome.unresolved
    reason = unresolved or outcome.no_finding
    if reason is not None and not found:
        raise reason
    return Answer(
        check=check.name,
        refrigerant=conditions.refrigerant.designation if isinstance(conditions, Conditions) else "",
        findings=found,
        remarks={name: remark for name, remark in outcome.remarks.items() if name in found},
        notes=tuple(outcome.notes),
        cautions=tuple(outcome.cautions),
        tables=tuple(outcome.tables),
        unresolved=None
        if unresolved is None
        else {"field": unresolved.field, "message": unresolved.message, "hint": unresolved.hint},
        library_version=library_version,
    )


def si_unit(line: FindingLine) -> str:
    """Return the SI unit of a finding's value in JSON."""
    return SI_UNIT[line.kind]
