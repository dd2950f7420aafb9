"""The secondary side: heat taken up or given off by water, a solution or moist air, or what is missing for it.

Liquids: Q + P = m (h_out - h_in). Moist air, per kilogram of dry air: Q + P = m_da (h_out - h_in + (W_in - W_out) h_w),
h_w the enthalpy of the water that leaves (or is taken up) at the outlet temperature. Q is the heat into the stream
through the wall, P the power of a fan or pump between the two readings. Source: ASHRAE Handbook Fundamentals,
chapter on psychrometrics, cooling and dehumidification; the first law for steady flow.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from gaugeside.checks.sheet import Check, Outcome, Surroundings, choice, either, finding, reading, words
from gaugeside.checks.stream_sides import Side, open_side
from gaugeside.errors import Refusal
from gaugeside.quantities import Kind
from gaugeside.refrigerants.secondary import AIR_NAMES, SOLUTIONS, Medium, find_medium

_DIRECTIONS = ("absorbed", "given off")
_PLACES = ("inlet", "outlet")


@dataclass(frozen=True)
class Readings:
    """What is typed; what is wanted stays blank."""

    medium: str | None = words(
        "medium",
        "water, air, propylene glycol 30 %, ...; concentration by mass.",
        positional=True,
    )
    inlet: float | None = reading("inlet", Kind.TEMPERATURE, "Where the medium enters; blank when it is wanted.")
    outlet: float | None = reading("outlet", Kind.TEMPERATURE, "Where the medium leaves; blank when it is wanted.")
    flow: Mapping[str, float] | None = either(
        "flow", (Kind.MASS_FLOW, Kind.VOLUME_FLOW), "Mass or volume flow; blank when it is wanted."
    )
    flow_at: str | None = choice("flow measured at", _PLACES, "Where a volume flow is measured; the inlet if blank.")
    heat: float | None = reading("heat", Kind.POWER, "Through the wall, without a sign; blank when it is wanted.")
    heat_direction: str | None = choice(
        "heat is",
        ("not said", *_DIRECTIONS),
        "By the medium; needed when heat is typed and a temperature wanted.",
    )
    fan_or_pump_heat: float | None = reading(
        "fan or pump heat", Kind.POWER, "Heats the stream between the two readings; blank: none."
    )
    pressure: float | None = reading(
        "pressure",
        Kind.PRESSURE,
        "Of the medium, for its boiling point; blank: the site's atmosphere.",
    )
    inlet_relative_humidity: float | None = reading(
        "inlet humidity", Kind.FRACTION, "Relative humidity of the entering air.", only=AIR_NAMES
    )
    inlet_wet_bulb: float | None = reading(
        "inlet wet bulb", Kind.TEMPERATURE, "Instead of the inlet humidity.", only=AIR_NAMES
    )
    outlet_relative_humidity: float | None = reading(
        "outlet humidity", Kind.FRACTION, "Relative humidity of the leaving air.", only=AIR_NAMES
    )
    outlet_wet_bulb: float | None = reading(
        "outlet wet bulb", Kind.TEMPERATURE, "Instead of the outlet humidity.", only=AIR_NAMES
    )


@dataclass
class Findings:
    """What follows, SI."""

    heat_absorbed: float | None = finding("heat absorbed", Kind.POWER, main=True)
    heat_rejected: float | None = finding("heat given off", Kind.POWER, main=True)
    sensible_heat: float | None = finding("sensible heat", Kind.POWER)
    latent_heat: float | None = finding("latent heat", Kind.POWER)
    sensible_heat_ratio: float | None = finding("sensible heat ratio", Kind.FRACTION)
    mass_flow: float | None = finding("mass flow", Kind.MASS_FLOW, main=True)
    dry_air_flow: float | None = finding("dry air flow", Kind.MASS_FLOW)
    volume_flow: float | None = finding("volume flow", Kind.VOLUME_FLOW)
    condensate_flow: float | None = finding("condensate", Kind.MASS_FLOW)
    water_taken_up: float | None = finding("water taken up", Kind.MASS_FLOW)
    medium: str | None = finding("medium", Kind.WORDS)
    specific_heat_capacity: float | None = finding("heat capacity", Kind.SPECIFIC_HEAT_CAPACITY)
    freezing_temperature: float | None = finding("begins to freeze", Kind.TEMPERATURE)
    inlet_temperature: float | None = finding("inlet temperature", Kind.TEMPERATURE, row="temperature", column="inlet")
    outlet_temperature: float | None = finding(
        "outlet temperature", Kind.TEMPERATURE, row="temperature", column="outlet"
    )
    temperature_difference: float | None = finding(
        "difference", Kind.TEMPERATURE_DIFFERENCE, row="temperature", column="beside"
    )
    inlet_density: float | None = finding("inlet density", Kind.DENSITY, row="density", column="inlet")
    outlet_density: float | None = finding("outlet density", Kind.DENSITY, row="density", column="outlet")
    inlet_relative_humidity: float | None = finding(
        "inlet humidity", Kind.FRACTION, row="rel. humidity", column="inlet"
    )
    outlet_relative_humidity: float | None = finding(
        "outlet humidity", Kind.FRACTION, row="rel. humidity", column="outlet"
    )
    inlet_humidity_ratio: float | None = finding(
        "inlet humidity ratio", Kind.HUMIDITY_RATIO, row="humidity ratio", column="inlet"
    )
    outlet_humidity_ratio: float | None = finding(
        "outlet humidity ratio", Kind.HUMIDITY_RATIO, row="humidity ratio", column="outlet"
    )
    inlet_wet_bulb: float | None = finding("inlet wet bulb", Kind.TEMPERATURE, row="wet bulb", column="inlet")
    outlet_wet_bulb: float | None = finding("outlet wet bulb", Kind.TEMPERATURE, row="wet bulb", column="outlet")
    inlet_dew_point: float | None = finding("inlet dew point", Kind.TEMPERATURE, row="dew point", column="inlet")
    outlet_dew_point: float | None = finding("outlet dew point", Kind.TEMPERATURE, row="dew point", column="outlet")


@dataclass
class _Balance:
    """One stream while it is being solved; temperatures [K], heat into the stream [W], power of fan or pump [W]."""

    side: Side
    inlet: float | None
    outlet: float | None
    flow: Mapping[str, float] | None
    heat: float | None
    power: float = 0.0
    base_flow: float | None = None

    def blanks(self) -> list[str]:
        return [name for name in ("inlet", "outlet", "flow", "heat") if getattr(self, name) is None]

    def ends(self) -> tuple[float, float]:
        """Both temperatures, once both are known."""
        assert self.inlet is not None
        assert self.outlet is not None
        return self.inlet, self.outlet


def run(surroundings: Surroundings, readings: Readings) -> Outcome:
    """Return the blank of one stream's balance; Refusal where the readings give none."""
    if not readings.medium:
        raise Refusal("No medium is named.", "Write water, air, or for example propylene glycol 30 %.", "medium")
    medium = find_medium(readings.medium)
    _fitting(medium, readings)
    outcome = Outcome(Findings())
    outcome.findings.medium = medium.title()
    pressure = surroundings.site.atmosphere if readings.pressure is None else readings.pressure
    side = open_side(medium, pressure, readings)
    for place in _PLACES:
        if (temperature := getattr(readings, place)) is not None:
            side.check(temperature, place)
    balance = _Balance(
        side, readings.inlet, readings.outlet, readings.flow, readings.heat, readings.fan_or_pump_heat or 0.0
    )
    outcome.unresolved = _solve(balance, readings)
    _report(balance, readings, outcome)
    return outcome


def _fitting(medium: Medium, readings: Readings) -> None:
    """Refuse amounts that cannot be, and readings that the medium cannot have."""
    amounts = {"heat": readings.heat, "fan_or_pump_heat": readings.fan_or_pump_heat}
    if readings.flow is not None:
        amounts["flow"] = next(iter(readings.flow.values()))
    for name, value in amounts.items():
        label = CHECK.reading_line(name).label
        if value is not None and value < 0:
            raise Refusal(
                f"The {label} is typed with a minus; it is taken as an amount.",
                "Type it without the minus" + (f", and say {' or '.join(_DIRECTIONS)}." if name == "heat" else "."),
                name,
            )
        if value == 0 and name != "fan_or_pump_heat":
            raise Refusal(f"The {label} typed is zero.", "Leave it blank when it is wanted.", name)
    for line in CHECK.reading_lines():
        if line.only and not medium.is_air and getattr(readings, line.name) is not None:
            raise Refusal(f"{medium.name.capitalize()} has no {line.label}.", f"Clear the {line.label}.", line.name)
    for place in _PLACES:
        if None not in (getattr(readings, f"{place}_relative_humidity"), getattr(readings, f"{place}_wet_bulb")):
            raise Refusal(
                f"Both humidity and wet bulb of the {place} are typed.", "Clear one of them.", f"{place}_wet_bulb"
            )


def _solve(balance: _Balance, readings: Readings) -> Refusal | None:
    """Fill the one blank of the balance; return why it cannot be filled, None when it is."""
    blanks = balance.blanks()
    if len(blanks) > 1:
        return Refusal(
            f"{len(blanks)} are blank: {', '.join(blanks[:-1])} and {blanks[-1]}; one can be solved for.",
            "Type all but the one you want to know.",
            next((name for name in ("flow", "heat") if name in blanks), blanks[0]),
        )
    sense = {"absorbed": 1.0, "given off": -1.0}.get(readings.heat_direction or "")
    if blanks and blanks[0] in _PLACES:
        return _solve_temperature(balance, blanks[0], sense)
    inlet, outlet = balance.ends()
    balance.side.settle(inlet, outlet)
    gain = balance.side.gain(inlet, outlet)
    if blanks == ["flow"]:
        return _solve_flow(balance, gain, sense)
    assert balance.flow is not None
    balance.base_flow = balance.side.base_flow(balance.flow, inlet, outlet)
    found = balance.base_flow * gain - balance.power
    if balance.heat is None:
        balance.heat = found
        return _wrong_way(balance, found, sense) if sense is not None and found * sense < 0 else None
    typed = (sense if sense is not None else (1.0 if found >= 0 else -1.0)) * balance.heat
    balance.heat = found
    apart = f"{100 * (typed - found) / abs(found):+.1f} % apart" if found else "apart"
    return Refusal(
        f"Nothing is left blank: flow and temperatures give the heat already, and the figure typed is {apart}.",
        "Clear the heat to see what the others give, or another to solve for it.",
        "heat",
    )


def _wrong_way(balance: _Balance, heat: float, sense: float | None) -> Refusal:
    name = balance.side.medium.name
    does, not_ = ("absorbs", "given off") if heat > 0 else ("gives off", "absorbed")
    said = f", and the heat is said to be {not_}" if sense is not None else ""
    return Refusal(
        f"With these temperatures the {name} {does} heat{said}.",
        "Check which temperature is the inlet, and the direction of the heat.",
        "heat_direction" if sense is not None else "outlet",
    )


def _solve_flow(balance: _Balance, gain: float, sense: float | None) -> Refusal | None:
    """Fill the flow from heat and temperatures; without a direction the temperatures give it."""
    assert balance.heat is not None
    direction = sense if sense is not None else (1.0 if gain >= 0 else -1.0)
    total = direction * balance.heat + balance.power
    inlet, outlet = balance.ends()
    if gain == 0 or (inlet == outlet and not balance.side.medium.is_air):
        balance.heat = None
        return Refusal("Inlet and outlet are the same, so no flow gives the heat typed.", "Check both.", "outlet")
    if total / gain <= 0:
        balance.heat = None
        if balance.power and direction * gain > 0:
            return Refusal(
                "The fan or pump alone brings more than the heat typed, so no flow fits.",
                "Check the two figures.",
                "fan_or_pump_heat",
            )
        return _wrong_way(balance, gain, sense)
    balance.heat = direction * balance.heat
    balance.base_flow = total / gain
    return None


def _solve_temperature(balance: _Balance, wanted: str, sense: float | None) -> Refusal | None:
    """Fill the blank temperature: the root of the balance between the ends of the medium's range."""
    assert balance.heat is not None
    assert balance.flow is not None
    side, heat, flow = balance.side, balance.heat, balance.flow
    if sense is None:
        balance.heat = None
        return Refusal(
            f"Whether the {side.medium.name} absorbs the heat or gives it off is not said, and the {wanted} depends "
            "on it.",
            f"Say {' or '.join(_DIRECTIONS)}.",
            "heat_direction",
        )
    total = sense * heat + balance.power
    known = balance.inlet if wanted == "outlet" else balance.outlet
    assert known is not None
    side.settle(balance.inlet, balance.outlet, heated=total > 0)

    def ends(temperature: float) -> tuple[float, float]:
        return (known, temperature) if wanted == "outlet" else (temperature, known)

    def residual(temperature: float) -> float:
        return side.base_flow(flow, *ends(temperature)) * side.gain(*ends(temperature)) - total

    warmer = (total > 0) == (wanted == "outlet")
    near = (known, side.highest) if warmer else (side.lowest, known)
    found = _root(residual, *near)
    if found is None:
        found = _root(residual, side.lowest, side.highest)
    if found is None:
        balance.heat = None
        raise Refusal(
            f"No {wanted} fits: with this heat and flow the {side.medium.name} would leave its range, {side.range()}.",
            "Check the flow and the heat, and their units.",
            wanted,
        )
    setattr(balance, wanted, found)
    balance.heat = sense * heat
    balance.base_flow = side.base_flow(flow, *balance.ends())
    return None


def _root(function: Callable[[float], float], low: float, high: float) -> float | None:
    """Return where `function` is zero between two numbers, by bisection to the last digit; None without a change."""
    at_low, at_high = function(low), function(high)
    if at_low == 0 or at_high == 0:
        return low if at_low == 0 else high
    if (at_low > 0) == (at_high > 0):
        return None
    for _ in range(200):
        middle = (low + high) / 2
        if not low < middle < high:
            break
        if (function(middle) > 0) == (at_low > 0):
            low = middle
        else:
            high = middle
    return low if abs(function(low)) < abs(function(high)) else high


def _report(balance: _Balance, readings: Readings, outcome: Outcome) -> None:
    found: Findings = outcome.findings
    side = balance.side
    found.inlet_temperature, found.outlet_temperature = balance.inlet, balance.outlet
    if balance.inlet is not None and balance.outlet is not None:
        found.temperature_difference = balance.outlet - balance.inlet
    _report_heat(balance, outcome)
    side.report(outcome, balance.inlet, balance.outlet, balance.base_flow, readings.flow_at or "inlet", balance.power)
    if balance.flow is not None and Kind.VOLUME_FLOW.value in balance.flow and readings.flow_at is None:
        outcome.note("The volume flow is taken as measured at the inlet, none being said.")
    if readings.pressure is None:
        outcome.note(
            "The pressure is taken as the site's atmosphere, {pressure}, as none is typed.",
            pressure=(side.pressure, Kind.ABSOLUTE_PRESSURE),
        )
    outcome.note("Steady flow; kinetic and potential energy neglected.")


def _report_heat(balance: _Balance, outcome: Outcome) -> None:
    found: Findings = outcome.findings
    if balance.heat is None or balance.base_flow is None:
        return
    name = "heat_absorbed" if balance.heat >= 0 else "heat_rejected"
    setattr(found, name, abs(balance.heat))
    outcome.remark(name, f"by the {balance.side.medium.name}")
    if balance.power:
        outcome.note(
            "The fan or pump heats the stream by {power} between the two temperatures; the heat through the wall is "
            "what remains.",
            power=(balance.power, Kind.POWER),
        )
    else:
        outcome.note("No fan or pump heat is counted, as none is typed.")


CHECK = Check(
    "stream",
    "secondary side",
    "Heat, flow or a temperature of water, moist air, or a solution in water with its concentration by mass: "
    f"{', '.join(SOLUTIONS[:-1])} or {SOLUTIONS[-1]}.",
    Readings,
    Findings,
    run,
    needs_refrigerant=False,
)
