"""A picture drawn in characters: braille dots, or ASCII alone, at any width and height, in the reader's units."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import pairwise

from gaugeside.checks.picture import Picture, PictureKind, PicturePoint, Spot
from gaugeside.checks.view import ascii_only, wrapped
from gaugeside.quantities import (
    Dress,
    Kind,
    Sense,
    Site,
    both_differences,
    gauge_and_absolute,
    in_unit,
    number,
    shown,
    with_sense,
)

NARROWEST, LOWEST = 30, 8
# Dots of one character cell, across and down (Unicode braille patterns).
_ACROSS, _DOWN = 2, 4
_DOT_BITS = ((0x01, 0x02, 0x04, 0x40), (0x08, 0x10, 0x20, 0x80))
_TOGETHER = "*"
# Beyond this many widths of the curves to either side a point is left out rather than all else made tiny.
_FARTHEST = 2.0
_MOST_DECADES = 6.0


@dataclass(frozen=True)
class Drawing:
    """A picture as text: rows of the picture, then a legend.

    rows: all of the width or shorter. legend: one line a point, then what the lines are. marks: (row, column) of the
    characters that mark points, for whoever sets them off.
    """

    rows: tuple[str, ...]
    legend: tuple[str, ...]
    marks: tuple[tuple[int, int], ...] = ()

    def lines(self) -> list[str]:
        """Return picture and legend, one below the other."""
        return [*self.rows, *self.legend]


@dataclass(frozen=True)
class Axis:
    """One axis: its ends in the reader's unit and how many dots it spans."""

    low: float
    high: float
    dots: int
    logarithmic: bool = False

    def cell(self, value: float, size: int) -> int:
        """Return in which character, `size` dots each from the low end, a value lies."""
        return round(self.dot(value)) // size

    def dot(self, value: float) -> float:
        """Return where a value lies, in dots from the low end; finite for every value."""
        value, low, high = (self._even(v) for v in (value, self.low, self.high))
        return max(-1e6, min(1e6, (value - low) / (high - low) * (self.dots - 1)))

    def holds(self, value: float) -> bool:
        """Whether a value lies between the ends."""
        return self.low <= value <= self.high

    def _even(self, value: float) -> float:
        return math.log10(value) if self.logarithmic else value


def logarithmic_ticks(low: float, high: float) -> list[float]:
    """Return 1, 2 and 5 of every decade between two numbers above zero, the most important first."""
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    found = (step * 10.0**decade for step in (1.0, 5.0, 2.0) for decade in decades)
    return [value for value in found if low <= value <= high]


def even_ticks(low: float, high: float, most: int) -> list[float]:
    """Return about `most` numbers at even steps of 1, 2 or 5 times a power of ten between two numbers."""
    step = _step((high - low) / max(most, 1))
    return [count * step for count in range(math.ceil(low / step), math.floor(high / step) + 1)]


def _step(least: float) -> float:
    """Return the smallest of 1, 2, 5, 10 ... that is not below `least`."""
    decade = 10.0 ** math.floor(math.log10(least))
    return next((m * decade for m in (1.0, 2.0, 5.0) if m * decade >= least * (1 - 1e-12)), 10.0 * decade)


@dataclass
class _Canvas:
    """A field of dots, and single characters set over them."""

    width: int
    height: int
    dots: dict[tuple[int, int], int] = field(default_factory=dict)
    dashes: dict[tuple[int, int], str] = field(default_factory=dict)
    marks: dict[tuple[int, int], str] = field(default_factory=dict)

    def line(self, start: Spot, end: Spot, *, dotted: bool = False) -> None:
        """Draw a straight line between two places in dots (across, up), full or dotted."""
        clipped = _clipped(start, end, self.width * _ACROSS - 1, self.height * _DOWN - 1)
        if clipped is None:
            return
        (x, y), (to_x, to_y) = clipped
        dash = _dash(end[0] - start[0], end[1] - start[1]) if dotted else "."
        steps = max(1, math.ceil(max(abs(to_x - x), abs(to_y - y))))
        for count in range(steps + 1):
            across, up = round(x + (to_x - x) * count / steps), round(y + (to_y - y) * count / steps)
            down = self.height * _DOWN - 1 - up
            cell = down // _DOWN, across // _ACROSS
            self.dashes[cell] = dash
            if not dotted or count % 2 == 0:
                self.dots[cell] = self.dots.get(cell, 0) | _DOT_BITS[across % _ACROSS][down % _DOWN]

    def rows(self, ascii_alone: bool) -> list[str]:
        """Return the rows of text, top first."""
        return ["".join(self._cell((row, column), ascii_alone) for column in range(self.width))
                for row in range(self.height)]  # fmt: skip

    def _cell(self, cell: tuple[int, int], ascii_alone: bool) -> str:
        if cell in self.marks:
            return self.marks[cell]
        if ascii_alone:
            return self.dashes.get(cell, " ")
        return chr(0x2800 + self.dots[cell]) if cell in self.dots else " "


def _dash(across: float, up: float) -> str:
    """Return the ASCII character for a line that goes so many dots across and up."""
    steepness = abs(up) / _DOWN, abs(across) / _ACROSS
    if steepness[0] <= 0.3 * steepness[1]:
        return "-"
    if steepness[1] <= 0.3 * steepness[0]:
        return "|"
    return "/" if across * up > 0 else "\\"


def _clipped(start: Spot, end: Spot, right: float, top: float) -> tuple[Spot, Spot] | None:
    """Return the part of a line inside the field from (0, 0) to (right, top) (Liang and Barsky), None when outside."""
    (x, y), (to_x, to_y) = start, end
    first, last = 0.0, 1.0
    for along, room in ((x - to_x, x), (to_x - x, right - x), (y - to_y, y), (to_y - y, top - y)):
        if along == 0:
            if room < 0:
                return None
            continue
        part = room / along
        first, last = (max(first, part), last) if along < 0 else (first, min(last, part))
    if first > last:
        return None
    return (x + (to_x - x) * first, y + (to_y - y) * first), (x + (to_x - x) * last, y + (to_y - y) * last)


class _Units:
    """The reader's numbers of one picture."""

    def __init__(self, kind: PictureKind, dress: Dress, site: Site) -> None:
        self.across = dress.unit(kind.across)
        self.pressure = with_sense(dress.unit(Kind.PRESSURE), Sense.ABSOLUTE)
        # Every unit here is a factor and an offset: taken once, as the unit library is slow for hundreds of spots.
        self._lines = [
            (in_unit(0.0, unit, of, site), (in_unit(1e3, unit, of, site) - in_unit(0.0, unit, of, site)) / 1e3)
            for unit, of in ((self.across, kind.across), (self.pressure, Kind.PRESSURE))
        ]

    def spot(self, spot: Spot) -> Spot:
        """Return a place in the reader's units."""
        (zero_across, across), (zero_pressure, pressure) = self._lines
        return zero_across + across * spot[0], zero_pressure + pressure * spot[1]


def draw(picture: Picture, width: int, height: int, dress: Dress, site: Site, *, ascii_alone: bool = False) -> Drawing:
    """Return a picture drawn in `height` rows of `width` characters, axes included; the legend comes on top of that.

    Never raises for points that have no place: they stand in the legend alone. A field below 30 x 8 holds words only.
    """
    legend = _legend(picture, width, dress, site)
    units = _Units(picture.kind, dress, site)
    frame = _frame(picture, units)
    if width < NARROWEST or height < LOWEST or frame is None:
        why = "Nothing to draw." if frame is None else f"A picture needs {NARROWEST} x {LOWEST} characters."
        return _finished([why], legend, (), width, ascii_alone)
    title = f"{Kind.PRESSURE.value}, {units.pressure.label}, log scale"
    upward = Axis(*frame[1], (height - 4) * _DOWN, logarithmic=True)
    labels = _pressure_labels(upward)
    margin = max((len(text) for text in labels.values()), default=0) + 2
    across = Axis(*frame[0], (width - margin) * _ACROSS)
    canvas = _Canvas(width - margin, height - 4)
    together, hidden = _fill(canvas, picture, units, across, upward)
    named = f"{title}{picture.refrigerant:>{width - len(title)}}"
    rows = [named if len(title) + len(picture.refrigerant) < width else title[:width]]
    for row, text in enumerate(canvas.rows(ascii_alone)):
        label = labels.get(row)
        rows.append(f"{label or '':>{margin - 2}} {'+' if label else '|'}{text}")
    rows += _foot(across, margin, f"{picture.kind.across.value}, {units.across.label}")
    marks = tuple((row + 1, column + margin) for row, column in sorted(canvas.marks))
    legend += [*_remarks(together, hidden), _what_the_lines_are(picture, ascii_alone)]
    return _finished(rows, legend, marks, width, ascii_alone)


def _finished(
    rows: Sequence[str], legend: Iterable[str], marks: tuple[tuple[int, int], ...], width: int, ascii_alone: bool
) -> Drawing:
    plain = ascii_only if ascii_alone else str
    lines: list[str] = []
    for line in map(plain, legend):
        whole = len(line) <= width
        lines += [line] if whole else wrapped(" ".join(line.split()), max(width, 20), "  ")
    return Drawing(tuple(plain(row).rstrip() for row in rows), tuple(lines), marks)


def _frame(picture: Picture, units: _Units) -> tuple[tuple[float, float], tuple[float, float]] | None:
    """Return the ends of both axes in the reader's units, around curves and points with some air; None for nothing."""
    lines = [*picture.curves.values(), *picture.path]
    curves = [units.spot(spot) for line in picture.curves.values() for spot in line if _real(spot)]
    points = [units.spot(spot) for point in picture.points if (spot := picture.spot(point)) is not None]
    if not curves and not points and not lines:
        return None
    across = _span([x for x, _ in curves], [x for x, _ in points], least=1.0)
    logs = _span([math.log10(p) for _, p in curves if p > 0], [math.log10(p) for _, p in points if p > 0], least=0.4)
    if across is None or logs is None:
        return None
    return across, (10.0 ** max(logs[0], -12.0), 10.0 ** min(logs[1], 12.0))


def _real(spot: Spot) -> bool:
    return math.isfinite(spot[0]) and math.isfinite(spot[1]) and spot[1] > 0


def _span(curves: Sequence[float], points: Sequence[float], *, least: float) -> tuple[float, float] | None:
    """Return ends that hold the curves and the points near them, at least `least` apart."""
    core = [value for value in (curves or points) if math.isfinite(value) and abs(value) < 1e9]
    if not core:
        return None
    low, high = min(core), max(core)
    reach = max(_FARTHEST * (high - low), least)
    near = [value for value in points if low - reach <= value <= high + reach]
    low, high = min([low, *near]), max([high, *near])
    air = max(0.03 * (high - low), (least - (high - low)) / 2)
    return low - air, high + air


def _fill(
    canvas: _Canvas, picture: Picture, units: _Units, across: Axis, upward: Axis
) -> tuple[list[list[str]], list[str]]:
    """Draw all onto the canvas; return the labels that share a place, and those that have none in the frame."""

    def place(spot: Spot) -> Spot:
        x, pressure = units.spot(spot)
        return across.dot(x), upward.dot(max(pressure, 1e-300))

    for lines, dotted in ((picture.curves.values(), False), (picture.path, True)):
        for line in lines:
            spots = [place(spot) for spot in line if _real(spot)]
            for start, end in pairwise(spots):
                canvas.line(start, end, dotted=dotted)
    cells: dict[tuple[int, int], list[str]] = {}
    hidden = []
    for point in (*([picture.critical] if picture.critical else []), *picture.points):
        spot = picture.spot(point)
        x, pressure = (math.nan, math.nan) if spot is None else units.spot(spot)
        if spot is None or not across.holds(x) or not upward.holds(pressure):
            hidden.append(point.label)
            continue
        cell = canvas.height - 1 - upward.cell(pressure, _DOWN), across.cell(x, _ACROSS)
        cells.setdefault(cell, []).append(point.label)
    for cell, found in cells.items():
        canvas.marks[cell] = found[0][:1] if len(found) == 1 else _TOGETHER
    return [found for found in cells.values() if len(found) > 1], hidden


# --- axes


def _pressure_labels(upward: Axis) -> Mapping[int, str]:
    """Return the pressures that stand beside the rows."""
    labels: dict[int, str] = {}
    for value in logarithmic_ticks(upward.low, upward.high):
        row = upward.dots // _DOWN - 1 - upward.cell(value, _DOWN)
        labels.setdefault(row, _round_number(value))
    return labels


def _round_number(value: float) -> str:
    """Return a round number without needless digits and without an exponent."""
    return f"{value:.{max(0, -math.floor(math.log10(value) + 1e-9))}f}"


def _foot(across: Axis, margin: int, title: str) -> list[str]:
    """Return the rows below the field: the axis with its ticks, their numbers, and what they are."""
    width = across.dots // _ACROSS
    rule, numbers = ["-"] * width, [" "] * (width + margin)
    ticks = even_ticks(across.low, across.high, max(2, width // 9))
    step = ticks[1] - ticks[0] if len(ticks) > 1 else 1.0
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    for value in ticks:
        column = across.cell(value, _ACROSS)
        text = number(value, decimals)
        start = max(0, min(margin + column - len(text) // 2, len(numbers) - len(text)))
        rule[column] = "+"
        free = all(cell == " " for cell in numbers[max(0, start - 1) : start + len(text) + 1])
        if free and len(text) <= len(numbers):
            numbers[start : start + len(text)] = text
    return [" " * (margin - 1) + "+" + "".join(rule), "".join(numbers), f"{title[: width + margin]:>{width + margin}}"]


# --- words


def _legend(picture: Picture, width: int, dress: Dress, site: Site) -> list[str]:
    """Return one line a point: label, place, temperature, pressure gauge and absolute, enthalpy or difference."""
    points = [*picture.points, *([picture.critical] if picture.critical else [])]
    rows = [_cells(picture.kind, point, dress, site) for point in points]
    columns = list(zip(*rows, strict=True))
    order = [place for place, column in enumerate(columns) if any(column)]
    # The absolute form of a pressure is the first to go where the line is too narrow for all.
    while sum(max(map(len, columns[place])) + 2 for place in order) > width and 3 in order:
        order.remove(3)
    wide = [max(map(len, column)) for column in columns]
    lines = []
    for row in rows:
        # Words stand flush left, numbers flush right.
        cells = [f"{row[n]:<{wide[n]}}" if n in (0, 5) else f"{row[n]:>{wide[n]}}" for n in order]
        lines.append("  ".join(cells).rstrip())
    return lines


def _cells(kind: PictureKind, point: PicturePoint, dress: Dress, site: Site) -> tuple[str, ...]:
    temperature = "" if point.temperature is None else shown(point.temperature, Kind.TEMPERATURE, dress, site)
    gauge, absolute = gauge_and_absolute(point.pressure, dress, site)
    if dress.bare is Sense.ABSOLUTE:
        gauge, absolute = absolute, gauge
    enthalpy = ""
    if kind is PictureKind.PRESSURE_ENTHALPY and point.enthalpy is not None and point.label != "C":
        enthalpy = shown(point.enthalpy, Kind.SPECIFIC_ENTHALPY, dress, site)
    beside = ""
    if point.difference is not None:
        words, apart = point.difference
        beside = f"{words} {both_differences(apart, dress, site)[0]}"
    return f"{point.label} {point.words}", temperature, gauge, absolute, enthalpy, beside


def _remarks(together: Sequence[Sequence[str]], hidden: Sequence[str]) -> list[str]:
    lines = [f"{_TOGETHER} {' and '.join(labels)} fall on one spot." for labels in together]
    return [*lines, f"Outside the picture: {', '.join(hidden)}."] if hidden else lines


def _what_the_lines_are(picture: Picture, ascii_alone: bool) -> str:
    curve, path = ("Dots", "Dashes") if ascii_alone else ("Full line", "Dotted")
    bubble, dew = picture.curves.get("bubble", ()), picture.curves.get("dew", ())
    one = picture.kind is PictureKind.PRESSURE_TEMPERATURE and bubble == dew
    words = f"{curve}: {'saturation' if one else 'bubble left, dew right'}"
    if picture.critical is not None:
        words += ", up to C"
    if not picture.path:
        return f"{words}."
    measured = any(point.difference for point in picture.points)
    return f"{words}. {path}: {'from the reading to its curve' if measured else 'from point to point'}."
