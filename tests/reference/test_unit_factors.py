"""Unit factors against NIST SP 811, and against the unit library's own independent registry."""

from __future__ import annotations

from functools import cache
from typing import Any

import pint
import pytest

from gaugeside.quantities import Kind, labels, unit
from gaugeside.quantities.convert import from_si, to_si
from reference.tables import Factor, unit_factors

FACTORS = unit_factors()

# The figures as the guide itself prints them, seven digits and more.
PRINTED = [
    (Kind.PRESSURE, "psi", 6894.757293168361),
    (Kind.PRESSURE, "inHg", 3386.38864),
    (Kind.PRESSURE, "mmHg", 133.322387415),
    (Kind.PRESSURE, "kgf/cm2", 98066.5),
    (Kind.SPECIFIC_ENTHALPY, "Btu/lb", 2326.0),
    (Kind.POWER, "TR", 3516.85284),
    (Kind.POWER, "hp", 745.69987),
    (Kind.POWER, "metric hp", 735.49875),
    (Kind.POWER, "kcal/h", 1.163),
    (Kind.VOLUME_FLOW, "ft3/min", 4.719474432e-4),
    (Kind.VOLUME_FLOW, "US gal/min", 6.30901964e-5),
    (Kind.VOLUME_FLOW, "imp gal/min", 7.57681667e-5),
    (Kind.TEMPERATURE_DIFFERENCE, "°F", 5 / 9),
]

# The unit library's own names for the same units, where its definition is the same.
LIBRARY_NAMES = {
    ("pressure", "bar"): "bar",
    ("pressure", "psi"): "pound_force_per_square_inch",
    ("pressure", "kgf/cm2"): "technical_atmosphere",
    ("pressure", "inHg"): "inch_Hg",
    ("pressure", "mmHg"): "millimeter_Hg",
    ("pressure", "atm"): "standard_atmosphere",
    ("pressure difference", "psi"): "psi",
    ("temperature", "°F"): "degree_Fahrenheit",
    ("temperature", "degR"): "degree_Rankine",
    ("temperature difference", "°F"): "delta_degree_Fahrenheit",
    ("mass flow", "lb/h"): "pound / hour",
    ("mass flow", "t/h"): "metric_ton / hour",
    ("volume flow", "ft3/min"): "foot ** 3 / minute",
    ("volume flow", "US gal/min"): "gallon / minute",
    ("volume flow", "imp gal/min"): "imperial_gallon / minute",
    ("volume flow", "L/min"): "liter / minute",
    ("heat or power", "Btu/h"): "international_british_thermal_unit / hour",
    ("heat or power", "kcal/h"): "1000 * international_calorie / hour",
    ("heat or power", "hp"): "horsepower",
    ("heat or power", "metric hp"): "metric_horsepower",
    ("specific enthalpy", "Btu/lb"): "international_british_thermal_unit / pound",
    ("specific enthalpy", "kcal/kg"): "1000 * international_calorie / kilogram",
    ("density", "lb/ft3"): "pound / foot ** 3",
    ("length", "ft"): "foot",
}
# Where it means something else: its Btu is the rounded one of ISO (1055.056 J), and with it its ton of refrigeration;
# its torr is a 760th of the atmosphere; its columns of water are at 4 °C, below 1000 kg/m3 by 2.5e-5.
LIBRARY_DIFFERS = [
    ("heat or power", "Btu/h", "british_thermal_unit / hour", 1.4e-7),
    ("heat or power", "TR", "ton_of_refrigeration", 1.4e-7),
    ("pressure", "mmHg", "torr", 1.4e-7),
    ("pressure difference", "inH2O", "inch_H2O_4C", 2.5e-5),
]
IDS = [f"{one.kind}: {one.label}" for one in FACTORS]


@cache
def library_registry() -> Any:
    return pint.UnitRegistry()


def in_si(number: float, kind: Kind, label: str) -> float:
    return to_si(number, unit(kind, label), kind)


@pytest.mark.parametrize("one", FACTORS, ids=IDS)
@pytest.mark.parametrize("number", [1.0, 12.4, -7.25, 123456.0])
def test_every_unit_has_its_published_factor(one: Factor, number: float) -> None:
    kind = Kind(one.kind)
    wanted = float(one.factor) * number + float(one.zero)
    # Four roundings of double precision: one each for the factor, the product, the zero and the sum.
    near = pytest.approx(wanted, rel=1e-15 * 4, abs=1e-15 * 4 * float(one.zero))
    assert in_si(number, kind, one.label) == near
    assert from_si(wanted, unit(kind, one.label), kind) == pytest.approx(
        number, rel=1e-14, abs=1e-14 * float(one.zero / one.factor)
    )


def test_the_table_holds_every_unit_of_every_kind() -> None:
    # A barometer carries the units of a pressure; a ratio and words carry none.
    kinds = [kind for kind in Kind if kind not in (Kind.ABSOLUTE_PRESSURE, Kind.RATIO, Kind.WORDS)]
    known = {
        (kind.value, label)
        for kind in kinds
        for label in labels(kind)
        if unit(kind, label).sense is None or label == "micron"
    }
    assert {(one.kind, one.label) for one in FACTORS} == known


@pytest.mark.parametrize(("kind", "label", "printed"), PRINTED)
def test_factor_agrees_with_the_guide_as_printed(kind: Kind, label: str, printed: float) -> None:
    # Printed to eight digits at the least, so half a unit of the eighth.
    assert in_si(1.0, kind, label) == pytest.approx(printed, rel=7e-9)


@pytest.mark.parametrize(("kind", "label"), LIBRARY_NAMES)
def test_factor_agrees_with_the_library_own_registry(kind: str, label: str) -> None:
    registry = library_registry()
    expression = LIBRARY_NAMES[kind, label]
    quantity = registry.Quantity(12.5, expression) if "*" not in expression else 12.5 * registry(expression)
    theirs = quantity.to_base_units().magnitude if Kind(kind) is not Kind.VOLUME_FLOW else quantity.to("m**3/s").m
    # Its constants are written with ten digits and more; twelve cover them all.
    assert in_si(12.5, Kind(kind), label) == pytest.approx(theirs, rel=1e-12)


@pytest.mark.parametrize(("kind", "label", "name", "apart"), LIBRARY_DIFFERS)
def test_library_means_another_unit(kind: str, label: str, name: str, apart: float) -> None:
    theirs = library_registry()(name).to_base_units().magnitude
    ours = in_si(1.0, Kind(kind), label)
    assert abs(theirs / ours - 1) == pytest.approx(apart, rel=0.2)
