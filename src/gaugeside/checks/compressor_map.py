"""A compressor's ten-coefficient polynomials, entered once per machine, and what they give at its readings.

X = C1 + C2 S + C3 D + C4 S^2 + C5 S D + C6 D^2 + C7 S^3 + C8 D S^2 + C9 S D^2 + C10 D^3 with S and D the dew
temperatures at suction and discharge in the unit of the data sheet. Source: the form and the order of terms of
AHRI 540 and EN 12900.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from gaugeside.disk import read_toml_file, reason
from gaugeside.errors import Refusal
from gaugeside.quantities import SEA_LEVEL, Dress, Kind, Site, quoted, read, unit
from gaugeside.quantities.convert import from_si, to_si
from gaugeside.refrigerants import find
from gaugeside.text import plain_text

FILE_NAME = "compressors.toml"
_LARGEST = 200_000
_LONGEST_TAG = 60  # [characters]
_KEYS = {
    "refrigerant", "source", "temperature", "mass_flow_unit", "power_unit", "mass_flow", "power", "suction_range",
    "discharge_range", "rated_superheat", "rated_suction_temperature",
}  # fmt: skip
# m/m_rated = 1 + F (v_rated/v - 1), F = 0.75: A. E. Dabiri, C. K. Rice, A compressor simulation model with
# corrections for the level of suction gas superheat, ASHRAE Transactions 87 (1981), part 2; from memory.
SUPERHEAT_FACTOR = 0.75


def polynomial(coefficients: tuple[float, ...], suction: float, discharge: float) -> float:
    """Return X at dew temperatures `suction` and `discharge` in the data sheet's unit, in the data sheet's unit."""
    s, d = suction, discharge
    terms = (1.0, s, d, s * s, s * d, d * d, s**3, d * s * s, s * d * d, d**3)
    return sum(c * term for c, term in zip(coefficients, terms, strict=True))


@dataclass(frozen=True)
class CompressorMap:
    """One machine's polynomials.

    temperature, mass_flow_unit, power_unit: labels of the data sheet's units. mass_flow, power: ten coefficients each,
    either may be empty. suction_range, discharge_range: validity in the data sheet's temperature unit.
    rated_superheat [K] or rated_suction_temperature [K]: the suction gas the coefficients were measured with.
    """

    tag: str
    refrigerant: str
    source: str
    temperature: str
    mass_flow_unit: str
    power_unit: str
    mass_flow: tuple[float, ...] = ()
    power: tuple[float, ...] = ()
    suction_range: tuple[float, ...] = ()
    discharge_range: tuple[float, ...] = ()
    rated_superheat: float | None = None
    rated_suction_temperature: float | None = None

    def plain(self) -> dict[str, Any]:
        """Return it as JSON types."""
        return dict(self.__dict__)

    @classmethod
    def from_plain(cls, plain: Mapping[str, Any]) -> CompressorMap:
        """Return the map that `plain` gave."""
        values: dict[str, Any] = {k: tuple(v) if isinstance(v, list) else v for k, v in plain.items()}
        return cls(**values)

    def own_temperature(self, kelvin: float) -> float:
        """Return a temperature [K] in the data sheet's unit."""
        return from_si(kelvin, unit(Kind.TEMPERATURE, self.temperature), Kind.TEMPERATURE)

    def outside(self, suction: float, discharge: float) -> bool:
        """Whether dew temperatures [K] lie outside the range the coefficients were fitted in."""
        for kelvin, limits in ((suction, self.suction_range), (discharge, self.discharge_range)):
            if limits and not limits[0] <= self.own_temperature(kelvin) <= limits[1]:
                return True
        return False

    def rated_mass_flow(self, suction: float, discharge: float) -> float:
        """Return the mass flow [kg/s] at dew temperatures [K], with the rated suction gas; Refusal without one."""
        return self._value(self.mass_flow, suction, discharge, self.mass_flow_unit, Kind.MASS_FLOW)

    def rated_power(self, suction: float, discharge: float) -> float:
        """Return the electrical power [W] at dew temperatures [K]; Refusal when the polynomial gives none."""
        return self._value(self.power, suction, discharge, self.power_unit, Kind.POWER)

    def _value(self, terms: tuple[float, ...], suction: float, discharge: float, label: str, kind: Kind) -> float:
        value = polynomial(terms, self.own_temperature(suction), self.own_temperature(discharge))
        if value <= 0:
            raise Refusal(
                f"The polynomial of {self.tag} gives no {kind.value} above zero at these temperatures.",
                "Check its coefficients, their order and their units.",
            )
        return to_si(value, unit(kind, label), kind)


def load_maps(folder: Path) -> tuple[dict[str, CompressorMap], list[str]]:
    """Return the compressor maps of a settings folder by tag, and a sentence for each that could not be used."""
    path = folder / FILE_NAME
    try:
        content = read_toml_file(path, _LARGEST)
    except (OSError, ValueError) as fault:
        return {}, [f"{path} could not be read: {reason(fault)}. Its compressor coefficients are left out."]
    maps: dict[str, CompressorMap] = {}
    troubles = []
    for name, table in content.items():
        tag = plain_text(name, _LONGEST_TAG)
        try:
            maps[tag.casefold()] = _map(tag, table)
        except Refusal as refusal:
            troubles.append(f"{FILE_NAME}, {quoted(tag)}: {refusal.sentence()}")
    return maps, troubles


def _map(tag: str, table: Any) -> CompressorMap:
    if not isinstance(table, dict):
        raise Refusal("A machine is a table of its own.", f"Write a line [{tag}] above its coefficients.")
    unknown = sorted(set(table) - _KEYS)
    if unknown:
        raise Refusal(f"{quoted(unknown[0])} is not a key here.", f"The keys are {', '.join(sorted(_KEYS))}.")
    texts = {
        key: table.get(key, "") for key in ("refrigerant", "source", "temperature", "mass_flow_unit", "power_unit")
    }
    for key, text in texts.items():
        if not isinstance(text, str) or len(text) > 200:
            raise Refusal(f"{key} is not a short text.", "Write it in quotes.")
    return CompressorMap(
        tag=tag,
        refrigerant=find(texts["refrigerant"]).designation,
        source=plain_text(texts["source"]),
        temperature=_unit_label(Kind.TEMPERATURE, texts["temperature"], "temperature"),
        mass_flow_unit=_unit_label(Kind.MASS_FLOW, texts["mass_flow_unit"] or "kg/s", "mass_flow_unit"),
        power_unit=_unit_label(Kind.POWER, texts["power_unit"] or "W", "power_unit"),
        mass_flow=_numbers(table, "mass_flow", 10),
        power=_numbers(table, "power", 10),
        suction_range=_numbers(table, "suction_range", 2),
        discharge_range=_numbers(table, "discharge_range", 2),
        rated_superheat=_typed(table, "rated_superheat", Kind.TEMPERATURE_DIFFERENCE),
        rated_suction_temperature=_typed(table, "rated_suction_temperature", Kind.TEMPERATURE),
    )


def _unit_label(kind: Kind, text: str, key: str) -> str:
    try:
        return unit(kind, text).label
    except KeyError:
        raise Refusal(f"{key} = {quoted(text)} is not a unit of {kind.value}.", "The data sheet names it.") from None


def _numbers(table: Mapping[str, Any], key: str, count: int) -> tuple[float, ...]:
    value = table.get(key, [])
    if not isinstance(value, list) or not all(type(n) in (int, float) and abs(n) < 1e30 for n in value):
        raise Refusal(f"{key} is not a list of numbers.", f"Write {count} numbers between square brackets.")
    if value and len(value) != count:
        raise Refusal(f"{key} has {len(value)} numbers.", f"It takes {count}, in the order of the standard.")
    return tuple(float(n) for n in value)


def _typed(table: Mapping[str, Any], key: str, kind: Kind) -> float | None:
    if key not in table:
        return None
    value = table[key]
    if not (isinstance(value, str) or (type(value) in (int, float) and abs(value) < 1e30)):
        raise Refusal(f"{key} is not a reading.", "Write a number, or a reading with its unit in quotes.")
    dress, site = Dress(), Site(SEA_LEVEL.atmosphere)
    return read(str(value), kind, dress.default(kind), dress, site).value
