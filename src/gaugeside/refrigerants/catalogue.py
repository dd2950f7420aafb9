"""The catalogue: which refrigerants there are, what they are made of, and how a person writes them."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterable
from dataclasses import dataclass, replace
from functools import cache, lru_cache
from pathlib import Path
from typing import Any

from ..errors import UnknownRefrigerant

DATA = Path(__file__).with_name("catalogue.toml")
LONGEST_NAME = 60
FLAMMABLE = ("2L", "2", "3")


@dataclass(frozen=True)
class Refrigerant:
    """One refrigerant as the catalogue knows it.

    nature: "pure", "azeotrope" or "zeotrope"; composition: component designations and mass
    fractions [kg/kg]; safety_class: ASHRAE 34 / ISO 817, empty where unknown; gwp: over 100 years, None
    where unknown; critical_temperature [K], critical_pressure [Pa] and minimum_temperature [K] of the
    model, 0 where it has none; model_uncertainty: of a saturation temperature [K]; own: from the user's file.
    """

    designation: str
    names: tuple[str, ...]
    nature: str
    composition: tuple[tuple[str, float], ...]
    safety_class: str
    gwp: float | None
    gwp_source: str
    library_fluid: str
    critical_temperature: float
    critical_pressure: float
    minimum_temperature: float
    modelled: bool
    reason: str
    model_uncertainty: float
    model_uncertainty_reason: str
    own: bool = False

    @property
    def flammable(self) -> bool | None:
        """Whether the safety class says it burns; None where no class is known."""
        return self.safety_class[1:] in FLAMMABLE if self.safety_class else None

    @property
    def toxic(self) -> bool | None:
        """Whether the safety class says higher toxicity (B); None where no class is known."""
        return self.safety_class.startswith("B") if self.safety_class else None

    @property
    def is_blend(self) -> bool:
        """Whether it has more than one component."""
        return len(self.composition) > 1


def folded(text: str) -> str:
    """Return a name without what people leave out: case, blanks, hyphens, dots and parentheses."""
    return re.sub(r"[\s\-‐‑–_.,'()/]+", "", text).casefold()


@lru_cache(maxsize=2048)
def spellings(name: str) -> frozenset[str]:
    """Return the folded forms under which a name is found, with and without its leading R."""
    plain = folded(name)
    forms = {plain}
    for prefix in ("hcfc", "hfc", "hfo", "cfc", "hc", "refrigerant", "r"):
        if plain.startswith(prefix) and len(plain) > len(prefix):
            rest = plain[len(prefix) :]
            if rest[0].isdigit() or (prefix == "r" and re.match(r"[ce]\d", rest)):
                forms.add(rest)
    return frozenset(forms)


def natural_order(designation: str) -> tuple[int, int, str]:
    """Sort key: by number, then letters; own names last."""
    match = re.match(r"R-[A-Z]?(\d+)(.*)", designation)
    return (0, int(match[1]), match[2]) if match else (1, 0, designation.casefold())


class Catalogue:
    """Refrigerants by designation and by every spelling that is certain."""

    def __init__(self) -> None:
        self.by_designation: dict[str, Refrigerant] = {}
        self.by_spelling: dict[str, str] = {}

    def add(self, refrigerant: Refrigerant) -> None:
        """Enter one; a spelling that is taken stays with the one that came first."""
        self.by_designation[refrigerant.designation] = refrigerant
        for name in (refrigerant.designation, *refrigerant.names):
            self.spell(name, refrigerant.designation)

    def spell(self, name: str, designation: str) -> None:
        """Let a name find a designation."""
        for form in spellings(name):
            self.by_spelling.setdefault(form, designation)

    def rename(self, designation: str, name: str) -> None:
        """Give a refrigerant one more name."""
        one = self.by_designation[designation]
        if name not in one.names:
            self.by_designation[designation] = replace(one, names=(*one.names, name))
        self.spell(name, designation)

    def get(self, name: str) -> Refrigerant | None:
        """Return the one refrigerant of that name, or None."""
        for form in sorted(spellings(name), key=len, reverse=True):
            if form in self.by_spelling:
                return self.by_designation[self.by_spelling[form]]
        return None


def _composition(designation: str, text: str | None) -> tuple[tuple[str, float], ...]:
    if text is None:
        return ((designation, 1.0),)
    parts = [part.strip().rsplit(" ", 1) for part in text.split(",")]
    return tuple((f"R-{name}", round(float(share) / 100.0, 8)) for name, share in parts)


def blend_gwp(parts: Iterable[tuple[float | None, float]]) -> float | None:
    """Return the global warming potential of a blend, by mass, None when that of a component is unknown.

    parts: global warming potential and mass fraction of each component [kg/kg].
    """
    total = 0.0
    for gwp, fraction in parts:
        if gwp is None:
            return None
        total += gwp * fraction
    return total


def _entry(designation: str, table: dict[str, Any], data: dict[str, Any], pure: dict[str, Refrigerant]) -> Refrigerant:
    composition = _composition(designation, table.get("blend"))
    blend = len(composition) > 1
    modelled = "model" in table
    model: dict[str, Any] = data["model"][table["model"]] if modelled else {"uncertainty": 0.0, "reason": ""}
    fluid = table.get("fluid", "")
    if blend:
        gwp = blend_gwp((pure[name].gwp, share) for name, share in composition)
        fluid = fluid or ("&".join(pure[name].library_fluid for name, _ in composition) if modelled else "")
        nature = "azeotrope" if designation.startswith("R-5") else "zeotrope"
    else:
        gwp, nature = table.get("gwp"), "pure"
    source = data["gwp_source"] + ("; by mass from the components" if blend else "")
    critical = table.get("critical", (0.0, 0.0))
    return Refrigerant(
        designation=designation,
        names=tuple(table.get("names", ())),
        nature=nature,
        composition=composition,
        safety_class=table.get("class", ""),
        gwp=gwp,
        gwp_source=source if gwp is not None else "",
        library_fluid=fluid,
        critical_temperature=float(critical[0]),
        critical_pressure=float(critical[1]),
        minimum_temperature=float(table.get("floor", 0.0)),
        modelled=modelled,
        reason=table.get("reason", ""),
        model_uncertainty=float(model["uncertainty"]),
        model_uncertainty_reason=model["reason"],
    )


@cache
def model_kinds() -> dict[str, dict[str, Any]]:
    """Return the tables that say how sure each kind of model is."""
    return dict(_data()["model"])


@cache
def _data() -> dict[str, Any]:
    return tomllib.loads(DATA.read_text(encoding="utf-8"))


@cache
def catalogue() -> Catalogue:
    """Return the catalogue, read once; `load_own` starts it afresh."""
    data = _data()
    whole = Catalogue()
    for name, table in data.items():
        if name.startswith("R-"):
            whole.add(_entry(name, table, data, whole.by_designation))
    return whole


def find(text: str) -> Refrigerant:
    """Return the refrigerant a text certainly names, modelled or not.

    Case, blanks, hyphens, parentheses and a leading R are forgiven. Raises UnknownRefrigerant, which
    offers the nearest designations.
    """
    if not folded(text):
        raise UnknownRefrigerant("No refrigerant is named.", "Write one, for example R-134a.")
    if len(text) > LONGEST_NAME or not text.isprintable():
        raise UnknownRefrigerant("This is not the name of a refrigerant.", "Write one, for example R-134a.")
    found = catalogue().get(text)
    if found is None:
        raise UnknownRefrigerant(f"“{text.strip()}” is not in the catalogue.", _hint(text))
    return found


def _hint(text: str) -> str:
    near = nearest(text)
    if not near:
        return "Write its designation, for example R-134a."
    listed = near[0] if len(near) == 1 else ", ".join(near[:-1]) + " or " + near[-1]
    return f"Did you mean {listed}?"


def nearest(text: str, most: int = 3) -> list[str]:
    """Return up to `most` designations whose spelling comes nearest to a text."""
    from difflib import get_close_matches  # only a refusal needs it

    whole = catalogue()
    wanted = min(spellings(text), key=len)
    starting = [d for d in (r.designation for r in search(text)) if wanted]
    close = get_close_matches(wanted, list(whole.by_spelling), n=2 * most, cutoff=0.6)
    ordered = dict.fromkeys([*starting[:most], *(whole.by_spelling[form] for form in close)])
    return list(ordered)[:most]


def all_refrigerants() -> list[Refrigerant]:
    """Return every refrigerant, in natural order of the numbers, own ones last."""
    return sorted(catalogue().by_designation.values(), key=lambda r: natural_order(r.designation))


def search(part: str) -> list[Refrigerant]:
    """Return the refrigerants whose designation, name or component contains a part, best first.

    Empty text gives all, in natural order of the numbers.
    """
    everything = all_refrigerants()
    wanted = folded(part)
    if not wanted:
        return everything
    if len(wanted) > LONGEST_NAME:
        return []
    ranked = [(_rank(one, wanted), place, one) for place, one in enumerate(everything)]
    return [one for rank, _, one in sorted(ranked, key=lambda r: r[:2]) if rank < 9]


def _rank(one: Refrigerant, wanted: str) -> int:
    """How well a refrigerant answers a typed part: 0 is certain, 9 not at all."""
    best = 9
    for offset, name in enumerate((one.designation, *one.names)):
        later = 1 if offset else 0
        for form in spellings(name):
            if form == wanted:
                best = min(best, 0)
            elif form.startswith(wanted):
                best = min(best, 1 + later)
            elif wanted in form:
                best = min(best, 3 + later)
    if best == 9 and one.is_blend and any(wanted in spellings(name) for name, _ in one.composition):
        best = 6
    return best
