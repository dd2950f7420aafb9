"""Published values as data: the tables beside this module, read without anything of the program."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path

_HERE = Path(__file__).parent


def rows(name: str) -> list[dict[str, str]]:
    """Return the rows of one of the tables."""
    with (_HERE / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def exact(text: str) -> Fraction:
    """Return a number written as decimals with * and /, exactly."""
    product = Fraction(1)
    for part in text.split("*"):
        first, *divisors = part.split("/")
        product *= Fraction(first)
        for divisor in divisors:
            product /= Fraction(divisor)
    return product


@dataclass(frozen=True)
class Factor:
    """One unit: value in SI = number * factor + zero."""

    kind: str
    label: str
    factor: Fraction
    zero: Fraction
    source: str


def unit_factors() -> list[Factor]:
    """Return the published factor of every unit of every kind."""
    return [
        Factor(row["kind"], row["label"], exact(row["factor"]), exact(row["zero"]), row["source"])
        for row in rows("unit_factors.csv")
    ]
