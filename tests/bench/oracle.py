"""A second reader of readings, which shares nothing with the program's: spellings as the trade writes them, by hand,
published factors, exact arithmetic. It makes well-formed texts with their value, and judges what was made of others.
"""

from __future__ import annotations

import random
import re
from dataclasses import dataclass
from fractions import Fraction

from reference.tables import unit_factors

FACTORS = {(one.kind, one.label): one for one in unit_factors()}
ATMOSPHERE = Fraction(101325)

# Label in the table of published factors -> spellings, without case, blanks, points and brackets.
_PRESSURES = {
    "bar": "bar bars", "kPa": "kpa kilopascal kilopascals", "MPa": "mpa megapascal megapascals",
    "Pa": "pa pascal pascals", "hPa": "hpa hectopascal", "mbar": "mbar millibar millibars mb",
    "psi": "psi lbf/in2 lb/in2 lbs/in2 lbf/sqin poundspersquareinch",
    "kgf/cm2": "kgf/cm2 kg/cm2 kp/cm2 at kgfcm2 kgcm2",
    "inHg": 'inhg inchhg incheshg "hg inchesofmercury inchofmercury', "mmHg": "mmhg torr",
    "atm": "atm atmosphere atmospheres",
}  # fmt: skip
_CELSIUS = "c degc degreec degreesc celsius degcelsius degreecelsius degreescelsius centigrade"
_FAHRENHEIT = "f degf degreef degreesf fahrenheit degfahrenheit degreefahrenheit degreesfahrenheit"
_OTHERS = {
    "temperature": {
        "°C": _CELSIUS, "°F": _FAHRENHEIT, "K": "k kelvin kelvins degk", "degR": "degr degreer rankine",
    },
    "temperature difference": {
        "K": f"k kelvin kelvins degk {_CELSIUS} deltac dc deltak dk cdeg cdiff",
        "°F": f"{_FAHRENHEIT} degr degreer rankine deltaf df fdeg fdiff",
    },
    "mass flow": {
        "kg/s": "kg/s kg/sec", "g/s": "g/s g/sec", "kg/min": "kg/min", "kg/h": "kg/h kg/hr", "t/h": "t/h",
        "lb/h": "lb/h lb/hr lbs/h lbs/hr lbm/h pph", "lb/min": "lb/min", "lb/s": "lb/s",
    },
    "heat or power": {
        "kW": "kw kilowatt kj/s", "W": "w watt watts j/s", "MW": "mw megawatt", "Btu/h": "btu/h btu/hr btuh",
        "kBtu/h": "kbtu/h mbh", "TR": "tr ton tons", "kcal/h": "kcal/h", "hp": "hp bhp horsepower",
        "metric hp": "metrichp ps cv", "kJ/min": "kj/min", "kJ/h": "kj/h kj/hr",
    },
    "specific enthalpy": {
        "kJ/kg": "kj/kg", "J/kg": "j/kg", "Btu/lb": "btu/lb btu/lbm", "kcal/kg": "kcal/kg",
    },
    "fraction": {"%": "% percent pct", "kg/kg": "kg/kg"},
    "length": {"m": "m metre metres meter meters masl", "ft": "ft foot feet '", "km": "km"},
    "volume flow": {
        "m3/h": "m3/h m3/hr", "m3/s": "m3/s", "L/s": "l/s lps", "L/min": "l/min lpm", "L/h": "l/h lph",
        "ft3/min": "ft3/min cfm cuft/min", "US gal/min": "usgal/min usgpm", "imp gal/min": "impgal/min igpm",
    },
    "pressure difference": {**_PRESSURES, "inH2O": "inh2o inwc", "mH2O": "mh2o"},
}  # fmt: skip
# In these a bare number above zero is a vacuum to some and a gauge reading to others.
_UP_OR_DOWN = ("inHg", "mmHg")
_SENSES = {"g": "g gauge gage", "abs": "a abs absolute", "vac": "v vac vacuum"}
# Spellings whose case alone tells a thousand million apart.
_FORBIDDEN = ("mPa", "Mbar", "mW")

_NOT_HEARD = re.compile(r"[\s.()\[\]°º˚^·*_]")
_BLANKS = dict.fromkeys(map(ord, "\u00a0\u202f\u2009"), " ")
_NUMBER = re.compile(r"\s*([-+−–‒])?\s*([0-9.,'’ ]*[0-9][.,]?)([eE][+-]?[0-9]{1,3})?(?![0-9])")


@dataclass(frozen=True)
class Unit:
    """A unit the oracle knows: label of its factor, and for a pressure from where it counts."""

    label: str
    sense: str = ""


def _units() -> dict[str, dict[str, Unit]]:
    found = {
        kind: {word: Unit(label) for label, words in labels.items() for word in words.split()}
        for kind, labels in _OTHERS.items()
    }
    pressures = {word: Unit(label) for label, words in _PRESSURES.items() for word in words.split()}
    for word, unit in list(pressures.items()):
        for sense, suffixes in _SENSES.items():
            pressures |= {word + suffix: Unit(unit.label, sense) for suffix in suffixes.split()}
    micron = ("micron", "microns", "micronabs", "micronsabs", "mtorr", "umhg", "micronhg", "micronshg")
    found["pressure"] = pressures | {word: Unit("micron", "abs") for word in micron}
    return found


UNITS = _units()
KINDS = tuple(UNITS)


@dataclass(frozen=True)
class Written:
    """A reading as a careful person writes it; value: in SI, None when it has no meaning or more than one."""

    text: str
    kind: str
    value: Fraction | None


def value_of(number: Fraction, kind: str, unit: Unit) -> Fraction | None:
    """Return a number of a unit in SI, None for what nothing can have or what has two meanings."""
    factor = FACTORS[kind, unit.label]
    value = number * factor.factor + factor.zero
    if kind == "pressure":
        if not unit.sense and unit.label in _UP_OR_DOWN and number > 0:
            return None
        if unit.sense == "vac":
            value = ATMOSPHERE - value if number >= 0 else Fraction(-1)
        elif unit.sense != "abs":
            value += ATMOSPHERE
    if (kind in ("pressure", "temperature") and value <= 0) or (kind == "fraction" and not 0 <= value <= 1):
        return None
    return value


def written(chance: random.Random) -> Written:
    """Write down one reading."""
    kind = chance.choice(KINDS)
    if chance.random() < 0.02:
        word = chance.choice(_FORBIDDEN)
        kind = "heat or power" if "W" in word else "pressure"
        apart = chance.choice(["", " ", ".", "("])
        return Written(f"{chance.randrange(100)} {word[0]}{apart}{word[1:]}", kind, None)
    word = chance.choice(sorted(UNITS[kind]))
    number, text = _number(chance)
    unit = UNITS[kind][word]
    return Written(
        text + chance.choice(["", " ", "  ", "\u00a0"]) + _dressed(word, chance), kind, value_of(number, kind, unit)
    )


def _number(chance: random.Random) -> tuple[Fraction, str]:
    whole = str(chance.randrange(10 ** chance.choice([0, 1, 2, 3, 6])))
    decimals = "".join(chance.choice("0123456789") for _ in range(chance.choice([0, 0, 1, 1, 2, 3, 4])))
    value = Fraction(f"{whole}.{decimals or '0'}")
    point = chance.choice([".", ","]) if decimals else ""
    by = chance.choice(["", "", " ", "'", "\u00a0", "." if point == "," else ","])
    groups = whole if len(whole) < 4 else f"{int(whole):_}"
    if "_" in groups and by and (decimals or by not in ".,"):
        text = groups.replace("_", by) + point + decimals
    else:
        by, text = "", whole + point + decimals
    if not by and point == "," and len(decimals) == 3 and 1 <= len(whole) <= 3 and whole != "0":
        text = f"{whole}.{decimals}"  # with a comma it could be a thousand
    sign = chance.choice(["", "", "", "-", "−", "+"])
    return (-value if sign in ("-", "−") else value), sign + text


def _dressed(word: str, chance: random.Random) -> str:
    """Return a unit as people vary it, never in a case that would make another one of it."""
    for sense in ("gauge", "absolute", "abs", "vacuum", "vac"):
        if word.endswith(sense) and chance.random() < 0.7:
            head = word.removesuffix(sense)
            return chance.choice([f"{head} {sense}", f"{head}({sense})", f"{head} {sense.upper()}"])
    return chance.choice([word, word.upper(), {"degc": "°C", "degf": "°F"}.get(word, word)])


def mistaken(text: str, kind: str, value: float) -> str:
    """Return why `value` cannot be what `text` means, "" when it can, "?" where the oracle does not know the unit."""
    plain = text.translate(_BLANKS).strip()
    found = _NUMBER.match(plain)
    if found is None:
        return "it has no number"
    sign, digits, exponent = found.groups()
    rest = plain[found.end() :]
    squeezed = _NOT_HEARD.sub("", rest)
    if any(squeezed.startswith(word) for word in _FORBIDDEN):
        return "its case names another unit"
    unit = UNITS[kind].get(squeezed.replace("²", "2").replace("³", "3").casefold())
    if unit is None:
        return "?"
    numbers = _meanings(digits)
    if not numbers:
        return "its separators make no number"
    power = Fraction(10) ** int(exponent[1:]) if exponent else Fraction(1)
    for number in numbers:
        meant = value_of((-number if sign not in (None, "+") else number) * power, kind, unit)
        if meant is not None and abs(float(meant) - value) <= 1e-9 * max(abs(value), abs(float(meant)), 1e-9):
            return ""
    return "it means another number"


def _meanings(digits: str) -> set[Fraction]:
    """Return every number that digits and separators can stand for, none where that is a matter of taste."""
    digits = digits.strip().replace("’", "'")
    if re.fullmatch(r"[1-9][0-9]{0,2},[0-9]{3}", digits):
        return set()
    groups = re.split(r"[ .,']", digits)
    whole = Fraction(int("".join(groups) or "0"))
    meanings = set()
    if len(groups) == 1 or (1 <= len(groups[0]) <= 3 and all(len(group) == 3 for group in groups[1:])):
        meanings.add(whole)
    last = max(digits.rfind("."), digits.rfind(","))
    if last >= 0 and re.fullmatch(r"[0-9]*", digits[last + 1 :]):
        meanings.add(whole / 10 ** len(digits[last + 1 :]))
    return meanings
