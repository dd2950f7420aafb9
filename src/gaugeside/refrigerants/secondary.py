"""The other side of the wall: water, solutions with water, and moist air.

Water: IAPWS-95. Solutions: A. Melinder, Properties of Secondary Working Fluids for Indirect Systems, IIR 2010;
sea water: Sharqawy, Lienhard and Zubair, Desalination and Water Treatment 16 (2010); both as the property library
carries them, concentrations by mass. Moist air: the library's real-gas model after ASHRAE RP-1485 (Herrmann,
Kretzschmar and Gatley 2009). Naming a medium reads no property library; asking for its numbers does.
"""

from __future__ import annotations

import difflib
import re
from dataclasses import dataclass
from functools import lru_cache
from typing import Any, NoReturn

from ..errors import OutOfRange, Refusal
from .limits import bar, celsius

AIR_NAMES = ("air", "moist air", "humid air", "ambient air", "outdoor air", "room air")
_WATER_NAMES = ("water", "pure water", "fresh water", "tap water", "cooling water", "chilled water", "hot water", "h2o")
ICE_POINT = 273.15
_MELINDER = "Melinder, IIR 2010"
_LEAST_SOLUTION = 0.005

# Melting enthalpy and heat capacity of ice at 0 °C and one atmosphere: IAPWS R14-08 and R10-06 (Feistel and Wagner).
_ICE_MELTING, _ICE_HEAT_CAPACITY = 333426.5, 2096.7


@dataclass(frozen=True)
class _Substance:
    """What is dissolved: its name, the library's name, the highest mass fraction, other spellings."""

    name: str
    model: str
    most: float
    spellings: str
    source: str = _MELINDER
    caution: str = ""


_POISON = "is poisonous when swallowed: keep it away from drinking water and food."
_SUBSTANCES = (
    _Substance("propylene glycol", "MPG", 0.60, "pg mpg monopropyleneglycol"),
    _Substance("ethylene glycol", "MEG", 0.60, "eg meg monoethyleneglycol", caution=f"Ethylene glycol {_POISON}"),
    _Substance("ethanol", "MEA", 0.60, "ethylalcohol etoh", caution="Strong ethanol solutions burn."),
    _Substance("methanol", "MMA", 0.60, "methylalcohol meoh", caution=f"Methanol burns, and {_POISON}"),
    _Substance("glycerol", "MGL", 0.60, "glycerine glycerin"),
    _Substance("ammonia solution", "MAM", 0.30, "ammonia nh3 aquaammonia ammoniawater", caution="Ammonia is toxic."),
    _Substance("potassium carbonate", "MKC", 0.40, "k2co3"),
    _Substance("calcium chloride", "MCA", 0.30, "cacl2"),
    # The library goes to 0.30, but its freezing curve follows ice beyond the eutectic, where a hydrate freezes first.
    _Substance("magnesium chloride", "MMG", 0.21, "mgcl2"),
    _Substance("sodium chloride", "MNA", 0.23, "nacl commonsalt tablesalt"),
    _Substance("potassium acetate", "MKA", 0.45, "kac ch3cook"),
    _Substance("potassium formate", "MKF", 0.48, "kfo hcook khcoo"),
    _Substance("lithium chloride", "MLI", 0.24, "licl"),
    _Substance("sea water", "MITSW", 0.12, "sea seasalt", source="Sharqawy, Lienhard and Zubair 2010"),
)
SOLUTIONS = tuple(s.name for s in _SUBSTANCES)
_LIST = (
    "Write water, air, or a name and its concentration by mass, for example propylene glycol 30 %; there are "
    f"{', '.join(SOLUTIONS[:-1])} and {SOLUTIONS[-1]}."
)


def _squeezed(text: str) -> str:
    return re.sub(r"[^a-z0-9]", "", text.casefold())


_BY_SPELLING = {s: sub for sub in _SUBSTANCES for s in (_squeezed(sub.name), *sub.spellings.split())}


@dataclass(frozen=True)
class Medium:
    """A medium of the secondary side.

    name: as the trade says it. fraction: of the dissolved substance by mass [kg/kg], None for water and air.
    model: the library's name of a solution. source: of its data. caution: what can hurt a person.
    """

    name: str
    fraction: float | None = None
    model: str = ""
    source: str = ""
    caution: str = ""

    @property
    def is_air(self) -> bool:
        """Whether it is moist air."""
        return self.name == "air"

    def title(self) -> str:
        """The medium in words, concentration included."""
        return self.name if self.fraction is None else f"{self.name} {100 * self.fraction:.4g} % by mass"


# Naming a medium

_NUMBER = re.compile(
    r"(?<![a-z0-9.,])(?P<minus>[-−–]\s?)?(?P<number>[0-9]+(?:[.,][0-9]+)?)\s*(?P<unit>%|percent|per cent|pct|kg/kg)?"
)
_ATTACHED = re.compile(r"(?<=[a-z])(?P<minus>)(?P<number>[0-9]+(?:[.,][0-9]+)?)\s*(?P<unit>%|percent|pct)")
_VOLUME = re.compile(r"vol|v/v|%\s*v\b")
_DROPPED = re.compile(r"by|mass|weight|wt|w|m|in|of|with|and|water|aqueous|aq|solution|mixture|mix|brine")


def find_medium(text: str) -> Medium:
    """Return the medium that `text` names ("water", "air", "propylene glycol 30 %"); Refusal when it names none."""
    try:
        return _find(text)
    except Refusal as refusal:
        raise refusal.about("medium") from None


def _find(text: str) -> Medium:
    said = " ".join(text.casefold().split())
    if said in AIR_NAMES:
        return Medium("air")
    if said in _WATER_NAMES:
        return Medium("water", source="IAPWS-95")
    if _VOLUME.search(said):
        raise Refusal(
            f"'{text.strip()}' is a concentration by volume; the properties here rest on concentrations by mass.",
            "Write it by mass, for example propylene glycol 30 %; the maker's sheet gives both.",
        )
    found = list(_NUMBER.finditer(said)) or list(_ATTACHED.finditer(said))
    if len(found) > 1:
        raise Refusal(
            f"'{text.strip()}' has more than one number.", "Write one concentration by mass: propylene glycol 30 %."
        )
    rest = said[: found[0].start()] + " " + said[found[0].end() :] if found else said
    substance = _named(rest, text)
    if substance is None:
        raise Refusal(
            f"{rest.strip().capitalize()} takes no concentration.",
            "Write water or air alone; the air's humidity has its own readings.",
        )
    return _solution(substance, _fraction(found[0], substance) if found else None)


def _named(rest: str, text: str) -> _Substance | None:
    """Return the substance that the words name, None for water or air; Refusal with the nearest name."""
    words = [word for word in re.split(r"[\s/,;:+%()_-]+", rest) if word]
    if " ".join(words) in (*AIR_NAMES, *_WATER_NAMES):
        return None
    name = _squeezed("".join(words))
    kept = _squeezed("".join(word for word in words if not _DROPPED.fullmatch(word)))
    for spelling in (name, kept):
        if spelling in _BY_SPELLING:
            return _BY_SPELLING[spelling]
    if kept == "glycol":
        raise Refusal(
            "Glycol alone could be propylene or ethylene glycol, and they differ.",
            "Write propylene glycol 30 % or ethylene glycol 30 %.",
        )
    spellings = [*_BY_SPELLING, *map(_squeezed, (*AIR_NAMES[:1], *_WATER_NAMES[:1]))]
    near = difflib.get_close_matches(kept or name, spellings, n=1, cutoff=0.6)
    shown = text.strip() if len(text.strip()) <= 32 else f"{text.strip()[:29]}..."
    offer = ""
    if near:
        offer = f"Did you mean {_BY_SPELLING[near[0]].name if near[0] in _BY_SPELLING else near[0]}? "
    raise Refusal(f"'{shown}' is not a medium known here.", offer + _LIST)


def _fraction(found: re.Match[str], substance: _Substance) -> float:
    value = float(found["number"].replace(",", "."))
    if found["minus"]:
        raise Refusal("A concentration below zero cannot be.", f"Write for example {substance.name} 20 %.")
    if found["unit"] == "kg/kg":
        return value
    if not found["unit"] and value <= 1:
        raise Refusal(
            f"{found['number']} could be {found['number']} % or {100 * value:g} %.",
            f"Write {substance.name} {100 * value:g} %, or {found['number']} kg/kg.",
        )
    return value / 100


def _solution(substance: _Substance, fraction: float | None) -> Medium:
    limits = f"{100 * _LEAST_SOLUTION:g} to {100 * substance.most:g} % by mass"
    if fraction is None:
        raise Refusal(
            f"The concentration of the {substance.name} is not said.",
            f"Write it by mass, {limits}, for example {substance.name} {20 if substance.most > 0.2 else 3.5} %.",
        )
    if not _LEAST_SOLUTION <= fraction <= substance.most + 1e-12:
        raise OutOfRange(
            f"{100 * fraction:.4g} % is outside the range of the {substance.name} data, {limits}.",
            "Check the concentration, and that it is by mass." if fraction else "Write water for no concentration.",
        )
    return Medium(substance.name, fraction, substance.model, substance.source, substance.caution)


# Liquids


class Liquid:
    """Water or a solution at one pressure, asked by temperature [K].

    lowest, highest: the range of temperatures [K]. freezing: where the first ice forms [K], None when no figure is
    published. boiling: where pure water boils at this pressure [K].
    """

    HIGHEST_PRESSURE = 1e7

    def __init__(self, medium: Medium, pressure: float) -> None:
        self.medium = medium
        self.pressure = pressure
        self.boiling = _boiling(pressure)
        self._state = _open(medium)
        self.freezing: float | None = ICE_POINT
        self.lowest, self.highest = ICE_POINT, self.boiling
        if medium.fraction is not None:
            import CoolProp

            self.lowest = float(self._state.keyed_output(CoolProp.iT_min))
            self.highest = float(self._state.keyed_output(CoolProp.iT_max))
            freezing = float(self._state.keyed_output(CoolProp.iT_freeze))
            self.freezing = freezing if freezing > self.lowest else None
            self.lowest = max(self.lowest, freezing)
            try:
                self.enthalpy(self.highest)
            except OutOfRange:
                # Data with a vapour pressure: below it there is no liquid; pure water boils a little earlier.
                self.highest = min(self.highest, self.boiling)

    def check(self, temperature: float, what: str) -> None:
        """Refuse a temperature [K] at which the medium is no liquid or has no data; `what` names it."""
        if temperature < self.lowest - 1e-9:
            if self.freezing is None:
                self._no_data(temperature, what)
            raise OutOfRange(
                f"The {what}, {celsius(temperature)}, is below {celsius(self.freezing)}, where "
                f"{self.medium.title()} begins to freeze.",
                "Check the reading and its sign, and the concentration: ice in the circuit stops the flow.",
            )
        if temperature > self.highest + 1e-9:
            if self.highest != self.boiling:
                self._no_data(temperature, what)
            raise OutOfRange(
                f"The {what}, {celsius(temperature)}, is above {celsius(self.boiling)}, where water boils at "
                f"{bar(self.pressure)}.",
                "Check the reading, or type the pressure of the circuit.",
            )

    def _no_data(self, temperature: float, what: str) -> NoReturn:
        raise OutOfRange(
            f"The {what}, {celsius(temperature)}, is outside {celsius(self.lowest)} to {celsius(self.highest)}, the "
            f"range of the data for {self.medium.title()}.",
            "Check the unit and the sign of the reading.",
        )

    def enthalpy(self, temperature: float) -> float:
        """Return the specific enthalpy [J/kg]; only differences mean anything."""
        return self._asked(temperature, "hmass")

    def density(self, temperature: float) -> float:
        """Return the density [kg/m3]."""
        return self._asked(temperature, "rhomass")

    def heat_capacity(self, temperature: float) -> float:
        """Return the specific heat capacity [J/(kg K)]."""
        return self._asked(temperature, "cpmass")

    def _asked(self, temperature: float, what: str) -> float:
        from .library import PRESSURE_TEMPERATURE

        try:
            self._state.update(PRESSURE_TEMPERATURE, self.pressure, min(max(temperature, self.lowest), self.highest))
            return float(getattr(self._state, what)())
        except ValueError:
            raise OutOfRange(
                f"{self.medium.title().capitalize()} has no data at {celsius(temperature)} and {bar(self.pressure)}.",
                "Check the temperature and the pressure.",
            ) from None


def _open(medium: Medium) -> Any:
    from . import library  # its import keeps the library's own words off the standard output

    if medium.fraction is None:
        state = library.open_state("Water")
        # Imposed, so that the water stays liquid at the very boiling point and at 0 °C, a hundredth below the triple.
        state.specify_phase(library.LIQUID)
        return state
    import CoolProp

    coolprop: Any = CoolProp  # the library carries types only in part
    state = coolprop.AbstractState("INCOMP", medium.model)
    state.set_mass_fractions([medium.fraction])
    return state


def _boiling(pressure: float) -> float:
    from . import library

    if not 1000.0 <= pressure <= Liquid.HIGHEST_PRESSURE:
        raise OutOfRange(
            f"A pressure of {bar(pressure)} is outside what is covered here, {bar(1000.0)} to "
            f"{bar(Liquid.HIGHEST_PRESSURE)}.",
            "Check the unit, and gauge or absolute.",
            "pressure",
        )
    state = library.open_state("Water")
    state.update(library.PRESSURE_QUALITY, pressure, 0.0)
    return float(state.T())


# Moist air


@lru_cache(maxsize=4096)
def _humid_air(output: str, temperature: float, pressure: float, key: str, value: float) -> float:
    """Return a property of moist air; raises ValueError with the library's words."""
    from . import library  # noqa: F401  its import keeps the library's own words off the standard output

    from CoolProp.CoolProp import HAPropsSI  # isort: skip

    return float(HAPropsSI(output, "T", temperature, "P", pressure, key, value))


class MoistAir:
    """Moist air at one pressure [Pa]; humidity ratios [kg water/kg dry air], all else per kilogram of dry air.

    Enthalpies count from dry air and liquid water at 0 °C, as in the ASHRAE Handbook.
    """

    LOWEST = 213.15
    LOWEST_PRESSURE, HIGHEST_PRESSURE = 2e4, 1e6

    def __init__(self, pressure: float) -> None:
        if not self.LOWEST_PRESSURE <= pressure <= self.HIGHEST_PRESSURE:
            raise OutOfRange(
                f"A pressure of {bar(pressure)} is outside what is covered for moist air, "
                f"{bar(self.LOWEST_PRESSURE)} to {bar(self.HIGHEST_PRESSURE)}.",
                "Check the unit, and gauge or absolute; left blank, the site's atmosphere is taken.",
                "pressure",
            )
        self.pressure = pressure
        self.lowest = self.LOWEST
        # Well below boiling, so that saturated air is still mostly air.
        self.highest = min(363.15, _boiling(pressure) - 10.0)
        self._water = Liquid(Medium("water"), max(pressure, 1e5))

    def check(self, temperature: float, what: str) -> None:
        """Refuse a temperature [K] outside the range; `what` names it."""
        if not self.lowest - 1e-9 <= temperature <= self.highest + 1e-9:
            raise OutOfRange(
                f"The {what}, {celsius(temperature)}, is outside {celsius(self.lowest)} to {celsius(self.highest)}, "
                f"covered here for moist air at {bar(self.pressure)}.",
                "Check the unit and the sign of the reading.",
            )

    def enthalpy(self, temperature: float, ratio: float) -> float:
        """Return the enthalpy [J/kg dry air]."""
        return self._asked("H", temperature, "W", ratio)

    def volume(self, temperature: float, ratio: float) -> float:
        """Return the volume [m3/kg dry air]."""
        return self._asked("Vda", temperature, "W", ratio)

    def saturated_ratio(self, temperature: float) -> float:
        """Return the humidity ratio of saturated air."""
        return self.ratio_at_humidity(temperature, 1.0)

    def ratio_at_humidity(self, temperature: float, relative_humidity: float) -> float:
        """Return the humidity ratio at a relative humidity [1]."""
        return self._asked("W", temperature, "R", relative_humidity)

    def ratio_at_wet_bulb(self, temperature: float, wet_bulb: float, place: str) -> float:
        """Return the humidity ratio at a wet bulb [K]; Refusal naming the place when there is none."""
        if wet_bulb > temperature + 1e-9:
            raise Refusal(
                f"The {place} wet bulb, {celsius(wet_bulb)}, is above the dry bulb, {celsius(temperature)}.",
                "The wet bulb is the lower one: check the two readings.",
                f"{place}_wet_bulb",
            )
        try:
            ratio = _humid_air("W", temperature, self.pressure, "B", min(wet_bulb, temperature))
        except ValueError:
            ratio = -1.0
        if ratio < 0:
            raise Refusal(
                f"At the {place} a wet bulb of {celsius(wet_bulb)} at a dry bulb of {celsius(temperature)} is lower "
                "than even dry air gives.",
                "Check the two readings, and that the wick is wet.",
                f"{place}_wet_bulb",
            )
        return ratio

    def relative_humidity(self, temperature: float, ratio: float) -> float:
        """Return the relative humidity [1], by the partial pressures of the water vapour."""
        if ratio >= self.saturated_ratio(temperature) * (1 - 1e-12):
            return 1.0
        return self._asked("R", temperature, "W", ratio)

    def wet_bulb(self, temperature: float, ratio: float) -> float | None:
        """Return the wet bulb [K], None where the library finds none."""
        if ratio >= self.saturated_ratio(temperature) * (1 - 1e-9):
            return temperature
        try:
            return _humid_air("B", temperature, self.pressure, "W", ratio)
        except ValueError:
            return None

    def dew_point(self, temperature: float, ratio: float) -> float | None:
        """Return the dew (or frost) point [K], None for air too dry to have one in the range."""
        if ratio <= self.saturated_ratio(self.LOWEST):
            return None
        return self._asked("D", temperature, "W", min(ratio, self.saturated_ratio(temperature)))

    def water_enthalpy(self, temperature: float) -> float:
        """Return the enthalpy of liquid water, below 0 °C of ice [J/kg], counted as the air's.

        Ice: -333 426.5 + 2096.7 (T - 273.15). Source: IAPWS R14-08 and R10-06, constants at 0 °C.
        """
        if temperature < ICE_POINT:
            return -_ICE_MELTING + _ICE_HEAT_CAPACITY * (temperature - ICE_POINT)
        return self._water.enthalpy(temperature)

    def _asked(self, output: str, temperature: float, key: str, value: float) -> float:
        try:
            return _humid_air(output, temperature, self.pressure, key, value)
        except ValueError:
            raise OutOfRange(
                f"Moist air has no data at {celsius(temperature)} and {bar(self.pressure)} with this humidity.",
                "Check the temperature, the humidity and the pressure.",
            ) from None
