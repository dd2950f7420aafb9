"""What is shown of an answer, in the reader's units: one way of saying things for screen, pipe and logbook."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass, replace

from gaugeside.checks.sheet import Answer, Check, FindingLine, Remark, Table
from gaugeside.quantities import (
    Dress,
    Kind,
    Sense,
    Site,
    Unit,
    both_differences,
    gauge_and_absolute,
    in_unit,
    labels,
    number,
    shown,
    unit,
    with_sense,
    write,
)

FOOTNOTE = "Estimates from the readings typed; maker's figures and local rules come first."
_EVERY_PRESSURE = ("bar", "kPa", "MPa", "psi", "kgf/cm2", "inHg", "mmHg")


def wrapped(text: str, width: int, indent: str = "") -> list[str]:
    """Return a text in lines of at most `width` characters, the later ones indented; designations stay whole."""
    return textwrap.wrap(text, width, subsequent_indent=indent, break_on_hyphens=False)


@dataclass(frozen=True)
class FindingText:
    """One line of findings: label, the number, the same in a second form, and the words beside it.

    paired: the two texts are two columns (bubble and dew, inlet and outlet), not two forms of one number.
    heading: the line names those columns. widths: of the longest label and first text among the paired lines.
    """

    name: str
    label: str
    first: str
    second: str
    remark: str
    main: bool
    paired: bool = False
    heading: bool = False
    widths: tuple[int, int] = (0, 0)


def findings(check: Check, answer: Answer, dress: Dress, site: Site) -> list[FindingText]:
    """Return the lines of an answer in the declared order; paired findings share a line under a heading."""
    declared = [line for line in check.finding_lines() if line.name in answer.findings]
    columns = list(dict.fromkeys(line.column for line in declared if line.column not in ("", "beside")))
    lines: list[FindingText] = []
    rows: set[str] = set()
    for line in declared:
        if not line.column:
            first, second = _forms(answer.findings[line.name], line, dress, site)
            remark = _beside(answer, line.name, dress, site)
            lines.append(FindingText(line.name, line.label, first, second, remark, line.main))
            continue
        if not rows:
            lines.append(FindingText("", "", columns[0], columns[1] if len(columns) > 1 else "", "", False, True, True))
        if line.row not in rows:
            rows.add(line.row)
            lines += _paired([other for other in declared if other.row == line.row], columns, answer, dress, site)
    pairs = [line for line in lines if line.paired]
    widths = (max((len(p.label) for p in pairs), default=0), max((len(p.first) for p in pairs), default=0))
    return [replace(line, widths=widths) if line.paired else line for line in lines]


def _paired(row: list[FindingLine], columns: list[str], answer: Answer, dress: Dress, site: Site) -> list[FindingText]:
    """Return one row of paired findings; pressures take a second row for their absolute form."""
    cells: dict[str, tuple[str, str]] = {}
    beside = ""
    for line in row:
        first, second = _forms(answer.findings[line.name], line, dress, site)
        if line.column == "beside":
            words = _beside(answer, line.name, dress, site)
            both = f"{first} = {second}" if second and line.kind is Kind.TEMPERATURE_DIFFERENCE else first
            beside = f"{line.label} {both} {words}".strip()
        else:
            cells[line.column] = (first, second)
    texts = [cells.get(column, ("", "")) for column in columns] + [("", "")]
    main = any(line.main for line in row)
    lines = [FindingText(row[0].name, row[0].row, texts[0][0], texts[1][0], beside, main, True)]
    if row[0].kind is Kind.PRESSURE:
        lines.append(FindingText(row[0].name, "", texts[0][1], texts[1][1], "", False, True))
    return lines


def _forms(value: float | str, line: FindingLine, dress: Dress, site: Site) -> tuple[str, str]:
    return (value, "") if isinstance(value, str) else two_forms(value, line, dress, site)


def _beside(answer: Answer, name: str, dress: Dress, site: Site) -> str:
    remark = answer.remarks.get(name)
    return "" if remark is None else sentence(remark, dress, site)


# The unit beside the reader's own, and the one to fall back on where that is the reader's own.
_SECOND = {Kind.MASS_FLOW: ("kg/h", "kg/s"), Kind.TEMPERATURE: ("°F", "°C")}
_HEAT, _WORK = ("TR", "kW"), ("hp", "kW")


def two_forms(value: float, line: FindingLine, dress: Dress, site: Site) -> tuple[str, str]:
    """Return a finding in the reader's unit, and in the second form the trade wants beside it."""
    kind = line.kind
    if kind is Kind.PRESSURE:
        return gauge_and_absolute(value, dress, site)
    if kind is Kind.TEMPERATURE_DIFFERENCE:
        return both_differences(value, dress, site)
    first = shown(value, kind, dress, site)
    beside = _SECOND.get(kind)
    if kind is Kind.POWER:
        # Motors are rated in kW and hp, heat in kW and tons.
        beside = _WORK if "power" in line.name else _HEAT
    if beside is None:
        return first, ""
    own = dress.unit(kind).label
    label = beside[1] if own == beside[0] or (beside is _WORK and own not in ("kW", "W")) else beside[0]
    return first, write(value, unit(kind, label), kind, site)


def sentence(remark: Remark, dress: Dress, site: Site) -> str:
    """Return a remark with its numbers in the reader's units."""
    texts = {name: shown(value, kind, dress, site) for name, (value, kind) in remark.values.items()}
    return remark.text.format_map(texts) if texts else remark.text


@dataclass(frozen=True)
class TableText:
    """A table as text: headings and rows of cells, and the row that is the reading itself."""

    title: str
    headings: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    marked: int | None


def footnote(model_uncertainty: float, dress: Dress, site: Site) -> str:
    """Return the line under every sheet; with how far the property model [K] may be off, where that is said."""
    if not model_uncertainty:
        return FOOTNOTE
    kind = Kind.TEMPERATURE_DIFFERENCE
    model = write(model_uncertainty, dress.default(kind), kind, site)
    return FOOTNOTE.replace("from the readings typed", f"(the model alone ±{model})")


def table(raw: Table, dress: Dress, site: Site) -> TableText:
    """Return a table of SI numbers in the reader's units; pressures in the reader's sense."""
    units = [_column_unit(kind, dress) for _, kind in raw.columns]
    rows = tuple(
        tuple(_cell(value, to, kind, site) for value, to, (_, kind) in zip(row, units, raw.columns, strict=True))
        for row in raw.rows
    )
    said = ", ".join(dict.fromkeys(to.label for to in units if to is not None))
    return TableText(f"{raw.title}, {said}", tuple(label for label, _ in raw.columns), rows, raw.marked)


def _column_unit(kind: Kind, dress: Dress) -> Unit | None:
    if kind is Kind.WORDS:
        return None
    return with_sense(dress.unit(kind), dress.bare) if kind is Kind.PRESSURE else dress.unit(kind)


def _cell(value: float | str, to: Unit | None, kind: Kind, site: Site) -> str:
    if to is None or isinstance(value, str):
        return str(value)
    return number(in_unit(value, to, kind, site), to.decimals)


def every_pressure(answer: Answer, dress: Dress, site: Site) -> TableText | None:
    """Return the pressures of a saturation answer in every common unit, gauge and absolute."""
    bubble, dew = answer.findings.get("bubble_pressure"), answer.findings.get("dew_pressure")
    if not isinstance(bubble, float | int) or not isinstance(dew, float | int):
        return None
    one = abs(bubble - dew) <= 1e-9 * abs(dew)
    values = {"": dew} if one else {"bubble ": bubble, "dew ": dew}
    headings = tuple(f"{name}{sense}" for name in values for sense in ("gauge", "abs"))
    rows = tuple((label, *_senses(values, label, site)) for label in _EVERY_PRESSURE)
    return TableText("pressure in every unit", ("unit", *headings), rows, None)


def _senses(values: dict[str, float], label: str, site: Site) -> list[str]:
    cells = []
    for value in values.values():
        for sense in (Sense.GAUGE, Sense.ABSOLUTE):
            to = with_sense(unit(Kind.PRESSURE, label), sense)
            cells.append(number(in_unit(value, to, Kind.PRESSURE, site), to.decimals))
    return cells


def every_unit(value: float, kind: Kind, site: Site) -> list[str]:
    """Return one value in every unit of its kind, pressures gauge and absolute, below the atmosphere as vacuum too."""
    wanted = list(labels(kind))
    if kind is Kind.PRESSURE:
        vacuum = value < site.atmosphere
        senses = (Sense.GAUGE, Sense.ABSOLUTE, *([Sense.VACUUM] if vacuum else []))
        # A vacuum gauge's unit has no use above the atmosphere.
        wanted = [label for label in wanted if unit(kind, label).sense in senses and (vacuum or label != "micron")]
    return [write(value, unit(kind, label), kind, site) for label in wanted]


def site_line(site: Site) -> str:
    """Return the site's atmosphere and where the figure comes from."""
    return f"{site.atmosphere / 1000:.2f} kPa abs, {site.source}"


_ASCII = str.maketrans(
    {
        "°": "",
        "·": "/",
        "−": "-",
        "²": "2",
        "³": "3",
        "Δ": "d",
        "µ": "u",
        "—": "-",
        "–": "-",
        "…": "...",
        "’": "'",
        "“": '"',
        "”": '"',
        "±": "+/-",
        "≥": ">=",
        "≤": "<=",
    }
)


def ascii_only(text: str) -> str:
    """Return `text` in the characters every terminal has: degree signs fall away, others are spelled."""
    return text.translate(_ASCII).encode("ascii", "replace").decode("ascii")
