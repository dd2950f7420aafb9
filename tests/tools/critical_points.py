"""Write the critical points and lowest temperatures of the models into the catalogue's data file.

    python tests/tools/critical_points.py [DESIGNATION ...]

The property library's search for the critical points of a blend takes up to half a minute each, which is
why the results are carried as data. Where it finds several stable points, or none, the end of the bubble
curve decides. The lowest temperature of a blend is where its dew pressure falls to 1 kPa.
"""

from __future__ import annotations

import math
import re
import sys
import time
from dataclasses import replace

from gaugeside.errors import NotModelled
from gaugeside.refrigerants import Refrigerant, all_refrigerants, library
from gaugeside.refrigerants.catalogue import DATA
from gaugeside.refrigerants.model import LOWEST_PRESSURE, Model

UNKNOWN = {"critical_temperature": 0.0, "critical_pressure": 0.0, "minimum_temperature": 0.0}


def library_points(refrigerant: Refrigerant) -> list[tuple[float, float]]:
    """Critical points the library calls stable, temperature [K] and pressure [Pa]."""
    predefined = refrigerant.library_fluid.endswith(".mix")
    fractions = None if predefined else [share for _, share in refrigerant.composition]
    state = library.open_state(refrigerant.library_fluid, fractions)
    try:
        return [(p.T, p.p) for p in state.all_critical_points() if p.stable and 0.0 < p.p < 5e7]
    except ValueError as error:
        print(f"  library: {error}")
        return []


def blend_limits(refrigerant: Refrigerant) -> tuple[float, float, float]:
    """Critical temperature [K], critical pressure [Pa] and lowest temperature [K] of a blend."""
    points = library_points(refrigerant)
    try:
        traced = Model(replace(refrigerant, **UNKNOWN)).limits
    except NotModelled:
        temperature, pressure = max(points)
        print("  curve not followed to its end; the hottest stable point taken")
    else:
        ends = (traced.critical_temperature, traced.critical_pressure)
        temperature, pressure = min(points, key=lambda p: abs(p[0] - ends[0]), default=ends)
        if abs(temperature - ends[0]) > 0.3:
            print(f"  library {temperature:.2f} K, curve {ends[0]:.2f} K: the curve's end taken")
            temperature, pressure = ends
    known = replace(
        refrigerant,
        critical_temperature=temperature,
        critical_pressure=pressure,
        minimum_temperature=0.33 * temperature,
    )
    dew = Model(known).dew
    reached = dew.reaches_pressure(LOWEST_PRESSURE)
    floor = dew.at_pressure(LOWEST_PRESSURE).temperature if reached else dew.lowest.temperature
    return temperature, pressure, floor


def pure_limits(refrigerant: Refrigerant) -> tuple[float, float, float]:
    """Critical temperature [K], critical pressure [Pa] and lowest temperature [K] of a pure fluid."""
    state = library.open_state(refrigerant.library_fluid)
    return state.T_critical(), state.p_critical(), max(state.Ttriple(), state.Tmin())


def rounded_up(temperature: float) -> float:
    """A lowest temperature to two decimals, never colder than it is."""
    return math.ceil(temperature * 100.0 - 1e-6) / 100.0


def written(text: str, designation: str, limits: tuple[float, float, float]) -> str:
    """The data file with the two lines of one refrigerant replaced."""
    header = f"[{designation}]" if re.fullmatch(r"[A-Za-z0-9_-]+", designation) else f'["{designation}"]'
    start = text.index(f"\n{header}\n") + 1
    end = text.find("\n\n", start)
    table = text[start : end if end >= 0 else len(text)].rstrip()
    table = re.sub(r"\n(critical|floor) = [^\n]*", "", table)
    table += f"\ncritical = [{limits[0]:.3f}, {limits[1]:.0f}]\nfloor = {limits[2]:.2f}"
    return text[:start] + table + (text[end:] if end >= 0 else "\n")


def main() -> None:
    """Go through the catalogue, or the designations given."""
    for refrigerant in all_refrigerants():
        if not refrigerant.modelled or (sys.argv[1:] and refrigerant.designation not in sys.argv[1:]):
            continue
        began = time.perf_counter()
        limits = blend_limits(refrigerant) if refrigerant.is_blend else pure_limits(refrigerant)
        DATA.write_text(written(DATA.read_text(encoding="utf-8"), refrigerant.designation, limits), encoding="utf-8")
        print(
            f"{refrigerant.designation:14} {limits[0]:8.3f} K {limits[1] / 1e5:8.3f} bar  floor {limits[2]:7.2f} K"
            f"  {time.perf_counter() - began:5.1f} s",
            flush=True,
        )


if __name__ == "__main__":
    main()
