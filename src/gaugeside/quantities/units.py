"""The closed list of kinds of quantity, and of the units each kind may carry.

A kind is finer than a dimension: a temperature and a temperature difference, or a pressure and a
pressure difference, are different kinds and never stand for each other. The text of a unit is looked up
here, in the list of its kind, and nowhere else.

Conversion factors: NIST Special Publication 811 (2008), appendix B. They reach the unit library as the
definitions in `convert`.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from functools import cache


class Kind(StrEnum):
    """What a number is; the value is the name a person reads."""

    PRESSURE = "pressure"
    ABSOLUTE_PRESSURE = "absolute pressure"
    PRESSURE_DIFFERENCE = "pressure difference"
    TEMPERATURE = "temperature"
    TEMPERATURE_DIFFERENCE = "temperature difference"
    MASS_FLOW = "mass flow"
    VOLUME_FLOW = "volume flow"
    POWER = "heat or power"
    SPECIFIC_ENTHALPY = "specific enthalpy"
    SPECIFIC_ENTROPY = "specific entropy"
    DENSITY = "density"
    VOLUMETRIC_CAPACITY = "volumetric capacity"
    SPECIFIC_HEAT_CAPACITY = "specific heat capacity"
    FRACTION = "fraction"
    HUMIDITY_RATIO = "humidity ratio"
    LENGTH = "length"
    RATIO = "ratio"
    WORDS = "words"


class Sense(StrEnum):
    """From where a pressure is counted."""

    GAUGE = "gauge"
    ABSOLUTE = "absolute"
    VACUUM = "vacuum"


@dataclass(frozen=True)
class Unit:
    """One unit of one kind.

    label: how it is written on the way out, sense included ("bar g").
    definition: its name in the unit library's registry (see `convert`).
    decimals: digits after the point on the way out.
    sense: for pressures that say from where they count; None for a bare pressure unit and all other kinds.
    """

    label: str
    definition: str
    decimals: int
    sense: Sense | None = None


# Per kind: label, registry name, decimals, spellings beside the label (compared as `fold` leaves them).
_PRESSURES: tuple[tuple[str, str, int, str], ...] = (
    ("bar", "bar", 2, "bars"),
    ("kPa", "kilopascal", 1, "kilopascal kilopascals"),
    ("MPa", "megapascal", 4, "megapascal megapascals"),
    ("Pa", "pascal", 0, "pascal pascals"),
    ("hPa", "hectopascal", 1, "hectopascal"),
    ("mbar", "millibar", 1, "millibar millibars mb"),
    ("psi", "psi", 1, "lbf/in2 lb/in2 lbs/in2 lbf/sqin poundspersquareinch"),
    ("kgf/cm2", "technical_atmosphere", 3, "kg/cm2 kgfcm2 kgcm2 kp/cm2 at"),
    ("inHg", "inch_of_mercury", 2, 'inchhg incheshg "hg inchesofmercury inchofmercury'),
    ("mmHg", "millimetre_of_mercury", 1, "torr"),
    ("atm", "standard_atmosphere", 4, "atmosphere atmospheres"),
)
_SUFFIXES = {
    Sense.GAUGE: ("g", "gauge", "gage"),
    Sense.ABSOLUTE: ("a", "abs", "absolute"),
    Sense.VACUUM: ("vac", "vacuum", "v"),
}
_SENSE_LABEL = {Sense.GAUGE: "g", Sense.ABSOLUTE: "abs", Sense.VACUUM: "vac"}
# Bare, these are a vacuum to part of the trade and a gauge pressure to the rest (common practice).
_MERCURY = frozenset({"inch_of_mercury", "millimetre_of_mercury"})
_MICRON = ("micron", "micron", 0, "microns mtorr umhg micronhg micronshg")
# A difference may be typed in every spelling of a temperature.
_CELSIUS = "c degc degreec degreesc celsius degcelsius degreecelsius degreescelsius centigrade"
_FAHRENHEIT = "f degf degreef degreesf fahrenheit degfahrenheit degreefahrenheit degreesfahrenheit"
_KELVIN = "k kelvin kelvins degk"
_RANKINE = "rankine degr degreer"

_OTHERS: dict[Kind, tuple[tuple[str, str, int, str], ...]] = {
    Kind.PRESSURE_DIFFERENCE: (
        *_PRESSURES,
        ("inH2O", "inch_of_water", 2, "inwc inchh2o inchesh2o inwg"),
        ("mH2O", "metre_of_water", 3, "mwc metresofwater"),
    ),
    Kind.TEMPERATURE: (
        ("°C", "celsius", 1, _CELSIUS),
        ("°F", "fahrenheit", 1, _FAHRENHEIT),
        ("K", "kelvin", 2, _KELVIN),
        ("degR", "rankine", 1, _RANKINE),
    ),
    Kind.TEMPERATURE_DIFFERENCE: (
        ("K", "kelvin", 1, f"{_CELSIUS} {_KELVIN} deltac dc cdeg cdiff deltak dk"),
        ("°F", "fahrenheit_difference", 1, f"{_FAHRENHEIT} {_RANKINE} deltaf df fdeg fdiff"),
    ),
    Kind.MASS_FLOW: (
        ("kg/s", "kilogram_per_second", 4, "kg/sec kgpersecond kgs-1"),
        ("g/s", "gram_per_second", 1, "g/sec"),
        ("kg/min", "kilogram_per_minute", 2, "kg/minute"),
        ("kg/h", "kilogram_per_hour", 1, "kg/hr kg/hour kgh-1 kgperhour"),
        ("t/h", "tonne_per_hour", 4, "t/hr tonne/h tonnes/h"),
        ("lb/h", "pound_per_hour", 1, "lb/hr lbs/h lbs/hr lbm/h lbm/hr pph lb/hour poundsperhour"),
        ("lb/min", "pound_per_minute", 2, "lbs/min lbm/min"),
        ("lb/s", "pound_per_second", 4, "lbs/s lbm/s lb/sec"),
    ),
    Kind.VOLUME_FLOW: (
        ("m3/h", "cubic_metre_per_hour", 2, "m3/hr cbm/h m3h-1"),
        ("m3/s", "cubic_metre_per_second", 5, "m3/sec"),
        ("m3/min", "cubic_metre_per_minute", 3, ""),
        ("L/s", "litre_per_second", 3, "litre/s liter/s lps"),
        ("L/min", "litre_per_minute", 2, "litre/min liter/min lpm"),
        ("L/h", "litre_per_hour", 1, "litre/h liter/h lph l/hr"),
        ("ft3/min", "cubic_foot_per_minute", 1, "cfm cuft/min"),
        ("ft3/h", "cubic_foot_per_hour", 1, "cfh cuft/h"),
        ("US gal/min", "us_gallon_per_minute", 2, "usgpm usgallon/min usgallons/min"),
        ("imp gal/min", "imperial_gallon_per_minute", 2, "impgpm igpm ukgal/min imperialgal/min"),
    ),
    Kind.POWER: (
        ("kW", "kilowatt", 2, "kilowatt kilowatts kj/s"),
        ("W", "watt", 0, "watt watts j/s"),
        ("MW", "megawatt", 4, "megawatt megawatts"),
        ("Btu/h", "btu_per_hour", 0, "btu/hr btuh btu/hour btuperhour"),
        ("kBtu/h", "thousand_btu_per_hour", 2, "kbtu/hr mbh kbtuh"),
        (
            "TR",
            "ton_of_refrigeration",
            2,
            "ton tons tonr tonsr tonsofrefrigeration tonofrefrigeration usrt ustr",
        ),
        ("kcal/h", "kilocalorie_per_hour", 0, "kcal/hr frigories frigorie/h fg/h"),
        ("hp", "horsepower", 2, "bhp horsepower"),
        ("metric hp", "metric_horsepower", 2, "ps cv hpmetric"),
        ("kJ/min", "kilojoule_per_minute", 1, ""),
        ("kJ/h", "kilojoule_per_hour", 0, "kj/hr"),
    ),
    Kind.SPECIFIC_ENTHALPY: (
        ("kJ/kg", "kilojoule_per_kilogram", 2, "kjkg-1"),
        ("J/kg", "joule_per_kilogram", 0, ""),
        ("Btu/lb", "btu_per_pound", 2, "btu/lbm"),
        ("kcal/kg", "kilocalorie_per_kilogram", 2, ""),
    ),
    Kind.SPECIFIC_ENTROPY: (
        ("kJ/(kg K)", "kilojoule_per_kilogram", 4, "kj/kg/k kj/kg-k"),
        ("Btu/(lb °F)", "btu_per_pound_fahrenheit", 4, "btu/lbf btu/lb-f btu/lbr"),
    ),
    Kind.SPECIFIC_HEAT_CAPACITY: (
        ("kJ/(kg K)", "kilojoule_per_kilogram", 3, "kj/kg/k kj/kg-k"),
        ("Btu/(lb °F)", "btu_per_pound_fahrenheit", 4, "btu/lbf btu/lb-f btu/lbr"),
    ),
    Kind.DENSITY: (
        ("kg/m3", "kilogram_per_cubic_metre", 2, ""),
        ("lb/ft3", "pound_per_cubic_foot", 3, "lbm/ft3"),
    ),
    Kind.VOLUMETRIC_CAPACITY: (
        ("kJ/m3", "kilojoule_per_cubic_metre", 0, ""),
        ("Btu/ft3", "btu_per_cubic_foot", 2, ""),
    ),
    Kind.FRACTION: (
        ("%", "percent", 1, "percent pct"),
        ("kg/kg", "one", 3, ""),
    ),
    Kind.HUMIDITY_RATIO: (
        ("g/kg", "gram_per_kilogram", 2, ""),
        ("kg/kg", "one", 5, ""),
        ("gr/lb", "grain_per_pound", 1, "grain/lb grains/lb"),
        ("lb/lb", "one", 5, ""),
    ),
    Kind.LENGTH: (
        ("m", "metre", 0, "metre metres meter meters masl"),
        ("ft", "foot", 0, "foot feet '"),
        ("km", "kilometre", 3, "kilometre kilometres"),
    ),
    Kind.RATIO: (("", "one", 2, ""),),
    Kind.WORDS: (),
}

SI_UNIT: dict[Kind, str] = {
    Kind.PRESSURE: "Pa",
    Kind.ABSOLUTE_PRESSURE: "Pa",
    Kind.PRESSURE_DIFFERENCE: "Pa",
    Kind.TEMPERATURE: "K",
    Kind.TEMPERATURE_DIFFERENCE: "K",
    Kind.MASS_FLOW: "kg/s",
    Kind.VOLUME_FLOW: "m3/s",
    Kind.POWER: "W",
    Kind.SPECIFIC_ENTHALPY: "J/kg",
    Kind.SPECIFIC_ENTROPY: "J/(kg K)",
    Kind.SPECIFIC_HEAT_CAPACITY: "J/(kg K)",
    Kind.DENSITY: "kg/m3",
    Kind.VOLUMETRIC_CAPACITY: "J/m3",
    Kind.FRACTION: "1",
    Kind.HUMIDITY_RATIO: "kg/kg",
    Kind.LENGTH: "m",
    Kind.RATIO: "1",
    Kind.WORDS: "",
}

# Spellings that name two different units in use, or one that is off by a power of ten from the likely one.
AMBIGUOUS: dict[str, tuple[str, str]] = {
    "mPa": ("mPa is the millipascal", "Write MPa for megapascal, or mbar."),
    "Mbar": ("Mbar is the megabar", "Write mbar for millibar, or bar."),
    "mW": ("mW is the milliwatt", "Write MW for megawatt, or kW."),
    "gpm": ("gpm does not say which gallon", "Write US gal/min or imp gal/min, or L/min."),
    "rt": (
        "RT is the US ton of refrigeration to some and the larger Japanese one to others",
        "Write TR for 12 000 Btu/h (3.517 kW), or kW.",
    ),
    "mbtu/h": (
        "MBtu/h is a thousand Btu/h to some and a million to others",
        "Write kBtu/h for a thousand, or kW.",
    ),
    "r": ("R alone could be degrees Rankine or a refrigerant", "Write degR for degrees Rankine."),
}
_AMBIGUOUS_SAME = {"mbtuh": "mbtu/h", "mbtu/hr": "mbtu/h", "mmbtu/h": "mbtu/h", "gal/min": "gpm"}


def fold(text: str) -> str:
    """Return the text of a unit without what people vary: case, blanks, brackets, dots, degree signs."""
    for old, new in (
        ("²", "2"),
        ("³", "3"),
        ("℃", "c"),
        ("℉", "f"),
        ("µ", "u"),
        ("μ", "u"),
        ("Δ", "delta"),
        ("″", '"'),
        ("”", '"'),
        ("″", '"'),
        ("’", "'"),
        ("′", "'"),
        ("⁻¹", "-1"),
    ):
        text = text.replace(old, new)
    return _heard(text).casefold()


def _heard(text: str) -> str:
    """Return `text` without the blanks, brackets and signs that say nothing in a unit."""
    dropped = "\u00a0\u202f\u2009 \t.()[]°º˚^·*_"
    return "".join(c for c in text if c not in dropped)


def _enter(found: dict[str, Unit], spelling: str, unit: Unit) -> None:
    """Enter a spelling; ValueError when it would name a second unit, so that the list cannot become ambiguous."""
    if found.setdefault(spelling, unit) != unit:
        raise ValueError(f"{spelling!r} would name both {found[spelling].label} and {unit.label}")


def _pressures() -> dict[str, Unit]:
    found: dict[str, Unit] = {}
    for label, definition, decimals, more in _PRESSURES:
        spellings = {fold(label), *more.split()}
        for spelling in spellings:
            _enter(found, spelling, Unit(label, definition, decimals))
        for sense, suffixes in _SUFFIXES.items():
            unit = Unit(f"{label} {_SENSE_LABEL[sense]}", definition, decimals, sense)
            for spelling in spellings:
                for suffix in suffixes:
                    _enter(found, spelling + suffix, unit)
    label, definition, decimals, more = _MICRON
    for spelling in (label, *more.split(), "micronabs", "micronsabs"):
        _enter(found, spelling, Unit(label, definition, decimals, Sense.ABSOLUTE))
    return found


@cache
def spellings(kind: Kind) -> dict[str, Unit]:
    """Return every accepted spelling (as `fold` leaves it) of the units of `kind`, with its unit."""
    if kind in (Kind.PRESSURE, Kind.ABSOLUTE_PRESSURE):
        return _pressures()
    found: dict[str, Unit] = {}
    for label, definition, decimals, more in _OTHERS[kind]:
        for spelling in filter(None, {fold(label), *more.split()}):
            _enter(found, spelling, Unit(label, definition, decimals))
    return found


@cache
def unit(kind: Kind, label: str) -> Unit:
    """Return the unit of `kind` whose label this is ("bar g", "°F"); KeyError when there is none."""
    if kind is Kind.RATIO:
        return Unit("", "one", 2)
    return spellings(kind)[fold(label)]


@cache
def labels(kind: Kind) -> tuple[str, ...]:
    """Return the labels of the units of `kind` in the order in which they are offered."""
    return tuple(dict.fromkeys(u.label for u in spellings(kind).values()))


def is_vacuum_to_some(one: Unit) -> bool:
    """Return whether a bare reading in this unit may be meant as a vacuum as well as above the atmosphere."""
    return one.sense is None and one.definition in _MERCURY


def ambiguous(text: str) -> tuple[str, str] | None:
    """Return why this unit text names no single unit and what to write, or None."""
    squeezed = "".join(_heard(text).split())
    if squeezed in AMBIGUOUS:
        return AMBIGUOUS[squeezed]
    folded = fold(text)
    for exact in ("mPa", "Mbar", "mW"):
        # The sense may follow: mPag. Written all in one case it is casual typing and passes.
        if squeezed.startswith(exact) and fold(squeezed) in spellings(Kind.PRESSURE) | spellings(Kind.POWER):
            return AMBIGUOUS[exact]
    folded = _AMBIGUOUS_SAME.get(folded, folded)
    return AMBIGUOUS.get(folded)
