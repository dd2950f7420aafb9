"""In which units a reader wants numbers, and how a number is written."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field

from gaugeside.errors import Refusal
from gaugeside.quantities.convert import from_si
from gaugeside.quantities.site import Site
from gaugeside.quantities.units import Kind, Sense, Unit, fold, labels, spellings, unit

_SI: dict[Kind, str] = {
    Kind.PRESSURE: "bar",
    Kind.ABSOLUTE_PRESSURE: "kPa",
    Kind.PRESSURE_DIFFERENCE: "bar",
    Kind.TEMPERATURE: "°C",
    Kind.TEMPERATURE_DIFFERENCE: "K",
    Kind.MASS_FLOW: "kg/s",
    Kind.VOLUME_FLOW: "m3/h",
    Kind.POWER: "kW",
    Kind.SPECIFIC_ENTHALPY: "kJ/kg",
    Kind.SPECIFIC_ENTROPY: "kJ/(kg K)",
    Kind.SPECIFIC_HEAT_CAPACITY: "kJ/(kg K)",
    Kind.DENSITY: "kg/m3",
    Kind.VOLUMETRIC_CAPACITY: "kJ/m3",
    Kind.FRACTION: "%",
    Kind.HUMIDITY_RATIO: "g/kg",
    Kind.LENGTH: "m",
    Kind.RATIO: "",
}
_IP: dict[Kind, str] = _SI | {
    Kind.PRESSURE: "psi",
    Kind.ABSOLUTE_PRESSURE: "inHg",
    Kind.PRESSURE_DIFFERENCE: "psi",
    Kind.TEMPERATURE: "°F",
    Kind.TEMPERATURE_DIFFERENCE: "°F",
    Kind.MASS_FLOW: "lb/h",
    Kind.VOLUME_FLOW: "ft3/min",
    Kind.POWER: "Btu/h",
    Kind.SPECIFIC_ENTHALPY: "Btu/lb",
    Kind.SPECIFIC_ENTROPY: "Btu/(lb °F)",
    Kind.SPECIFIC_HEAT_CAPACITY: "Btu/(lb °F)",
    Kind.DENSITY: "lb/ft3",
    Kind.VOLUMETRIC_CAPACITY: "Btu/ft3",
    Kind.HUMIDITY_RATIO: "gr/lb",
    Kind.LENGTH: "ft",
}
_SYSTEMS = {"si": _SI, "ip": _IP}
# Kinds that run over decades from machine to machine: a pump's 124 W are not 0.12 kW when a meter is good for 1 %.
_THREE_DIGITS = (Kind.MASS_FLOW, Kind.VOLUME_FLOW, Kind.POWER)
# Kinds whose unit a person may choose singly, in the order of the site pane.
CHOOSABLE = (
    Kind.PRESSURE,
    Kind.TEMPERATURE,
    Kind.TEMPERATURE_DIFFERENCE,
    Kind.MASS_FLOW,
    Kind.POWER,
    Kind.SPECIFIC_ENTHALPY,
)


@dataclass(frozen=True)
class Dress:
    """The units of one reader.

    system: "si" or "ip" (inch-pound).
    singles: kind -> bare unit label that differs from the system's ("psi" for pressure).
    bare: how a pressure without "g" or "abs" is taken.
    """

    system: str = "si"
    singles: Mapping[Kind, str] = field(default_factory=dict)
    bare: Sense = Sense.GAUGE

    def unit(self, kind: Kind) -> Unit:
        """Return the unit in which this reader is shown `kind`; pressures without a sense."""
        return unit(kind, self.singles.get(kind, _SYSTEMS[self.system][kind]))

    def default(self, kind: Kind) -> Unit:
        """Return the unit a bare number takes in a fresh field; pressures with their sense."""
        shown = self.unit(kind)
        if kind is Kind.PRESSURE:
            return with_sense(shown, self.bare)
        if kind is Kind.FRACTION:
            # 0.25 alone is a quarter, never a quarter of a percent.
            return unit(kind, "kg/kg")
        return shown


def checked_single(kind: Kind, label: str) -> str:
    """Return the label of the single unit a person asks for; Refusal when `kind` does not have it."""
    found = spellings(kind).get(fold(label))
    if found is not None and found.sense is None:
        return found.label
    raise Refusal(f"{label!r} is not a unit of {kind.value} here.", f"Choose one of {', '.join(bare_labels(kind))}.")


def bare_labels(kind: Kind) -> tuple[str, ...]:
    """Return the labels of the units of `kind` that do not say gauge, absolute or vacuum."""
    return tuple(label for label in labels(kind) if unit(kind, label).sense is None)


def with_sense(bare: Unit, sense: Sense) -> Unit:
    """Return a bare pressure unit as gauge, absolute or vacuum."""
    suffix = {Sense.GAUGE: "g", Sense.ABSOLUTE: "abs", Sense.VACUUM: "vac"}[sense]
    return unit(Kind.PRESSURE, f"{bare.label} {suffix}")


def in_unit(value: float, to: Unit, kind: Kind, site: Site) -> float:
    """Return the SI `value` as the number an instrument in that unit shows at this site."""
    if to.sense is Sense.GAUGE:
        value = value - site.atmosphere
    elif to.sense is Sense.VACUUM:
        value = site.atmosphere - value
    return from_si(value, to, kind)


def number(value: float, decimals: int, *, fixed: bool = False, three: bool = False) -> str:
    """Return `value` with fixed decimals, or with three significant digits where those would hide it.

    fixed: keep to the decimals, as in the columns of a table. three: never fewer than three digits.
    """
    if not math.isfinite(value):
        return "-"
    small = abs(value) < 10.0 ** (1 - decimals) and decimals > 1
    if value != 0 and not fixed and (small or three):
        wanted = 2 - math.floor(math.log10(abs(value)))
        text = f"{value:.{max(decimals, min(wanted, decimals + 4))}f}"
    else:
        text = f"{value:.{decimals}f}"
    # Nothing is left of it: zero, and without a sign.
    return f"{0:.{decimals}f}" if float(text) == 0 else text


def write(value: float, to: Unit, kind: Kind, site: Site) -> str:
    """Return the SI `value` as text in `to`, unit included."""
    count, decimals = in_unit(value, to, kind, site), to.decimals
    if to.sense is Sense.ABSOLUTE and count < 1:
        # A deep vacuum in a large unit is still a pressure, not zero.
        decimals = max(decimals, 2)
    # A gauge pressure near zero is the small difference of two larger ones: more digits would be invented.
    fixed = to.sense in (Sense.GAUGE, Sense.VACUUM)
    return f"{number(count, decimals, fixed=fixed, three=kind in _THREE_DIGITS)} {to.label}".strip()


def shown(value: float, kind: Kind, dress: Dress, site: Site) -> str:
    """Return the SI `value` in the reader's unit; a pressure is written absolute, a difference in K and °F."""
    if kind is Kind.PRESSURE:
        return write(value, with_sense(dress.unit(kind), Sense.ABSOLUTE), kind, site)
    if kind is Kind.ABSOLUTE_PRESSURE:
        return f"{write(value, dress.unit(kind), kind, site)} abs"
    return write(value, dress.unit(kind), kind, site)


def gauge_and_absolute(value: float, dress: Dress, site: Site) -> tuple[str, str]:
    """Return a pressure as gauge and as absolute text in the reader's unit, vacuum said as vacuum."""
    bare = dress.unit(Kind.PRESSURE)
    gauge = write(value, with_sense(bare, Sense.GAUGE), Kind.PRESSURE, site)
    return gauge, write(value, with_sense(bare, Sense.ABSOLUTE), Kind.PRESSURE, site)


def both_differences(value: float, dress: Dress, site: Site) -> tuple[str, str]:
    """Return a temperature difference in K and in °F, the reader's own first."""
    kind = Kind.TEMPERATURE_DIFFERENCE
    texts = [write(value, unit(kind, label), kind, site) for label in ("K", "°F")]
    return (texts[1], texts[0]) if dress.unit(kind).label == "°F" else (texts[0], texts[1])
