"""How long a state takes beside the plain flash of the property library, in one run, as ratios.

    python tests/bench/properties.py [--json]

Blends: p-T of one phase, p-T inside the glide, p-h and p-s everywhere, on the same random points; a
superheat-and-subcooling check (dew of one pressure, bubble of another, and the two differences) against the two raw
saturation calls it needs; pure fluids the same; the time to lay both curves of a refrigerant; a fresh process up to
its first answer against a fresh `import CoolProp`.
Points that the plain flash cannot solve are left out of both sides and counted.
"""

from __future__ import annotations

import json
import os
import random
import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from typing import Any

from gaugeside.refrigerants import Fluid, State, all_refrigerants, find, library, open_fluid
from gaugeside.refrigerants.fluid import Fluid as NewFluid
from gaugeside.refrigerants.states import Datum

BLENDS = ("R-407C", "R-448A", "R-449A", "R-454B", "R-454C", "R-455A", "R-513A", "R-410A")
PURE = ("R-134a", "R-22", "R-32", "R-290", "R-717", "R-744", "R-1234yf")
POINTS = 12
REPEATS = 30


def sample(fluid: Fluid, dice: random.Random) -> list[State]:
    """Superheated vapour, subcooled liquid and states between, as met on site."""
    states = []
    for i in range(POINTS):
        temperature = dice.uniform(243.15, min(323.15, fluid.critical_temperature - 6.0))
        if i % 3 == 0:
            states.append(
                fluid.state_superheat(fluid.dew_at_temperature(temperature).pressure, dice.uniform(2.0, 40.0))
            )
        elif i % 3 == 1:
            pressure = fluid.bubble_at_temperature(temperature).pressure
            states.append(fluid.state_subcooling(pressure, dice.uniform(1.0, 10.0)))
        else:
            states.append(fluid.state_tx(temperature, dice.uniform(0.1, 0.9)))
    return states


def seconds(call: Callable[[], Any], repeats: int = 1) -> float:
    """Seconds of one call, the mean of some."""
    start = time.perf_counter()
    for _ in range(repeats):
        call()
    return (time.perf_counter() - start) / repeats


def raw(plain: Any, inputs: int, first: float, second: float) -> tuple[float, ...] | None:
    """A plain flash with the reading of what a state carries, None where it fails."""
    try:
        plain.update(inputs, first, second)
        return plain.T(), plain.p(), plain.hmass(), plain.smass(), plain.rhomass()
    except ValueError:
        return None


def shifts(fluid: Fluid, plain: Any) -> tuple[float, float]:
    """What separates the library's enthalpy and entropy from ours, at one easy point."""
    state = fluid.state_superheat(fluid.dew_at_temperature(260.0).pressure, 20.0)
    values = raw(plain, library.PRESSURE_TEMPERATURE, state.pressure, state.temperature)
    assert values is not None
    return state.enthalpy - values[2], state.entropy - values[3]


def flash_ratios(name: str) -> dict[str, float]:
    """Plain flash time over ours, for p-T, p-h and p-s on the same points; and how many it could not solve."""
    one = find(name)
    fluid, plain = open_fluid(one), library.open_state(one.library_fluid)
    enthalpy, entropy = shifts(fluid, plain)
    states = sample(fluid, random.Random(name))
    inside = [state for state in states if state.vapour_fraction is not None]
    outside = [state for state in states if state.vapour_fraction is None]
    kinds: dict[str, tuple[Callable[[State], Any], Callable[[State], Any]]] = {
        "pt": (
            lambda s: fluid.state_pt(s.pressure, s.temperature),
            lambda s: raw(plain, library.PRESSURE_TEMPERATURE, s.pressure, s.temperature),
        ),
        "ph": (
            lambda s: fluid.state_ph(s.pressure, s.enthalpy),
            lambda s: raw(plain, library.ENTHALPY_PRESSURE, s.enthalpy - enthalpy, s.pressure),
        ),
        "ps": (
            lambda s: fluid.state_ps(s.pressure, s.entropy),
            lambda s: raw(plain, library.PRESSURE_ENTROPY, s.pressure, s.entropy - entropy),
        ),
    }
    ratios = {}
    unsolved = 0
    # Between bubble and dew of an azeotrope pressure and temperature fix no state.
    sets = {"pt": outside, "pt_in_glide": [] if one.nature == "azeotrope" else inside, "ph": states, "ps": states}
    for kind, chosen in sets.items():
        own, theirs = kinds[kind[:2]]
        slow, fast = 0.0, 0.0
        for state in chosen:
            own(state)  # the curve is laid before the clock runs
            start = time.perf_counter()
            solved = theirs(state)
            spent = time.perf_counter() - start
            if solved is None:
                unsolved += 1
                continue
            slow += spent
            fast += seconds(lambda own=own, state=state: own(state), 20)
        if fast:
            ratios[kind] = slow / fast
    return ratios | {"unsolved": unsolved}


def check_ratio(name: str) -> float:
    """A superheat-and-subcooling check over the two raw saturation calls it stands on."""
    one = find(name)
    fluid, plain = open_fluid(one), library.open_state(one.library_fluid)
    suction = fluid.dew_at_temperature(263.15).pressure
    liquid = fluid.bubble_at_temperature(min(311.15, fluid.critical_temperature - 8.0)).pressure

    def own() -> tuple[float, float]:
        return 278.15 - fluid.dew_at_pressure(suction).temperature, fluid.bubble_at_pressure(
            liquid
        ).temperature - 305.15

    def theirs() -> tuple[float, float]:
        plain.update(library.PRESSURE_QUALITY, suction, 1.0)
        superheat = 278.15 - plain.T()
        plain.update(library.PRESSURE_QUALITY, liquid, 0.0)
        return superheat, plain.T() - 305.15

    own(), theirs()
    pairs = [(seconds(own, 5), seconds(theirs, 5)) for _ in range(REPEATS)]
    return statistics.median(a for a, _ in pairs) / statistics.median(b for _, b in pairs)


def curve_times() -> tuple[float, str]:
    """The longest time to lay both curves of any blend [s], and of which."""
    worst = (0.0, "")
    for one in all_refrigerants():
        if one.modelled and one.is_blend:
            fluid = NewFluid(one, Datum.IIR)
            start = time.perf_counter()
            assert fluid._model.bubble.highest.pressure > 0.0
            assert fluid._model.bubble.lowest.pressure > 0.0
            assert fluid._model.dew.highest.pressure > 0.0
            assert fluid._model.dew.lowest.pressure > 0.0
            worst = max(worst, (time.perf_counter() - start, one.designation))
    return worst


def fresh_process_ratio() -> float:
    """A fresh process up to its first answer over a fresh process that only imports the library."""
    environment = {k: v for k, v in os.environ.items() if not k.startswith("COOLPROP")}
    answer = (
        "from gaugeside.refrigerants import find, open_fluid\n"
        "f = open_fluid(find('R-448A')); f.dew_at_pressure(3.6e5); f.bubble_at_pressure(15e5)"
    )

    def run(code: str) -> None:
        subprocess.run([sys.executable, "-c", code], env=environment, check=True, stdout=subprocess.DEVNULL)

    run(answer)
    pairs = [(seconds(lambda: run(answer)), seconds(lambda: run("import CoolProp"))) for _ in range(5)]
    return statistics.median(a for a, _ in pairs) / statistics.median(b for _, b in pairs)


def main() -> None:
    """Measure and print a table, or the figures."""
    figures: dict[str, float] = {}
    lines = [
        "blend       p-T x    p-h x    p-s x  p-T in glide x   check / two raw calls   unsolved by the plain flash"
    ]
    for name in BLENDS:
        ratios, check = flash_ratios(name), check_ratio(name)
        for kind in ("pt", "pt_in_glide", "ph", "ps"):
            if kind in ratios:
                figures[f"{name}_{kind}_times_faster"] = ratios[kind]
        figures[f"{name}_check_over_raw"] = check
        lines.append(
            f"{name:8} {ratios['pt']:8.0f} {ratios['ph']:8.0f} {ratios['ps']:8.0f}"
            f" {ratios.get('pt_in_glide', float('nan')):12.1f} {check:14.2f}"
            f" {ratios['unsolved']:20.0f}"
        )
    for kind in ("pt", "ph", "ps"):
        figures[f"least_{kind}_times_faster"] = min(figures[f"{name}_{kind}_times_faster"] for name in BLENDS)
    figures["largest_blend_check_over_raw"] = max(figures[f"{name}_check_over_raw"] for name in BLENDS)
    lines.append("pure        check / two raw calls")
    for name in PURE:
        figures[f"{name}_check_over_raw"] = check_ratio(name)
        lines.append(f"{name:8} {figures[f'{name}_check_over_raw']:12.2f}")
    figures["largest_pure_check_over_raw"] = max(figures[f"{name}_check_over_raw"] for name in PURE)
    figures["slowest_curves_seconds"], slowest = curve_times()
    lines.append(f"both curves of {slowest}, the slowest blend: {figures['slowest_curves_seconds']:.3f} s")
    figures["first_answer_over_import"] = fresh_process_ratio()
    lines.append(f"fresh process to first answer / import CoolProp: {figures['first_answer_over_import']:.2f}")
    print(json.dumps({"figures": figures}) if "--json" in sys.argv[1:] else "\n".join(lines))


if __name__ == "__main__":
    main()
