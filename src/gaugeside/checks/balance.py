"""The relations of one component, and solving them for whatever is left blank.

Every relation ties a few quantities together and can be solved for any one of them. Blanks are filled one after the
other as long as some relation has a single one left; what stays blank is named.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from gaugeside.errors import OutOfRange, Refusal

if TYPE_CHECKING:
    from gaugeside.refrigerants import Fluid, State

Values = Mapping[str, Any]
Solver = Callable[[Values], Any]


@dataclass(frozen=True)
class Relation:
    """One equation.

    words: how far its sides are apart, as a person says it, with {off} for the figure. solvers: for each quantity it
    ties, how it follows from the others; a solver raises Refusal where no value fits and returns None where the
    quantity has no meaning. sides: both sides of the equation once all are known.
    """

    words: str
    solvers: Mapping[str, Solver]
    sides: Callable[[Values], tuple[float, float]]


@dataclass
class Network:
    """Relations and the quantities known so far.

    known: by name. followed: for every quantity that was blank, the relation it came from.
    """

    relations: list[Relation]
    known: dict[str, Any]
    followed: dict[str, Relation] = field(default_factory=dict)

    def solve(self) -> None:
        """Fill every blank that follows; Refusal from a relation that has no solution."""
        open_relations = list(self.relations)
        while ready := [relation for relation in open_relations if len(self.blanks(relation)) == 1]:
            relation = ready[0]
            open_relations.remove(relation)
            (blank,) = self.blanks(relation)
            value = relation.solvers[blank](self.known)
            if value is not None:
                self.known[blank] = value
                self.followed[blank] = relation

    def blanks(self, relation: Relation) -> list[str]:
        """Return the quantities of a relation that are not known."""
        return [name for name in relation.solvers if self.known.get(name) is None]

    def disagreements(self) -> list[tuple[Relation, float]]:
        """Return the relations that were not needed and do not hold, with how far the right side is off the left.

        The left side is the quantity the relation is named after as it is known; the offset is relative to it.
        """
        used = {id(relation) for relation in self.followed.values()}
        apart = []
        for relation in self.relations:
            if id(relation) not in used and not self.blanks(relation):
                left, right = relation.sides(self.known)
                size = max(abs(left), abs(right))
                if size and abs(left - right) > 1e-9 * size:
                    apart.append((relation, (right - left) / left if left else math.inf))
        return apart


def find_root(function: Callable[[float], float], low: float, high: float, tolerance: float = 1e-13) -> float:
    """Return x between `low` and `high` where `function` is zero, by the Illinois form of regula falsi.

    tolerance: relative to the width of the bracket. Raises Refusal when the function has the same sign at both ends.
    """
    at_low, at_high = function(low), function(high)
    if at_low == 0:
        return low
    if at_high == 0:
        return high
    if at_low * at_high > 0:
        raise Refusal("No value fits between the limits of the model.", "Check the readings and their units.")
    width = abs(high - low)
    side = 0
    for _ in range(200):
        middle = (at_high * low - at_low * high) / (at_high - at_low)
        if not min(low, high) < middle < max(low, high):
            middle = (low + high) / 2
        value = function(middle)
        if value == 0 or abs(high - low) <= tolerance * width:
            return middle
        if value * at_high > 0:
            high, at_high = middle, value
            at_low = at_low / 2 if side == -1 else at_low
            side = -1
        else:
            low, at_low = middle, value
            at_high = at_high / 2 if side == 1 else at_high
            side = 1
    return (low + high) / 2


@dataclass(frozen=True)
class Place:
    """One state that may be blank: its name, and its pressure [Pa] where that is known."""

    name: str
    pressure: float | None

    def at_enthalpy(self, fluid: Fluid, enthalpy: float) -> State:
        """Return the state here that has this enthalpy [J/kg]; Refusal where there is none or no pressure is known."""
        pressure = self.needed_pressure()
        try:
            return fluid.state_ph(pressure, enthalpy)
        except Refusal as refusal:
            raise Refusal(
                f"No {self.words} state fits: {refusal.message}",
                "Check the mass flow and the heat or power, and their units.",
                self.name,
            ) from None

    def needed_pressure(self) -> float:
        """Return the pressure [Pa] here; Refusal when it is not known."""
        if self.pressure is None:
            raise Refusal(
                f"The {self.words} is wanted, but its pressure is not known.",
                f"Type the {self.words} pressure alone, for example 9.0 bar g.",
                self.name,
            )
        return self.pressure

    @property
    def words(self) -> str:
        """The name as it stands in a sentence."""
        return self.name.replace("_", " ")


def energy(
    fluid: Fluid, flow: str, amount: str, inlet: Place, outlet: Place, sign: float, loss: float, wrong_way: str
) -> Relation:
    """Return amount - loss = sign * flow * (h_out - h_in): steady flow, kinetic and potential energy neglected.

    flow, amount: names of the mass flow [kg/s] and of the heat or power [W]. sign: +1 where the refrigerant gains.
    loss: heat lost by a shell [W]. wrong_way: what a negative difference means, for the refusal.
    """

    def gain(v: Values) -> float:
        return float(sign * (v[outlet.name].enthalpy - v[inlet.name].enthalpy))

    def solve_flow(v: Values) -> float:
        flowing = v[amount] - loss
        if flowing <= 0:
            raise Refusal(
                f"The {amount} is not above the heat lost by the shell." if loss else f"The {amount} typed is zero.",
                "Check the figures.",
                amount,
            )
        if gain(v) <= 0:
            raise Refusal(
                f"With these states it works the wrong way round: {wrong_way}, so no mass flow gives the {amount} "
                "typed.",
                "Check which side is the inlet, and the pressures.",
                outlet.name,
            )
        return float(flowing / gain(v))

    def change(v: Values) -> float:
        return float(sign * (v[amount] - loss) / v[flow])

    return Relation(
        f"mass flow times enthalpy difference is {{off}} off the {amount}",
        {
            flow: solve_flow,
            amount: lambda v: v[flow] * gain(v) + loss,
            outlet.name: lambda v: outlet.at_enthalpy(fluid, v[inlet.name].enthalpy + change(v)),
            inlet.name: lambda v: inlet.at_enthalpy(fluid, v[outlet.name].enthalpy - change(v)),
        },
        lambda v: (v[amount], v[flow] * gain(v) + loss),
    )


def isentropic(fluid: Fluid, inlet: Place, outlet: Place) -> Relation:
    """Return efficiency = (h2s - h1) / (h2 - h1) for an adiabatic compressor or pump."""

    def ideal(state: State, pressure: float) -> float:
        return float(fluid.state_ps(pressure, state.entropy).enthalpy - state.enthalpy)

    def solve_efficiency(v: Values) -> float | None:
        first, second = v[inlet.name], v[outlet.name]
        rise = second.enthalpy - first.enthalpy
        if rise <= 0 or second.pressure <= first.pressure:
            return None
        return float(ideal(first, second.pressure) / rise)

    def solve_outlet(v: Values) -> State:
        first = v[inlet.name]
        rise = ideal(first, outlet.needed_pressure()) / v["isentropic_efficiency"]
        return outlet.at_enthalpy(fluid, first.enthalpy + rise)

    def solve_inlet(v: Values) -> State:
        second, pressure = v[outlet.name], inlet.needed_pressure()

        def apart(enthalpy: float) -> float:
            first = fluid.state_ph(pressure, enthalpy)
            return float(first.enthalpy + ideal(first, second.pressure) / v["isentropic_efficiency"] - second.enthalpy)

        low, high = _coldest_enthalpy(fluid, pressure), second.enthalpy
        for _ in range(60):
            try:
                apart(high)
                break
            except OutOfRange:
                # Compressed from there it would leave the model's range, so the inlet lies lower.
                high = low + 0.9 * (high - low)
        return fluid.state_ph(pressure, _root_at(inlet, apart, low, high))

    return Relation(
        "the isentropic efficiency by the states is {off} off the one typed",
        {"isentropic_efficiency": solve_efficiency, outlet.name: solve_outlet, inlet.name: solve_inlet},
        lambda v: (
            v["isentropic_efficiency"] * (v[outlet.name].enthalpy - v[inlet.name].enthalpy),
            ideal(v[inlet.name], v[outlet.name].pressure),
        ),
    )


def _coldest_enthalpy(fluid: Fluid, pressure: float) -> float:
    """Return the enthalpy [J/kg] of the coldest liquid the model has at a pressure [Pa]."""
    try:
        return fluid.state_pt(pressure, fluid.minimum_temperature + 1e-3).enthalpy
    except Refusal:
        return fluid.state_px(pressure, 0.0).enthalpy


def swept(fluid: Fluid, inlet: Place) -> Relation:
    """Return mass flow = volumetric efficiency * displacement [m3/s] * inlet density."""

    def solve_inlet(v: Values) -> State:
        density = v["mass_flow"] / (v["volumetric_efficiency"] * v["displacement"])
        pressure = inlet.needed_pressure()

        def apart(temperature: float) -> float:
            return float(fluid.state_pt(pressure, temperature).density - density)

        low = fluid.dew_at_pressure(pressure).temperature + 1e-6
        return fluid.state_pt(pressure, _root_at(inlet, apart, low, fluid.maximum_temperature - 1e-6))

    return Relation(
        "displacement times volumetric efficiency times suction density is {off} off the mass flow",
        {
            "mass_flow": lambda v: v["volumetric_efficiency"] * v["displacement"] * v[inlet.name].density,
            "volumetric_efficiency": lambda v: v["mass_flow"] / (v["displacement"] * v[inlet.name].density),
            "displacement": lambda v: v["mass_flow"] / (v["volumetric_efficiency"] * v[inlet.name].density),
            inlet.name: solve_inlet,
        },
        lambda v: (v["mass_flow"], v["volumetric_efficiency"] * v["displacement"] * v[inlet.name].density),
    )


def driven() -> Relation:
    """Return power to the refrigerant = electrical power * motor and drive efficiency."""
    return Relation(
        "electrical power times motor and drive efficiency is {off} off the power to the refrigerant",
        {
            "power": lambda v: v["electrical_power"] * v["motor_efficiency"],
            "electrical_power": lambda v: v["power"] / v["motor_efficiency"],
            "motor_efficiency": lambda v: v["power"] / v["electrical_power"],
        },
        lambda v: (v["power"], v["electrical_power"] * v["motor_efficiency"]),
    )


def _root_at(place: Place, function: Callable[[float], float], low: float, high: float) -> float:
    try:
        return find_root(function, low, high)
    except Refusal as refusal:
        raise Refusal(
            f"No {place.words} state fits the other readings.", "Check the figures and their units.", place.name
        ) from refusal
