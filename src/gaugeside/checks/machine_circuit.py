"""The states around a single-stage circuit, as far as the readings fix them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from gaugeside.checks.sheet import Conditions, Outcome
from gaugeside.errors import OutOfRange, Refusal
from gaugeside.refrigerants import Region

if TYPE_CHECKING:
    from gaugeside.refrigerants import Fluid, State


@dataclass
class Circuit:
    """States by place, in the order of the flow: suction, discharge, liquid, after valve, evaporator outlet.

    pressures [Pa] by place. superheat, subcooling [K]. evaporating, condensing: dew temperatures [K]. missing: what
    each place still lacks. misread: what pressure and pipe say where that cannot be.
    """

    states: dict[str, State] = field(default_factory=dict)
    pressures: dict[str, float] = field(default_factory=dict)
    superheat: float | None = None
    subcooling: float | None = None
    evaporating: float | None = None
    condensing: float | None = None
    missing: dict[str, str] = field(default_factory=dict)
    misread: dict[str, State] = field(default_factory=dict)

    def read(self, place: str) -> State | None:
        """Return what pressure and pipe of a place say, believed or not."""
        return self.states.get(place) or self.misread.get(place)

    @property
    def refrigerating_effect(self) -> float | None:
        """Enthalpy the refrigerant gains from after the valve to the evaporator's outlet [J/kg]."""
        return self._difference("after valve", self.evaporator_end)

    @property
    def heating_effect(self) -> float | None:
        """Enthalpy the refrigerant loses from the discharge to the liquid [J/kg]."""
        return self._difference("liquid", "discharge")

    @property
    def work(self) -> float | None:
        """Enthalpy the refrigerant gains from suction to discharge [J/kg]."""
        return self._difference("suction", "discharge")

    @property
    def line_gain(self) -> float:
        """Enthalpy gained in the suction line [J/kg]; 0 where line and evaporator count as one."""
        return self._difference("evaporator outlet", "suction") or 0.0

    @property
    def evaporator_end(self) -> str:
        """The place where the evaporator ends."""
        return "evaporator outlet" if "evaporator outlet" in self.states else "suction"

    def _difference(self, first: str, second: str) -> float | None:
        start, end = self.states.get(first), self.states.get(second)
        return None if start is None or end is None else end.enthalpy - start.enthalpy

    def isentropic_efficiency(self, fluid: Fluid) -> float | None:
        """Return (h2s - h1) / (h2 - h1), None when it has no meaning."""
        suction, discharge, rise = self.states.get("suction"), self.states.get("discharge"), self.work
        if suction is None or discharge is None or rise is None or rise <= 0 or discharge.pressure <= suction.pressure:
            return None
        return (fluid.state_ps(discharge.pressure, suction.entropy).enthalpy - suction.enthalpy) / rise

    def missing_words(self) -> str:
        """Return what the states still lack, as a sentence; empty when nothing."""
        if not self.missing:
            return ""
        parts = [f"{place} ({what})" for place, what in self.missing.items()]
        return f"Missing for the states: {'; '.join(parts)}."


def trace(conditions: Conditions, typed: Mapping[str, float], outcome: Outcome) -> Circuit:
    """Return the circuit that the readings fix; assumptions become notes of `outcome`, what cannot be cautions."""
    fluid, circuit = conditions.fluid, Circuit()
    _pressures(circuit, typed, outcome)
    for place, temperature_name in (
        ("suction", "suction_temperature"),
        ("discharge", "discharge_temperature"),
        ("liquid", "liquid_temperature"),
        ("evaporator outlet", "evaporator_outlet_temperature"),
    ):
        pressure, temperature = circuit.pressures.get(place), typed.get(temperature_name)
        if pressure is not None and temperature is not None:
            state = _state(fluid, pressure, temperature, temperature_name, outcome)
            _accept(circuit, place, state, outcome)
        elif place != "evaporator outlet":
            lacks = [word for word, value in (("pressure", pressure), ("pipe", temperature)) if value is None]
            circuit.missing[place] = " and ".join(lacks)
    _saturations(conditions, circuit)
    liquid, low = circuit.states.get("liquid"), circuit.pressures.get("evaporator outlet")
    if liquid is not None and low is not None:
        circuit.states["after valve"] = fluid.state_ph(low, liquid.enthalpy)
        outcome.note("The valve is taken at constant enthalpy.")
    if "evaporator outlet" not in circuit.states and "suction" in circuit.states:
        outcome.note("Evaporator and suction line count as one: no evaporator outlet is known.")
    order = ("suction", "discharge", "liquid", "after valve", "evaporator outlet")
    circuit.states = {place: circuit.states[place] for place in order if place in circuit.states}
    return circuit


def _pressures(circuit: Circuit, typed: Mapping[str, float], outcome: Outcome) -> None:
    for place in ("suction", "discharge", "liquid"):
        if f"{place}_pressure" in typed:
            circuit.pressures[place] = typed[f"{place}_pressure"]
    if "evaporator_pressure" in typed:
        circuit.pressures["evaporator outlet"] = typed["evaporator_pressure"]
    for place, other in (("liquid", "discharge"), ("discharge", "liquid"), ("evaporator outlet", "suction"),
                         ("suction", "evaporator outlet")):  # fmt: skip
        if place not in circuit.pressures and other in circuit.pressures:
            circuit.pressures[place] = circuit.pressures[other]
            outcome.note(f"The {place} pressure is taken as that of the {other}: none is typed.")
    suction, discharge = circuit.pressures.get("suction"), circuit.pressures.get("discharge")
    if suction is not None and discharge is not None and discharge <= suction:
        raise Refusal(
            "The discharge pressure is not above the suction pressure: this machine does not compress.",
            "Check which gauge is which, and their units.",
            "discharge_pressure",
        )


# A pipe this near [K] to saturation is taken as saturated: no thermometer tells the two apart.
_ON_THE_LINE = 0.01


def _state(fluid: Fluid, pressure: float, temperature: float, name: str, outcome: Outcome) -> State:
    liquid = name == "liquid_temperature"
    try:
        if pressure < fluid.critical_pressure:
            line = fluid.bubble_at_pressure(pressure) if liquid else fluid.dew_at_pressure(pressure)
            if abs(line.temperature - temperature) < _ON_THE_LINE:
                phase = "liquid" if liquid else "vapour"
                outcome.note(f"The {name.replace('_', ' ')} is at saturation: taken as saturated {phase}.")
                return line
    except OutOfRange:
        pass  # Without saturation pressure and temperature fix the state, or are refused below.
    try:
        return fluid.state_pt(pressure, temperature)
    except Refusal as refusal:
        raise refusal.about(name) from None


def _accept(circuit: Circuit, place: str, state: State, outcome: Outcome) -> None:
    """Take a state into the circuit, unless pressure and pipe make it the phase that cannot be there.

    A pipe half a kelvin past saturation would turn gas into liquid, and every heat with it.
    """
    liquid = place == "liquid"
    beyond = "above the bubble point" if liquid else "below the dew point"
    if state.region is (Region.SUPERHEATED if liquid else Region.SUBCOOLED):
        outcome.caution(
            f"The {place} pipe reads {beyond}: it is not {'liquid' if liquid else 'vapour'} as typed, so no state is "
            "taken there. The flow is two-phase, a sensor is off, or the refrigerant or the gauge/absolute reference "
            "is wrong."
        )
        circuit.missing[place] = f"{'liquid' if liquid else 'vapour'}, not a pipe {beyond}"
        circuit.misread[place] = state
        return
    if state.region is Region.TWO_PHASE:
        outcome.caution(
            f"The {place} pipe lies between bubble and dew point: the state there is wet, and its vapour fraction "
            "hangs on a few tenths of a kelvin."
        )
    circuit.states[place] = state


def _saturations(conditions: Conditions, circuit: Circuit) -> None:
    """Fill superheat, subcooling and the dew temperatures, where there is saturation at all."""
    fluid = conditions.fluid
    for place, name in (("suction", "evaporating"), ("discharge", "condensing")):
        pressure = circuit.pressures.get(place)
        if pressure is None:
            continue
        try:
            dew = fluid.dew_at_pressure(pressure).temperature
        except OutOfRange:
            continue
        setattr(circuit, name, dew)
        suction = circuit.read("suction")
        if place == "suction" and suction is not None:
            circuit.superheat = suction.temperature - dew
    liquid = circuit.read("liquid")
    if liquid is not None:
        try:
            circuit.subcooling = fluid.bubble_at_pressure(liquid.pressure).temperature - liquid.temperature
        except OutOfRange:
            circuit.subcooling = None
