"""Conversion of numbers by the unit library, in a registry that holds only our closed list.

The registry starts empty and is given the definitions below, so no other unit, prefix or constant can
ever match, and it is ready in milliseconds. Factors: NIST Special Publication 811 (2008), appendix B.8
(psi, conventional inch and millimetre of mercury, technical atmosphere, Btu(IT), ton of refrigeration,
horsepower, gallons, conventional water columns).
"""

from __future__ import annotations

from functools import cache
from typing import Any

from gaugeside.quantities.units import SI_UNIT, Kind, Unit

_DEFINITIONS = """
metre = [length]
kilogram = [mass]
second = [time]
kelvin = [temperature]
one = []
percent = 0.01 one
gram_per_kilogram = 0.001 one
grain_per_pound = 0.00014285714285714286 one
foot = 0.3048 metre
kilometre = 1000 metre
celsius = kelvin; offset: 273.15
fahrenheit = 0.5555555555555556 kelvin; offset: 255.3722222222222222
rankine = 0.5555555555555556 kelvin
fahrenheit_difference = 0.5555555555555556 kelvin
pascal = kilogram / metre / second ** 2
hectopascal = 100 pascal
kilopascal = 1000 pascal
megapascal = 1000000 pascal
bar = 100000 pascal
millibar = 100 pascal
psi = 6894.757293168361 pascal
technical_atmosphere = 98066.5 pascal
inch_of_mercury = 3386.388640341 pascal
millimetre_of_mercury = 133.322387415 pascal
micron = 0.133322387415 pascal
standard_atmosphere = 101325 pascal
inch_of_water = 249.08891 pascal
metre_of_water = 9806.65 pascal
kilogram_per_second = kilogram / second
gram_per_second = 0.001 kilogram / second
kilogram_per_minute = 0.016666666666666666 kilogram / second
kilogram_per_hour = 0.0002777777777777778 kilogram / second
tonne_per_hour = 0.2777777777777778 kilogram / second
pound_per_hour = 0.45359237 kilogram_per_hour
pound_per_minute = 0.45359237 kilogram_per_minute
pound_per_second = 0.45359237 kilogram / second
cubic_metre_per_second = metre ** 3 / second
cubic_metre_per_minute = 0.016666666666666666 metre ** 3 / second
cubic_metre_per_hour = 0.0002777777777777778 metre ** 3 / second
litre_per_second = 0.001 metre ** 3 / second
litre_per_minute = 0.001 cubic_metre_per_minute
litre_per_hour = 0.001 cubic_metre_per_hour
cubic_foot_per_minute = 0.028316846592 cubic_metre_per_minute
cubic_foot_per_hour = 0.028316846592 cubic_metre_per_hour
us_gallon_per_minute = 0.003785411784 cubic_metre_per_minute
imperial_gallon_per_minute = 0.00454609 cubic_metre_per_minute
watt = kilogram * metre ** 2 / second ** 3
kilowatt = 1000 watt
megawatt = 1000000 watt
kilojoule_per_minute = 16.666666666666668 watt
kilojoule_per_hour = 0.2777777777777778 watt
btu_per_hour = 0.29307107017222222 watt
thousand_btu_per_hour = 293.07107017222222 watt
ton_of_refrigeration = 3516.8528420666665 watt
kilocalorie_per_hour = 1.163 watt
horsepower = 745.69987158227022 watt
metric_horsepower = 735.49875 watt
joule_per_kilogram = metre ** 2 / second ** 2
kilojoule_per_kilogram = 1000 joule_per_kilogram
btu_per_pound = 2326 joule_per_kilogram
kilocalorie_per_kilogram = 4186.8 joule_per_kilogram
btu_per_pound_fahrenheit = 4186.8 joule_per_kilogram
kilogram_per_cubic_metre = kilogram / metre ** 3
kilojoule_per_cubic_metre = 1000 pascal
btu_per_cubic_foot = 37258.94580783128 pascal
pound_per_cubic_foot = 16.018463373960142 kilogram_per_cubic_metre
"""

_SI_DEFINITION = {
    "Pa": "pascal",
    "K": "kelvin",
    "kg/s": "kilogram_per_second",
    "m3/s": "cubic_metre_per_second",
    "W": "watt",
    "J/kg": "joule_per_kilogram",
    "J/(kg K)": "joule_per_kilogram",
    "kg/m3": "kilogram_per_cubic_metre",
    "J/m3": "pascal",
    "1": "one",
    "kg/kg": "one",
    "m": "metre",
}


@cache
def _registry() -> Any:
    # Imported here: it takes a quarter of a second, and the first frame is painted without it.
    import pint

    registry: Any = pint.UnitRegistry(None, cache_folder=None)
    registry.load_definitions(_DEFINITIONS.strip().splitlines())
    return registry


def warm_up() -> None:
    """Load the unit library; harmless to call from a thread."""
    _registry()


def to_si(number: float, unit: Unit, kind: Kind) -> float:
    """Return `number` of `unit` in the SI unit of `kind`, with no regard to gauge, absolute or vacuum."""
    quantity = _registry().Quantity(float(number), unit.definition)
    return float(quantity.to(_SI_DEFINITION[SI_UNIT[kind]]).magnitude)


def from_si(value: float, unit: Unit, kind: Kind) -> float:
    """Return the SI `value` of `kind` in `unit`, with no regard to gauge, absolute or vacuum."""
    quantity = _registry().Quantity(float(value), _SI_DEFINITION[SI_UNIT[kind]])
    return float(quantity.to(unit.definition).magnitude)
