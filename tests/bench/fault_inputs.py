"""Random and mutated input at every door through which text comes in, each with what must come of it.

A door either takes its input, and then as what it means, or refuses it with one printable sentence. Anything else is
a crash; another meaning than an independent oracle gives is a silent misreading.
"""

from __future__ import annotations

import contextlib
import json
import random
import traceback
from collections.abc import Callable
from dataclasses import asdict
from pathlib import Path

from bench import oracle
from bench.fault_tables import batch_rows, imported_logbook, logbook_row
from bench.fault_texts import (
    ABSOLUTE,
    IP,
    SI,
    Misread,
    Tally,
    harmless,
    json_noise,
    misread_unless,
    mutated,
    noise,
    told,
    words,
)
from gaugeside.app.themes import ThemeFault, read_theme
from gaugeside.checks import CHECKS
from gaugeside.checks.compressor_map import load_maps
from gaugeside.checks.typed import read_form
from gaugeside.errors import Refusal
from gaugeside.preferences import dress_of, site_of
from gaugeside.quantities import PROPERTIES, SEA_LEVEL, Kind, read, read_state
from gaugeside.refrigerants import find, load_own, search
from gaugeside.settings import Settings, load_draft, load_settings

# The doors; each returns whether it took the input.


def reading(chance: random.Random, tally: Tally) -> bool:
    """A well-formed reading: the value of exact arithmetic, or a refusal where nothing can have it."""
    made = oracle.written(chance)
    kind = Kind(made.kind)
    try:
        found = read(made.text, kind, SI.default(kind), SI, SEA_LEVEL)
    except Refusal as refusal:
        told([refusal.sentence()])
        misread_unless(made.value is None, (made, refusal.sentence()))
        return False
    misread_unless(made.value is not None, (made, found.value))
    zero = {"pressure": 101325.0, "temperature": 459.67}.get(made.kind, 0.0)
    off = abs(found.value - float(made.value or 0))
    misread_unless(off <= 1e-12 * (abs(found.value) + zero), (made, found.value))
    return True


def mutated_reading(chance: random.Random, tally: Tally) -> bool:
    """A reading with other characters in it, or none at all: what is taken means that number of that unit."""
    made = oracle.written(chance)
    kind = Kind(made.kind if chance.random() < 0.9 else chance.choice(oracle.KINDS))
    text = mutated(made.text, chance) if chance.random() < 0.9 else noise(chance)
    found = read(text, kind, SI.default(kind), SI, SEA_LEVEL)
    again = read(found.complete(), kind, IP.default(kind), ABSOLUTE, SEA_LEVEL)
    misread_unless(again.value == found.value, (text, found.value, again.value))
    if not found.bare_number:
        why = oracle.mistaken(text, str(kind), found.value)
        tally.beyond_the_oracle += why == "?"
        misread_unless(why in ("", "?"), (text, str(kind), found.value, why))
    return True


_PARTS = {
    "superheat": ("temperature difference", "SH "), "subcooling": ("temperature difference", "SC "),
    "vapour_fraction": ("fraction", "x "), "enthalpy": ("specific enthalpy", "h "), "temperature": ("temperature", ""),
}  # fmt: skip
_UNITS = {name: SI.default(kind) for name, kind in PROPERTIES.items()}


def _written(kind: str, chance: random.Random) -> oracle.Written:
    while True:
        made = oracle.written(chance)
        if made.kind == kind and made.value is not None and made.value >= 0 and "," not in made.text:
            return made


def _state(chance: random.Random) -> tuple[str, dict[str, float]]:
    pressure, name = _written("pressure", chance), chance.choice(sorted(_PARTS))
    kind, prefix = _PARTS[name]
    other = _written(kind, chance)
    text = f"{pressure.text}{chance.choice([', ', '; ', ' ; '])}{prefix}{other.text}"
    return text, {"pressure": float(pressure.value or 0), name: float(other.value or 0)}


def state(chance: random.Random, tally: Tally) -> bool:
    """A well-formed state: both its values as the oracle has them."""
    text, meant = _state(chance)
    found = read_state(text, _UNITS, SI, SEA_LEVEL)
    misread_unless(set(found.values) == set(meant), (text, found.values))
    for key, value in meant.items():
        misread_unless(abs(found.values[key] - value) <= 1e-9 * max(abs(value), 300.0), (text, found.values, meant))
    return True


def mutated_state(chance: random.Random, tally: Tally) -> bool:
    """A state with other characters in it: what is taken reads back the same in any dress."""
    text = mutated(_state(chance)[0], chance) if chance.random() < 0.9 else noise(chance)
    found = read_state(text, _UNITS, SI, SEA_LEVEL)
    for dress in (IP, ABSOLUTE):
        units = {name: dress.default(kind) for name, kind in PROPERTIES.items()}
        again = read_state(found.complete(), units, dress, SEA_LEVEL)
        misread_unless(again.values == found.values, (text, found.values, again.values))
    return True


def form(chance: random.Random, tally: Tally) -> bool:
    """A whole form of noise, and a name nobody has: every line is read or refused."""
    check = chance.choice(list(CHECKS.values()))
    texts = {
        line.name: chance.choice([noise, words])(chance) for line in check.reading_lines() if chance.random() < 0.4
    }
    lines = read_form(check, texts, {}, SI, SEA_LEVEL)
    told(line.refusal.sentence() for line in lines.values() if line.refusal is not None)
    name = chance.choice([noise, words])(chance)
    search(name)
    with contextlib.suppress(Refusal):
        find(name)
    return not any(line.refusal for line in lines.values())


def _settings(chance: random.Random) -> Settings:
    return Settings(
        site_pressure_text=f"{chance.randrange(3000)} m",
        site_pressure_from="altitude",
        dress=chance.choice(["si", "ip"]),  # type: ignore[arg-type]
        units={"pressure": chance.choice(["bar", "psi", "kPa"])},
        bare_pressure=chance.choice(["gauge", "absolute"]),  # type: ignore[arg-type]
        datum=chance.choice(["iir", "ashrae", "nbp"]),  # type: ignore[arg-type]
        theme=words(chance),
        refrigerant="R-454C",
        tag=words(chance),
    )


def settings_file(chance: random.Random, tally: Tally, folder: Path) -> bool:
    """Settings whole, with fields of other kinds, or with other bytes: sound ones come back, the rest is told."""
    path, mine = folder / "settings.json", _settings(chance)
    content = asdict(mine)
    way = chance.randrange(3)
    if way == 1:
        for name in chance.sample([*content, "other"], 3):
            content[name] = json_noise(chance)
    text = json.dumps(content)
    path.write_bytes((mutated(text, chance) if way == 2 else text).encode("utf-8", "surrogatepass"))
    found, faults = load_settings(path)
    if way == 0:
        misread_unless((found, faults) == (mine, []), (mine, found, faults))
    told(faults)
    dress_of(found)
    with contextlib.suppress(Refusal):
        site_of(found)
    return not faults


def draft_file(chance: random.Random, tally: Tally, folder: Path) -> bool:
    """A draft whole or with other bytes."""
    path = folder / "draft.json"
    draft = {"pane": "superheat", "note": words(chance), "forms": {"superheat": {"texts": {"a": words(chance)}}}}
    whole = chance.random() < 0.3
    text = json.dumps(draft if whole else {**draft, words(chance): json_noise(chance)}, ensure_ascii=False)
    path.write_bytes((text if whole else mutated(text, chance)).encode("utf-8", "surrogatepass"))
    found, faults = load_draft(path)
    told(faults)
    json.dumps(found, allow_nan=False)  # what came in can be saved again
    misread_unless(not whole or (found, faults) == (draft, []), (draft, found, faults))
    return not faults


def theme(chance: random.Random, tally: Tally) -> bool:
    """A theme whole or with other characters: the colours written, or a word on what is wrong."""
    colour = f"#{chance.randrange(1 << 24):06x}"
    text = f'name = "mine 1"\ndark = true\n[colours]\nprimary = "{colour}"\naccent = "#fff"\n'
    whole = chance.random() < 0.2
    try:
        found = read_theme(text if whole else mutated(text, chance))
    except ThemeFault as fault:
        told([f"it {fault}"])
        misread_unless(not whole, (text, fault))
        return False
    assert found.name.isprintable()
    misread_unless(not whole or (found.name, found.primary) == ("mine 1", colour), (text, found))
    return True


def refrigerants_file(chance: random.Random, tally: Tally, folder: Path) -> bool:
    """A person's own blend whole or with other characters: its composition, or a word on what is wrong."""
    share = chance.randrange(1, 1000) / 1000
    text = (
        f'[names]\n"works gas" = "R-454C"\n[blends."Own mix 1"]\n'
        f'composition = {{ "R-32" = {share}, "R-1234yf" = {1 - share:.3f} }}\nnames = ["mix 1"]\nclass = "A2L"\n'
    )
    whole = chance.random() < 0.2
    (folder / "refrigerants.toml").write_bytes(
        (text if whole else mutated(text, chance)).encode("utf-8", "surrogatepass")
    )
    faults = load_own(folder)
    told(faults)
    assert find("R-134a").designation == "R-134a"
    if whole:
        misread_unless(not faults and find("works gas").designation == "R-454C", faults)
        made = dict(find("MIX-1").composition)
        misread_unless(abs(made["R-32"] - share) < 1e-12 and abs(sum(made.values()) - 1) < 1e-12, (text, made))
    return not faults


def compressors_file(chance: random.Random, tally: Tally, folder: Path) -> bool:
    """A compressor's polynomials whole or with other characters: these coefficients, or a word on what is wrong."""
    terms = [round(chance.uniform(-10, 10), 4) for _ in range(10)]
    text = (
        f'["rack 2"]\nrefrigerant = "R-134a"\nsource = "data sheet 3"\ntemperature = "F"\nmass_flow_unit = "lb/h"\n'
        f'mass_flow = {terms}\nsuction_range = [-20, 50.5]\nrated_superheat = "20 F"\n'
    )
    whole = chance.random() < 0.2
    (folder / "compressors.toml").write_bytes(
        (text if whole else mutated(text, chance)).encode("utf-8", "surrogatepass")
    )
    maps, faults = load_maps(folder)
    told(faults)
    for found in maps.values():
        harmless(found.tag + found.source + found.refrigerant)
    if whole:
        found = maps["rack 2"]
        misread_unless(not faults and found.mass_flow == tuple(terms) and found.temperature == "°F", (text, found))
        misread_unless(abs((found.rated_superheat or 0) - 20 / 1.8) < 1e-12, found.rated_superheat)
    return not faults


Door = Callable[..., bool]
# Out of a hundred inputs.
DOORS: dict[Door, int] = {
    reading: 19, mutated_reading: 23, state: 5, mutated_state: 10, form: 4, settings_file: 6, draft_file: 3, theme: 4,
    refrigerants_file: 3, compressors_file: 3, logbook_row: 6, imported_logbook: 6, batch_rows: 8,
}  # fmt: skip
_NEEDS_FOLDER = (settings_file, draft_file, refrigerants_file, compressors_file, imported_logbook)


def one_input(door: Door, chance: random.Random, tally: Tally, folder: Path) -> None:
    """Put one input to a door and count what comes of it."""
    tally.inputs += 1
    more = (folder,) if door in _NEEDS_FOLDER else ()
    before = chance.getstate()
    try:
        took = door(chance, tally, *more)
        tally.taken += took
        tally.refused += not took
    except Refusal as refusal:
        try:
            told([refusal.sentence()])
            tally.refused += 1
        except AssertionError as fault:
            tally.crashes += 1
            tally.example(f"{door.__name__} sentence", fault)
    except Misread as fault:
        tally.misreadings += 1
        tally.example(f"{door.__name__} misread", fault)
    except Exception:
        tally.crashes += 1
        tally.example(f"{door.__name__} crashed", traceback.format_exc(limit=-3)[-300:])
    assert before != chance.getstate()


def put(inputs: int, seed: int, folder: Path) -> dict[str, Tally]:
    """Put `inputs` inputs to the doors, each in its share; return the tally of each."""
    tallies = {}
    for place, (door, share) in enumerate(DOORS.items()):
        tally = tallies[door.__name__] = Tally()
        own = folder / door.__name__
        own.mkdir()
        chance = random.Random(seed * 1000 + place)
        for _ in range(max(1, inputs * share // 100)):
            one_input(door, chance, tally, own)
    load_own(folder)  # what the own blends put into the catalogue is forgotten
    return tallies
