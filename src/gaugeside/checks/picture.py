"""What a picture of an answer is: saturation curves, the points of the readings, and the path between them, in SI.

A picture is built from an answer's own numbers and from the fluid's curves; it computes no state of its own.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import asdict, dataclass
from enum import StrEnum
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from gaugeside.checks.sheet import Answer
from gaugeside.errors import Refusal
from gaugeside.quantities import SI_UNIT, Kind

if TYPE_CHECKING:
    from gaugeside.refrigerants import Fluid, State

# Along the axis across (enthalpy [J/kg] or temperature [K]), and the absolute pressure [Pa].
Spot = tuple[float, float]

# The way of the refrigerant; a place may be skipped where the sheet takes it as one with its neighbour.
FLOW = ("suction", "discharge", "liquid", "after valve", "evaporator outlet")
_SKIPPED = {"evaporator outlet"}
_SAMPLES = 40
# Nearer the critical temperature than this [K] the curves are joined to the critical point by a straight line.
_TOP = 1.0


class PictureKind(StrEnum):
    """What stands along the axis across; pressure always runs upward."""

    PRESSURE_ENTHALPY = "pressure-enthalpy"
    PRESSURE_TEMPERATURE = "pressure-temperature"

    @property
    def across(self) -> Kind:
        """The kind of quantity along the axis across."""
        return Kind.SPECIFIC_ENTHALPY if self is PictureKind.PRESSURE_ENTHALPY else Kind.TEMPERATURE


@dataclass(frozen=True)
class PicturePoint:
    """One point: the digit that marks it, its place in words, and its state; pressure [Pa], [K], [J/kg].

    difference: what lies between the point and the curve, in words, and how much [K].
    """

    label: str
    words: str
    pressure: float
    temperature: float | None = None
    enthalpy: float | None = None
    difference: tuple[str, float] | None = None


@dataclass(frozen=True)
class Picture:
    """Curves by name ("bubble", "dew"), the critical point, the points and the lines that join them; SI."""

    kind: PictureKind
    refrigerant: str
    curves: Mapping[str, tuple[Spot, ...]]
    critical: PicturePoint | None
    points: tuple[PicturePoint, ...]
    path: tuple[tuple[Spot, ...], ...]

    def spot(self, point: PicturePoint) -> Spot | None:
        """Return where a point lies, None where it has no place in a picture."""
        across = point.enthalpy if self.kind is PictureKind.PRESSURE_ENTHALPY else point.temperature
        if across is None or not math.isfinite(across) or not math.isfinite(point.pressure) or point.pressure <= 0:
            return None
        return across, point.pressure

    def plain(self) -> dict[str, Any]:
        """Return the picture as JSON types, with the units of its numbers."""
        return {
            "kind": self.kind.value,
            "refrigerant": self.refrigerant,
            "units": {"pressure": "Pa", "across": SI_UNIT[self.kind.across], "temperature": "K", "enthalpy": "J/kg"},
            "curves": {name: [list(spot) for spot in curve] for name, curve in self.curves.items()},
            "critical": None if self.critical is None else _plain_point(self.critical),
            "points": [_plain_point(point) for point in self.points],
            "path": [[list(spot) for spot in line] for line in self.path],
        }

    @classmethod
    def from_plain(cls, plain: Mapping[str, Any]) -> Picture:
        """Return the picture that `plain` gave; KeyError, TypeError or ValueError when it did not."""
        critical = plain["critical"]
        return cls(
            kind=PictureKind(plain["kind"]),
            refrigerant=plain["refrigerant"],
            curves={name: _line(curve) for name, curve in plain["curves"].items()},
            critical=None if critical is None else _point(critical),
            points=tuple(_point(point) for point in plain["points"]),
            path=tuple(_line(line) for line in plain["path"]),
        )


def _plain_point(point: PicturePoint) -> dict[str, Any]:
    plain = asdict(point)
    return {**plain, "difference": None if point.difference is None else list(point.difference)}


def _point(plain: Mapping[str, Any]) -> PicturePoint:
    difference = plain["difference"]
    return PicturePoint(**{**plain, "difference": None if difference is None else (difference[0], difference[1])})


def _line(plain: Sequence[Sequence[float]]) -> tuple[Spot, ...]:
    return tuple((across, pressure) for across, pressure in plain)


def picture(fluid: Fluid, answer: Answer, values: Mapping[str, Any]) -> Picture | None:
    """Return the picture of an answer to the SI readings `values`; None where there is nothing to draw."""
    draw = DRAWN.get(answer.check)
    if draw is None:
        return None
    kind, points, path = draw(answer, values)
    drawable = tuple(point for point in points if point.pressure > 0 and math.isfinite(point.pressure))
    if not drawable:
        return None
    pressures = [point.pressure for point in drawable]
    floor = min(_rung(min(pressures) / 1.25), _rung(fluid.critical_pressure / 10))
    # A machine is seen under the whole dome; readings against the two curves, which lie close, from nearby.
    ceiling = math.inf
    if kind is PictureKind.PRESSURE_TEMPERATURE:
        air = 1.25 if max(pressures) > 2 * min(pressures) else 1.6
        floor, ceiling = _rung(min(pressures) / air), _rung(max(pressures) * air, up=True)
        floor = min(floor, fluid.critical_pressure / 2)
    curves, critical = _dome(fluid, kind, floor, ceiling)
    return Picture(kind, answer.refrigerant, curves, critical, drawable, tuple(path))


# --- points


Drawn = tuple[PictureKind, list[PicturePoint], list[tuple[Spot, ...]]]


def _number(findings: Mapping[str, float | str], name: str) -> float | None:
    value = findings.get(name)
    return float(value) if isinstance(value, int | float) and math.isfinite(value) else None


def _saturation(answer: Answer, values: Mapping[str, Any]) -> Drawn:
    spots = []
    for side in ("bubble", "dew"):
        temperature = _number(answer.findings, f"{side}_temperature")
        pressure = _number(answer.findings, f"{side}_pressure")
        if temperature is not None and pressure is not None:
            spots.append((side, temperature, pressure))
    if len(spots) == 2 and _alike(spots[0][1:], spots[1][1:]):
        spots = [("bubble and dew", *spots[0][1:])]
    points = [PicturePoint(str(i), words, p, temperature) for i, (words, temperature, p) in enumerate(spots, 1)]
    path = [tuple((temperature, p) for _, temperature, p in spots)] if len(spots) == 2 else []
    return PictureKind.PRESSURE_TEMPERATURE, points, path


def _alike(first: tuple[float, float], second: tuple[float, float]) -> bool:
    return all(math.isclose(a, b, rel_tol=1e-6) for a, b in zip(first, second, strict=True))


def _superheat(answer: Answer, values: Mapping[str, Any]) -> Drawn:
    """Each pressure with its pipe temperature, and a line from there to the saturation it counts from."""
    points: list[PicturePoint] = []
    path: list[tuple[Spot, ...]] = []
    for place, difference, curve in (
        ("suction", "superheat", "dew"),
        ("discharge", "discharge_superheat", "dew"),
        ("liquid", "subcooling", "bubble"),
    ):
        pressure, temperature = _at_clamp(values, place), values.get(f"{place}_temperature")
        saturated = _number(answer.findings, f"saturated_{place}_temperature")
        if pressure is None or (temperature is None and saturated is None):
            continue
        label = str(len(points) + 1)
        if temperature is None:
            points.append(PicturePoint(label, f"{place}, {curve} point", pressure, saturated))
            continue
        apart = _number(answer.findings, difference)
        said = None if apart is None else (difference.removeprefix("discharge_"), apart)
        points.append(PicturePoint(label, f"{place} pipe", pressure, temperature, difference=said))
        if saturated is not None:
            path.append(((temperature, pressure), (saturated, pressure)))
    return PictureKind.PRESSURE_TEMPERATURE, points, path


def _at_clamp(values: Mapping[str, Any], place: str) -> float | None:
    """Return the pressure [Pa] where the pipe temperature is taken: the gauge's, and the drop typed between."""
    pressure, drop = values.get(f"{place}_pressure"), values.get(f"{place}_pressure_drop") or 0.0
    return None if pressure is None else float(pressure + (drop if place == "suction" else -drop))


def _component(answer: Answer, values: Mapping[str, Any]) -> Drawn:
    found = answer.findings
    streams = [("inlet", "outlet")]
    if values.get("component") == "liquid-suction":
        streams.append(("suction_inlet", "suction_outlet"))
    points: list[PicturePoint] = []
    path: list[tuple[Spot, ...]] = []
    for stream in streams:
        spots: list[Spot] = []
        for name in stream:
            pressure = _number(found, f"{name}_pressure") or _typed_pressure(values, stream, name)
            enthalpy = _number(found, f"{name}_enthalpy")
            if pressure is None or enthalpy is None:
                continue
            words = name.replace("_", " ") if len(streams) == 1 or "_" in name else f"liquid {name}"
            temperature = _number(found, f"{name}_temperature")
            points.append(PicturePoint(str(len(points) + 1), words, pressure, temperature, enthalpy))
            spots.append((enthalpy, pressure))
        if len(spots) == 2:
            path.append(tuple(spots))
    return PictureKind.PRESSURE_ENTHALPY, points, path


def _typed_pressure(values: Mapping[str, Any], stream: Sequence[str], name: str) -> float | None:
    """Return the pressure [Pa] typed at one end of a stream, else at its other end, as the component takes it."""
    for place in (name, *stream):
        pressure = (values.get(place) or {}).get("pressure")
        if pressure is not None:
            return float(pressure)
    return None


def _machine(answer: Answer, values: Mapping[str, Any]) -> Drawn:
    points: list[PicturePoint] = []
    spots: dict[str, Spot] = {}
    for state in _states(answer):
        words, pressure, enthalpy = str(state["place"]), float(state["pressure"]), float(state["enthalpy"])
        points.append(PicturePoint(str(len(points) + 1), words, pressure, float(state["temperature"]), enthalpy))
        spots[words] = (enthalpy, pressure)
    return PictureKind.PRESSURE_ENTHALPY, points, _round(spots)


def _states(answer: Answer) -> list[dict[str, float | str]]:
    """Return the rows of the table that tells the states, by the names of its columns."""
    for table in answer.tables:
        names = [label for label, _ in table.columns]
        if {"place", "pressure", "temperature", "enthalpy"} <= set(names):
            return [dict(zip(names, row, strict=True)) for row in table.rows]
    return []


def _round(spots: Mapping[str, Spot]) -> list[tuple[Spot, ...]]:
    """Return the lines that join neighbours in the order of the flow; an unknown place leaves a gap."""
    places = [place for place in FLOW if place in spots or place not in _SKIPPED]
    ring = zip(places, [*places[1:], places[0]], strict=True)
    return [(spots[here], spots[there]) for here, there in ring if here in spots and there in spots]


DRAWN: dict[str, Callable[[Answer, Mapping[str, Any]], Drawn]] = {
    "saturation": _saturation,
    "superheat": _superheat,
    "component": _component,
    "machine": _machine,
}


# --- curves


def _rung(pressure: float, *, up: bool = False) -> float:
    """Return the nearest pressure [Pa] of 1, 2, 5, 10 ... below (or above): a frame that keeps still while typing."""
    decade = 10.0 ** math.floor(math.log10(pressure))
    rungs = [step * decade for step in (1.0, 2.0, 5.0, 10.0)]
    return next(r for r in rungs if r >= pressure) if up else max(r for r in rungs if r <= pressure)


@lru_cache(maxsize=16)
def _dome(
    fluid: Fluid, kind: PictureKind, floor: float, ceiling: float
) -> tuple[dict[str, tuple[Spot, ...]], PicturePoint | None]:
    """Return both curves between two pressures [Pa], and the critical point where the ceiling is above it."""
    whole = ceiling >= fluid.critical_pressure
    sides: list[tuple[str, Callable[[float], State], Callable[[float], State]]] = [
        ("bubble", fluid.bubble_at_temperature, fluid.bubble_at_pressure),
        ("dew", fluid.dew_at_temperature, fluid.dew_at_pressure),
    ]
    samples: dict[str, list[State]] = {}
    for name, at_temperature, at_pressure in sides:
        first = _temperature(at_pressure, floor, fluid.minimum_temperature)
        last = fluid.critical_temperature - _TOP
        if not whole:
            last = _temperature(at_pressure, ceiling, last)
        samples[name] = _sampled(at_temperature, first, last)
    critical = _critical(fluid, samples) if whole else None
    curves = {}
    for name, states in samples.items():
        spots = [_spot(kind, state) for state in states]
        if critical is not None:
            at = critical.enthalpy if kind is PictureKind.PRESSURE_ENTHALPY else critical.temperature
            spots += [(at, critical.pressure)] if at is not None else []
        curves[name] = tuple(spots)
    return curves, critical


def _spot(kind: PictureKind, state: State) -> Spot:
    return (state.enthalpy if kind is PictureKind.PRESSURE_ENTHALPY else state.temperature), state.pressure


def _temperature(at_pressure: Callable[[float], State], pressure: float, otherwise: float) -> float:
    try:
        return at_pressure(pressure).temperature
    except Refusal:
        return otherwise


def _sampled(at_temperature: Callable[[float], State], first: float, last: float) -> list[State]:
    """Return states from the first to the last temperature [K], denser towards the last, where curves bend."""
    states = []
    for number in range(_SAMPLES):
        part = 1.0 - number / (_SAMPLES - 1)
        try:
            states.append(at_temperature(last - (last - first) * part * part))
        except Refusal:
            continue  # Beyond the curve's end, or within the model's own margin of the critical point.
    return states


def _critical(fluid: Fluid, samples: Mapping[str, Sequence[State]]) -> PicturePoint:
    """Return the critical point; its enthalpy is where the mean of liquid and vapour leads, as the law of the
    rectilinear diameter has it for densities: good to the width of a character.
    """
    bubble, dew = samples["bubble"], samples["dew"]
    enthalpy = None
    if bubble and dew:
        nearest = min(bubble[-1].temperature, dew[-1].temperature)
        try:
            means = [
                (fluid.bubble_at_temperature(t).enthalpy + fluid.dew_at_temperature(t).enthalpy) / 2
                for t in (nearest, nearest - 2.0)
            ]
            enthalpy = means[0] + (means[0] - means[1]) * (fluid.critical_temperature - nearest) / 2.0
        except Refusal:
            pass
    return PicturePoint("C", "critical point", fluid.critical_pressure, fluid.critical_temperature, enthalpy)
