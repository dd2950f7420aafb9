"""Saturation of the whole catalogue: how many points, how many holes, how well the phases balance.

    python tests/bench/sweep.py [--json]

Every half kelvin from -60 °C (a kelvin above a triple point, or where the dew pressure is 1 kPa) to 1 K below the
critical temperature, bubble and dew of every modelled refrigerant. A hole is a refused point, a pressure
that does not rise with temperature, or a bubble pressure below the dew pressure.
"""

from __future__ import annotations

import json
import sys
import time

from gaugeside.errors import Refusal
from gaugeside.refrigerants import Fluid, all_refrigerants, open_fluid
from gaugeside.refrigerants.limits import MARGIN

STEP = 0.5
COLDEST = 213.15
LEAST_PRESSURE = 1000.0


def temperatures(fluid: Fluid) -> list[float]:
    """The temperatures of the sweep [K]."""
    start = max(COLDEST, fluid.minimum_temperature + (0.0 if fluid.refrigerant.is_blend else 1.0))
    end = fluid.critical_temperature - MARGIN
    return [start + STEP * i for i in range(int((end - start) / STEP) + 1)] if end > start else []


def swept(fluid: Fluid) -> tuple[int, list[str]]:
    """Number of points and the holes, in words."""
    points, holes, before = 0, [], (0.0, 0.0)
    for temperature in temperatures(fluid):
        try:
            bubble, dew = (
                fluid.bubble_at_temperature(temperature).pressure,
                fluid.dew_at_temperature(temperature).pressure,
            )
        except Refusal as refusal:
            holes.append(f"{temperature:.2f} K: {refusal.message}")
            continue
        if dew < LEAST_PRESSURE:
            continue
        points += 2
        if not (bubble > before[0] and dew > before[1] and bubble >= dew * (1 - 1e-7)):
            holes.append(
                f"{temperature:.2f} K: {bubble:.1f} and {dew:.1f} Pa after {before[0]:.1f} and {before[1]:.1f} Pa"
            )
        before = (bubble, dew)
    return points, holes


def main() -> None:
    """Sweep, print a table or the figures."""
    as_json = "--json" in sys.argv[1:]
    figures = {"refrigerants": 0, "points": 0, "holes": 0, "blends": 0, "slowest_seconds": 0.0, "seconds": 0.0}
    began = time.perf_counter()
    modelled = [one for one in all_refrigerants() if one.modelled]
    for one in modelled:
        start = time.perf_counter()
        points, holes = swept(open_fluid(one))
        spent = time.perf_counter() - start
        figures["refrigerants"] += 1
        figures["blends"] += int(one.is_blend)
        figures["points"] += points
        figures["holes"] += len(holes)
        figures["slowest_seconds"] = max(figures["slowest_seconds"], spent)
        if not as_json:
            print(f"{one.designation:14} {points:6} points  {len(holes):3} holes  {1e3 * spent:7.1f} ms")
            for hole in holes[:3]:
                print(f"    {hole}")
    figures["seconds"] = time.perf_counter() - began
    if as_json:
        print(json.dumps({"figures": figures}))
    else:
        print(
            f"{figures['refrigerants']} refrigerants, {figures['points']} points, {figures['holes']} holes,"
            f" {figures['seconds']:.1f} s"
        )


if __name__ == "__main__":
    main()
