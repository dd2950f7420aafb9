"""Which relations each kind of component obeys, and what is known of its states from the start."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from gaugeside.checks.balance import Network, Place, Relation, driven, energy, find_root, isentropic, swept
from gaugeside.checks.sheet import Conditions, Outcome
from gaugeside.errors import Refusal

if TYPE_CHECKING:
    from gaugeside.refrigerants import Fluid, State

TITLES = {
    "condenser": "condenser",
    "gas-cooler": "gas cooler",
    "evaporator": "evaporator",
    "compressor": "compressor",
    "expansion": "expansion device",
    "desuperheater": "desuperheater",
    "pump": "liquid pump",
    "liquid-suction": "liquid-suction heat exchanger",
}
KINDS = tuple(TITLES)
WRONG_WAY = {
    "condenser": "the outlet holds more enthalpy than the inlet",
    "gas-cooler": "the outlet holds more enthalpy than the inlet",
    "desuperheater": "the outlet holds more enthalpy than the inlet",
    "evaporator": "the outlet holds less enthalpy than the inlet",
    "compressor": "the outlet holds less enthalpy than the inlet",
    "pump": "the outlet holds less enthalpy than the inlet",
    "liquid-suction": "the liquid gains enthalpy instead of giving it to the suction gas",
}
_GIVES_OFF = ("condenser", "gas-cooler", "desuperheater", "liquid-suction")
Given = Mapping[str, float]


@dataclass
class Setup:
    """One component ready to be solved: its network, its energy balance and the name of the amount in it."""

    component: str
    network: Network
    balance: Relation
    amount: str
    loss_wanted: bool = False

    def label(self, name: str) -> str:
        """Return the name of a quantity as this component's user says it."""
        if name == "heat":
            return {"evaporator": "heat absorbed", "liquid-suction": "heat exchanged"}.get(
                self.component, "heat rejected"
            )
        return name.replace("_", " ")

    def explain(self, outcome: Outcome) -> None:
        """Say which redundant readings disagree."""
        for relation, apart in self.network.disagreements():
            # The two sides of a liquid-suction exchanger may both be measured; other balances are told with their hint.
            if relation is not self.balance or self.component == "liquid-suction":
                outcome.caution(f"The readings disagree: {relation.words.format(off=f'{100 * apart:+.1f} %')}.")


def set_up(conditions: Conditions, component: str, typed: Mapping[str, Any], outcome: Outcome) -> Setup:
    """Return a component with what is typed of it; Refusal naming the field where a state typed does not exist."""
    fluid = conditions.fluid
    given = {name: dict(typed.get(name) or {}) for name in ("inlet", "outlet", "suction_inlet", "suction_outlet")}
    if component not in ("compressor", "pump", "expansion"):
        _share_pressure(given, "inlet", "outlet", outcome)
        _share_pressure(given, "suction_inlet", "suction_outlet", outcome)
    known: dict[str, Any] = {name: value for name, value in typed.items() if name != "component" and name not in given}
    known |= {name: fixed_state(fluid, properties, name) for name, properties in given.items()}
    places = {name: Place(name, properties.get("pressure")) for name, properties in given.items()}
    if component == "expansion":
        return _expansion(fluid, known, given, places, outcome)
    if component == "liquid-suction":
        return _liquid_suction(fluid, known, places, outcome)
    return _single_stream(fluid, component, known, places, outcome)


def _share_pressure(given: dict[str, dict[str, float]], first: str, second: str, outcome: Outcome) -> None:
    """Take a heat exchanger's missing pressure from the other end of the same stream."""
    for this, other in ((first, second), (second, first)):
        properties = given[this]
        if "pressure" in given[other] and "pressure" not in properties:
            if set(properties) == {"temperature", "vapour_fraction"}:
                continue
            properties["pressure"] = given[other]["pressure"]
            outcome.note(f"The {this.replace('_', ' ')} pressure is taken as the other side's: no pressure drop.")
            return


def fixed_state(fluid: Fluid, given: Given, name: str) -> State | None:
    """Return the state that is fixed by what is given, None when it is not fixed; Refusal naming the field."""
    try:
        pressure, temperature = given.get("pressure"), given.get("temperature")
        if temperature is not None and "vapour_fraction" in given:
            return fluid.state_tx(temperature, given["vapour_fraction"])
        if pressure is None:
            return None
        if temperature is not None:
            return fluid.state_pt(pressure, temperature)
        if "superheat" in given:
            return fluid.state_superheat(pressure, given["superheat"])
        if "subcooling" in given:
            return fluid.state_subcooling(pressure, given["subcooling"])
        if "vapour_fraction" in given:
            return fluid.state_px(pressure, given["vapour_fraction"])
        if "enthalpy" in given:
            return fluid.state_ph(pressure, given["enthalpy"])
    except Refusal as refusal:
        raise refusal.about(name) from None
    return None


def _single_stream(
    fluid: Fluid, component: str, known: dict[str, Any], places: Mapping[str, Place], outcome: Outcome
) -> Setup:
    inlet, outlet = places["inlet"], places["outlet"]
    machine = component in ("compressor", "pump")
    amount = "power" if machine else "heat"
    sign = -1.0 if component in _GIVES_OFF else 1.0
    loss = (known.get("heat") or 0.0) if component == "compressor" else 0.0
    balance = energy(fluid, "mass_flow", amount, inlet, outlet, sign, loss, WRONG_WAY[component])
    relations = [balance]
    if machine:
        relations.append(driven())
        if not loss:
            relations.append(isentropic(fluid, inlet, outlet))
    loss_wanted = False
    if component == "compressor":
        relations.append(swept(fluid, inlet))
        everything = all(known.get(name) is not None for name in ("inlet", "outlet", "mass_flow", "power"))
        loss_wanted = everything and known.get("heat") is None
        if loss_wanted:
            known["heat"] = known["power"] - known["mass_flow"] * (known["outlet"].enthalpy - known["inlet"].enthalpy)
            balance = energy(fluid, "mass_flow", amount, inlet, outlet, sign, known["heat"], WRONG_WAY[component])
            relations[0] = balance
        elif not loss:
            outcome.note("No heat is lost from the compressor's shell, as none is typed.")
    setup = Setup(component, Network(relations, known), balance, amount, loss_wanted)
    if loss_wanted:
        setup.network.followed["heat"] = balance
        setup.network.followed["mass_flow"] = balance
    return setup


def _expansion(
    fluid: Fluid,
    known: dict[str, Any],
    given: Mapping[str, Given],
    places: Mapping[str, Place],
    outcome: Outcome,
) -> Setup:
    outcome.note("Expansion at constant enthalpy: no heat exchanged, no work done.")
    if known["inlet"] is None and known["outlet"] is None:
        raise Refusal(
            "Neither side of the expansion device is a full state.",
            "Type the inlet, for example 14 bar g, SC 4 K, and the outlet pressure.",
            "inlet",
        )

    def follow(wanted: str, other: str) -> Any:
        def solve(v: Mapping[str, Any]) -> State:
            if places[wanted].pressure is None and "temperature" in given[wanted]:
                return _wet_at_temperature(fluid, given[wanted]["temperature"], v[other].enthalpy, wanted)
            return places[wanted].at_enthalpy(fluid, v[other].enthalpy)

        return solve

    balance = Relation(
        "the outlet enthalpy is {off} off the inlet's",
        {"outlet": follow("outlet", "inlet"), "inlet": follow("inlet", "outlet")},
        lambda v: (v["outlet"].enthalpy, v["inlet"].enthalpy),
    )
    return Setup("expansion", Network([balance], known), balance, "outlet")


def _wet_at_temperature(fluid: Fluid, temperature: float, enthalpy: float, wanted: str) -> State:
    """Return the wet state at a temperature [K] that has this enthalpy [J/kg]; Refusal when it is not wet there."""

    def apart(fraction: float) -> float:
        return fluid.state_tx(temperature, fraction).enthalpy - enthalpy

    try:
        return fluid.state_tx(temperature, find_root(apart, 0.0, 1.0))
    except Refusal as refusal:
        raise Refusal(
            f"At the {wanted} temperature typed the {wanted} is not wet, so the temperature alone does not fix it.",
            f"Type the {wanted} pressure instead.",
            wanted,
        ) from refusal


def _liquid_suction(fluid: Fluid, known: dict[str, Any], places: Mapping[str, Place], outcome: Outcome) -> Setup:
    """The liquid gives the suction gas its heat; both flows are the same unless two are typed."""
    liquid, suction = known.get("mass_flow"), known.get("suction_mass_flow")
    if suction is None:
        outcome.note("Liquid and suction gas are taken as the same mass flow.")
    if suction is not None and liquid is None:
        raise Refusal("The suction mass flow has no liquid mass flow beside it.", "Type both, or neither.", "mass_flow")
    share = suction / liquid if suction is not None and liquid is not None else 1.0

    def given_off(v: Mapping[str, Any]) -> float:
        return float(v["inlet"].enthalpy - v["outlet"].enthalpy)

    def taken_up(v: Mapping[str, Any]) -> float:
        return float(share * (v["suction_outlet"].enthalpy - v["suction_inlet"].enthalpy))

    exchange = Relation(
        "heat taken up by the suction gas is {off} off the heat given off by the liquid",
        {
            "suction_outlet": lambda v: places["suction_outlet"].at_enthalpy(
                fluid, v["suction_inlet"].enthalpy + given_off(v) / share
            ),
            "suction_inlet": lambda v: places["suction_inlet"].at_enthalpy(
                fluid, v["suction_outlet"].enthalpy - given_off(v) / share
            ),
            "outlet": lambda v: places["outlet"].at_enthalpy(fluid, v["inlet"].enthalpy - taken_up(v)),
            "inlet": lambda v: places["inlet"].at_enthalpy(fluid, v["outlet"].enthalpy + taken_up(v)),
        },
        lambda v: (given_off(v), taken_up(v)),
    )
    amount = energy(
        fluid, "mass_flow", "heat", places["inlet"], places["outlet"], -1.0, 0.0, WRONG_WAY["liquid-suction"]
    )
    return Setup("liquid-suction", Network([exchange, amount], known), exchange, "heat")
