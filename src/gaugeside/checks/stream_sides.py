"""The two sorts of stream behind the wall, liquid and moist air: what a temperature change takes, and what to tell."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Protocol

from gaugeside.checks.sheet import Outcome
from gaugeside.errors import Refusal
from gaugeside.quantities import Kind
from gaugeside.refrigerants.secondary import Liquid, Medium, MoistAir

FREEZING_MARGIN = 3.0
_ASSUMED_HUMIDITY = 0.5
_TEMPERATURE = Kind.TEMPERATURE


class Side(Protocol):
    """One stream. Temperatures [K], pressure [Pa], flows [kg/s] of the base: the liquid, or the dry air."""

    medium: Medium
    pressure: float
    lowest: float
    highest: float

    def check(self, temperature: float, place: str) -> None:
        """Refuse a temperature outside the medium's range; `place` is inlet or outlet."""

    def range(self) -> str:
        """The range of temperatures in words."""

    def settle(self, inlet: float | None, outlet: float | None, *, heated: bool | None = None) -> None:
        """Decide what is assumed before anything is asked; Refusal where nothing may be assumed."""

    def gain(self, inlet: float, outlet: float) -> float:
        """Return the energy taken up per kilogram of the base [J/kg]."""

    def base_flow(self, flow: Mapping[str, float], inlet: float, outlet: float) -> float:
        """Return the flow of the base from a mass or volume flow."""

    def report(
        self,
        outcome: Outcome,
        inlet: float | None,
        outlet: float | None,
        base_flow: float | None,
        place: str,
        power: float = 0.0,
    ) -> None:
        """Add findings, notes and cautions; `place` is where a volume flow counts, `power` a fan's or pump's [W]."""


def open_side(medium: Medium, pressure: float, readings: Any) -> Side:
    """Return the stream of a medium at a pressure [Pa abs] with what is typed about it."""
    if medium.is_air:
        return AirSide(medium, pressure, readings)
    return LiquidSide(medium, pressure, readings.flow_at or "inlet")


def _celsius(temperature: float) -> str:
    return f"{temperature - 273.15:.1f} °C"


class LiquidSide:
    """Water or a solution: gain = h(outlet) - h(inlet) at one pressure."""

    def __init__(self, medium: Medium, pressure: float, flow_at: str) -> None:
        self.medium, self.pressure = medium, pressure
        self._flow_at = flow_at
        self._liquid = Liquid(medium, pressure)
        self.lowest, self.highest = self._liquid.lowest, self._liquid.highest

    def check(self, temperature: float, place: str) -> None:
        try:
            self._liquid.check(temperature, f"{place} temperature")
        except Refusal as refusal:
            raise refusal.about(place) from None

    def range(self) -> str:
        return f"{_celsius(self.lowest)} to {_celsius(self.highest)}"

    def settle(self, inlet: float | None, outlet: float | None, *, heated: bool | None = None) -> None:
        """Nothing is assumed of a liquid."""

    def gain(self, inlet: float, outlet: float) -> float:
        return self._liquid.enthalpy(outlet) - self._liquid.enthalpy(inlet)

    def base_flow(self, flow: Mapping[str, float], inlet: float, outlet: float) -> float:
        if Kind.MASS_FLOW.value in flow:
            return flow[Kind.MASS_FLOW.value]
        return flow[Kind.VOLUME_FLOW.value] * self._liquid.density(inlet if self._flow_at == "inlet" else outlet)

    def report(
        self,
        outcome: Outcome,
        inlet: float | None,
        outlet: float | None,
        base_flow: float | None,
        place: str,
        power: float = 0.0,
    ) -> None:
        found = outcome.findings
        at = {"inlet": inlet, "outlet": outlet}
        for name, temperature in at.items():
            if temperature is not None:
                setattr(found, f"{name}_density", self._liquid.density(temperature))
        found.mass_flow = base_flow
        if base_flow is not None and (there := at[place]) is not None:
            found.volume_flow = base_flow / self._liquid.density(there)
            outcome.remark("volume_flow", f"at the {place} temperature")
        self._report_heat_capacity(outcome, inlet, outlet)
        self._report_freezing(outcome, [t for t in at.values() if t is not None])
        if self.medium.fraction is None:
            outcome.note("Water by IAPWS-95; heat by the difference of its enthalpies between the two temperatures.")
        else:
            outcome.note(
                f"{self.medium.title().capitalize()}, the pure substance in water: {self.medium.source}. Inhibitors of "
                "a product on sale shift this by a per cent or two; its maker's sheet comes first. "
                "Heat by the difference of enthalpies between the two temperatures."
            )
        if self.medium.caution:
            outcome.caution(self.medium.caution)

    def _report_heat_capacity(self, outcome: Outcome, inlet: float | None, outlet: float | None) -> None:
        one = inlet if inlet is not None else outlet
        if one is None:
            return
        if inlet is not None and outlet is not None and abs(outlet - inlet) > 0.01:
            outcome.findings.specific_heat_capacity = self.gain(inlet, outlet) / (outlet - inlet)
            outcome.remark("specific_heat_capacity", "mean")
        else:
            outcome.findings.specific_heat_capacity = self._liquid.heat_capacity(one)

    def _report_freezing(self, outcome: Outcome, temperatures: list[float]) -> None:
        freezing = self._liquid.freezing
        if freezing is None:
            outcome.note(f"No freezing temperature of {self.medium.title()} comes with these data.")
        elif self.medium.fraction is not None:
            outcome.findings.freezing_temperature = freezing
            outcome.remark("freezing_temperature", "first ice or crystals")
        if freezing is not None and any(t < freezing + FREEZING_MARGIN for t in temperatures):
            outcome.caution(
                f"Within {{margin}} of {{freezing}}, where {self.medium.title()} begins to freeze: the wall is colder "
                "than the reading; check the frost protection.",
                margin=(FREEZING_MARGIN, Kind.TEMPERATURE_DIFFERENCE),
                freezing=(freezing, _TEMPERATURE),
            )
        boiling = self._liquid.boiling
        if self.medium.fraction is not None and any(t > boiling for t in temperatures):
            outcome.caution(
                "Above {boiling}, where water boils at the pressure taken: only a circuit under pressure stays liquid.",
                boiling=(boiling, _TEMPERATURE),
            )


class AirSide:
    """Moist air: gain = h(outlet) - h(inlet) + (W(inlet) - W(outlet)) h_w(outlet), per kilogram of dry air."""

    def __init__(self, medium: Medium, pressure: float, readings: Any) -> None:
        self.medium, self.pressure = medium, pressure
        self._air = MoistAir(pressure)
        self.lowest, self.highest = self._air.lowest, self._air.highest
        self._humidity = {p: getattr(readings, f"{p}_relative_humidity") for p in ("inlet", "outlet")}
        self._wet_bulb = {p: getattr(readings, f"{p}_wet_bulb") for p in ("inlet", "outlet")}
        self._flow_at = readings.flow_at or "inlet"
        self._settled = False

    def check(self, temperature: float, place: str) -> None:
        try:
            self._air.check(temperature, f"{place} temperature")
        except Refusal as refusal:
            raise refusal.about(place) from None

    def range(self) -> str:
        return f"{_celsius(self.lowest)} to {_celsius(self.highest)}"

    def settle(self, inlet: float | None, outlet: float | None, *, heated: bool | None = None) -> None:
        for place, temperature in (("inlet", inlet), ("outlet", outlet)):
            if temperature is None and self._wet_bulb[place] is not None:
                raise Refusal(
                    f"With the {place} temperature blank its wet bulb does not fix it: along one wet bulb the air's "
                    "enthalpy hardly changes.",
                    f"Type the {place} relative humidity instead.",
                    f"{place}_wet_bulb",
                )
        if inlet is not None and outlet is not None:
            heated = outlet > inlet
        if not self._given("inlet") and not heated:
            raise Refusal(
                "The humidity of the entering air is not known, and cooling depends on it: part of the heat goes into "
                "condensing water.",
                "Type the inlet relative humidity or the inlet wet bulb.",
                "inlet_relative_humidity",
            )
        self._settled = True

    def _given(self, place: str) -> bool:
        return self._humidity[place] is not None or self._wet_bulb[place] is not None

    def _ratio(self, place: str, temperature: float) -> float:
        if self._wet_bulb[place] is not None:
            return self._air.ratio_at_wet_bulb(temperature, self._wet_bulb[place], place)
        return self._air.ratio_at_humidity(temperature, self._humidity[place])

    def ratios(self, inlet: float, outlet: float) -> tuple[float, float]:
        """Return both humidity ratios [kg/kg dry air], with what is assumed where none is typed."""
        leaving = self._ratio("outlet", outlet) if self._given("outlet") else None
        if self._given("inlet"):
            entering = self._ratio("inlet", inlet)
        elif leaving is not None:
            entering = min(leaving, self._air.saturated_ratio(inlet))
        else:
            entering = self._air.ratio_at_humidity(inlet, _ASSUMED_HUMIDITY)
        if leaving is None:
            leaving = min(entering, self._air.saturated_ratio(outlet))
        return entering, leaving

    def gain(self, inlet: float, outlet: float) -> float:
        entering, leaving = self.ratios(inlet, outlet)
        rise = self._air.enthalpy(outlet, leaving) - self._air.enthalpy(inlet, entering)
        return rise + (entering - leaving) * self._air.water_enthalpy(outlet)

    def base_flow(self, flow: Mapping[str, float], inlet: float, outlet: float) -> float:
        entering, leaving = self.ratios(inlet, outlet)
        temperature, ratio = (inlet, entering) if self._flow_at == "inlet" else (outlet, leaving)
        if Kind.MASS_FLOW.value in flow:
            return flow[Kind.MASS_FLOW.value] / (1 + ratio)
        return flow[Kind.VOLUME_FLOW.value] / self._air.volume(temperature, ratio)

    def report(
        self,
        outcome: Outcome,
        inlet: float | None,
        outlet: float | None,
        base_flow: float | None,
        place: str,
        power: float = 0.0,
    ) -> None:
        if inlet is None or outlet is None or not self._settled:
            return
        ratios = self.ratios(inlet, outlet)
        for name, temperature, ratio in zip(("inlet", "outlet"), (inlet, outlet), ratios, strict=True):
            self._report_state(outcome, name, temperature, ratio)
        self._explain(outcome, inlet, outlet, *ratios)
        if base_flow is None:
            return
        found = outcome.findings
        found.dry_air_flow = base_flow
        temperature, ratio = (inlet, ratios[0]) if place == "inlet" else (outlet, ratios[1])
        found.mass_flow = base_flow * (1 + ratio)
        found.volume_flow = base_flow * self._air.volume(temperature, ratio)
        outcome.remark("mass_flow", f"moist air at the {place}")
        outcome.remark("volume_flow", f"at the {place}")
        self._report_water(outcome, outlet, base_flow * (ratios[0] - ratios[1]))
        self._report_shares(outcome, inlet, outlet, base_flow, min(ratios), power)

    def _report_state(self, outcome: Outcome, place: str, temperature: float, ratio: float) -> None:
        found, air = outcome.findings, self._air
        setattr(found, f"{place}_humidity_ratio", ratio)
        setattr(found, f"{place}_relative_humidity", air.relative_humidity(temperature, ratio))
        setattr(found, f"{place}_wet_bulb", air.wet_bulb(temperature, ratio))
        setattr(found, f"{place}_dew_point", air.dew_point(temperature, ratio))
        setattr(found, f"{place}_density", (1 + ratio) / air.volume(temperature, ratio))

    def _report_water(self, outcome: Outcome, outlet: float, flow: float) -> None:
        """Add the water that leaves or joins the air [kg/s], and how it is counted."""
        if flow > 0:
            outcome.findings.condensate_flow = flow
            if outlet < 273.15:
                outcome.remark("condensate_flow", "as frost")
                outcome.note("The water that leaves the air is counted as ice at the outlet temperature.")
                outcome.caution("Frost builds up on the coil: the readings hold only between two defrosts.")
            else:
                outcome.note("The condensate is counted as liquid water at the outlet temperature.")
        elif flow < 0:
            outcome.findings.water_taken_up = -flow
            outcome.note("The water taken up is counted as fed at the outlet temperature.")

    def _report_shares(
        self, outcome: Outcome, inlet: float, outlet: float, base_flow: float, ratio: float, power: float
    ) -> None:
        """Split the heat through the wall: sensible along the lower humidity ratio less the fan's, latent the rest."""
        found = outcome.findings
        total = base_flow * self.gain(inlet, outlet) - power
        sensible = base_flow * (self._air.enthalpy(outlet, ratio) - self._air.enthalpy(inlet, ratio)) - power
        sense = 1.0 if total >= 0 else -1.0
        found.sensible_heat, found.latent_heat = sense * sensible, sense * (total - sensible)
        for name in ("sensible_heat", "latent_heat"):
            if getattr(found, name) < 0:
                outcome.remark(name, "negative: against the direction of the whole")
        if total and found.sensible_heat >= 0 and found.latent_heat >= 0:
            found.sensible_heat_ratio = found.sensible_heat / abs(total)

    def _explain(self, outcome: Outcome, inlet: float, outlet: float, entering: float, leaving: float) -> None:
        outcome.note("Humidity ratios, enthalpies and the dry air flow count per kilogram of dry air.")
        self._explain_inlet(outcome)
        dew = self._air.dew_point(inlet, entering)
        if self._given("outlet"):
            if outlet > inlet and leaving < entering * (1 - 1e-6):
                outcome.caution("The air is warmed and yet loses water: check humidities and which is which.")
        elif outlet >= inlet or dew is None:
            outcome.note("No water is taken up or lost on the way, as no outlet humidity is typed.")
        elif leaving < entering:
            outcome.note(
                "The outlet is taken as saturated, as no outlet humidity is typed and it is below the inlet's dew "
                "point {dew}.",
                dew=(dew, _TEMPERATURE),
            )
        else:
            outcome.note(
                "No condensation is assumed, as no outlet humidity is typed and the outlet is above the inlet's dew "
                "point {dew}; a wall colder than that condenses water all the same.",
                dew=(dew, _TEMPERATURE),
            )

    def _explain_inlet(self, outcome: Outcome) -> None:
        if self._given("inlet"):
            return
        if self._given("outlet"):
            outcome.note("The inlet is taken at the outlet's humidity ratio, as no inlet humidity is typed.")
        else:
            outcome.note(
                "The inlet is taken at {humidity} relative humidity, as none is typed; the heat that warms air depends "
                "little on it.",
                humidity=(_ASSUMED_HUMIDITY, Kind.FRACTION),
            )
