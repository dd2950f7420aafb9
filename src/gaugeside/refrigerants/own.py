"""A user's own blends and local names, from a file in the settings folder."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from ..disk import read_toml_file, reason
from .catalogue import LONGEST_NAME, Refrigerant, blend_gwp, catalogue, folded, model_kinds, natural_order

FILE = "refrigerants.toml"
LARGEST_FILE = 200_000
MOST_ENTRIES = 500
MOST_COMPONENTS = 8
SUM_TOLERANCE = 1e-3


class _Bad(ValueError):
    """Why one entry is not taken."""


def load_own(folder: Path) -> list[str]:
    """Take the own blends and local names of a folder into the catalogue.

    Returns one sentence for each thing that could not be taken; a bad file never raises. The file:

        [names]
        "plant gas" = "R-454C"

        [blends."Site mix 1"]
        composition = { "R-32" = 0.3, "R-1234yf" = 0.7 }    # mass fractions
        names = ["mix 1"]
    """
    path = folder / FILE
    catalogue.cache_clear()  # what an earlier call took in is forgotten
    try:
        data = read_toml_file(path, LARGEST_FILE)
    except (OSError, ValueError) as fault:
        return [f"{FILE} could not be read: {reason(fault)}."]
    problems = [
        f"{FILE}: “{_shown(key)}” is not known here; write [names] or [blends.NAME]."
        for key in data
        if key not in ("names", "blends")
    ]
    problems += _each(data.get("blends", {}), "blends", _take_blend)
    problems += _each(data.get("names", {}), "names", _take_name)
    return problems


def _each(table: Any, what: str, take: Any) -> list[str]:
    if not isinstance(table, dict):
        return [f"{FILE}: [{what}] must be a table."]
    problems = []
    if len(table) > MOST_ENTRIES:
        problems.append(f"{FILE}: only the first {MOST_ENTRIES} of [{what}] are read.")
    for name, value in list(table.items())[:MOST_ENTRIES]:
        try:
            take(name, value)
        except _Bad as error:
            problems.append(f"{FILE}: “{_shown(name)}” was not taken: {error}")
    return problems


def _shown(text: str) -> str:
    return "".join(c if c.isprintable() else "?" for c in text[:LONGEST_NAME])


def _check_name(name: Any, owner: str = "") -> str:
    """Return the name, stripped; `owner` is the designation that may already carry it."""
    if not isinstance(name, str) or not folded(name):
        raise _Bad("a name needs at least one letter or digit.")
    if len(name) > LONGEST_NAME:
        raise _Bad(f"a name may have at most {LONGEST_NAME} characters.")
    if not name.isprintable():
        raise _Bad("a name may not contain control characters.")
    taken = catalogue().get(name)
    if taken is not None and taken.designation != owner:
        raise _Bad(f"this name already means {taken.designation}.")
    return name.strip()


def _take_name(name: str, target: Any) -> None:
    if not isinstance(target, str):
        raise _Bad("a local name must point to a designation in quotes.")
    meant = catalogue().get(target) if len(target) <= LONGEST_NAME else None
    if meant is None:
        raise _Bad(f"“{_shown(target)}” is not in the catalogue.")
    catalogue().rename(meant.designation, _check_name(name, meant.designation))


def _composition(value: Any) -> tuple[tuple[str, float], ...]:
    if not isinstance(value, dict) or not 2 <= len(value) <= MOST_COMPONENTS:
        raise _Bad(f"its composition must name 2 to {MOST_COMPONENTS} components with their mass fractions.")
    parts: dict[str, float] = {}
    for name, share in value.items():
        component = catalogue().get(name) if len(name) <= LONGEST_NAME else None
        if component is None:
            raise _Bad(f"its component “{_shown(name)}” is not in the catalogue.")
        if component.is_blend or not component.modelled:
            raise _Bad(f"its component {component.designation} is not a pure fluid with a property model.")
        if isinstance(share, bool) or not isinstance(share, int | float) or not 0.0 < share < 1.0:
            raise _Bad(f"the mass fraction of {component.designation} must lie between 0 and 1.")
        if component.designation in parts:
            raise _Bad(f"it names {component.designation} twice.")
        parts[component.designation] = float(share)
    total = sum(parts.values())
    if abs(total - 1.0) > SUM_TOLERANCE:
        raise _Bad(f"its mass fractions sum to {total:g} instead of 1.")
    return tuple((name, share / total) for name, share in sorted(parts.items(), key=lambda p: natural_order(p[0])))


def _take_blend(name: str, table: Any) -> None:
    designation = _check_name(name)
    if not isinstance(table, dict):
        raise _Bad("it must be a table with a composition.")
    unknown = sorted(set(table) - {"composition", "names", "class"})
    if unknown:
        raise _Bad(f"“{_shown(unknown[0])}” is not known here; write composition, names or class.")
    composition = _composition(table.get("composition"))
    names = table.get("names", [])
    if not isinstance(names, list) or len(names) > 20:
        raise _Bad("its names must be a list of at most 20.")
    safety_class = table.get("class", "")
    if safety_class not in ("", "A1", "A2L", "A2", "A3", "B1", "B2L", "B2", "B3"):
        raise _Bad("its class must be one of A1, A2L, A2, A3, B1, B2L, B2, B3.")
    pures = [catalogue().by_designation[component] for component, _ in composition]
    gwp = blend_gwp((pure.gwp, share) for pure, (_, share) in zip(pures, composition, strict=True))
    model = model_kinds()["own blend"]
    catalogue().add(
        Refrigerant(
            designation=designation,
            names=tuple(_check_name(other) for other in names),
            nature="zeotrope",
            composition=composition,
            safety_class=safety_class,
            gwp=gwp,
            gwp_source=f"{pures[0].gwp_source}; by mass from the components" if gwp is not None else "",
            library_fluid="&".join(pure.library_fluid for pure in pures),
            critical_temperature=0.0,
            critical_pressure=0.0,
            minimum_temperature=0.0,
            modelled=True,
            reason="",
            model_uncertainty=float(model["uncertainty"]),
            model_uncertainty_reason=model["reason"],
            own=True,
        )
    )
