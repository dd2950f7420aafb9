"""Random and mutated input at every door through which text comes in, each with what must come of it.

A door either takes its input, and then as what it means, or refuses it with one printable sentence. Anything else is
a crash; another meaning than an independent oracle gives is a silent misreading.
"""

from __future__ import annotations

import contextlib
import json
import random
import string
import traceback
from collections.abc import Callable, Iterable
from dataclasses import asdict, dataclass, field
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from bench import oracle
from gaugeside.app.themes import ThemeFault, read_theme
from gaugeside.checks import CHECKS
from gaugeside.checks.compressor_map import load_maps
from gaugeside.checks.typed import read_form
from gaugeside.errors import Refusal
from gaugeside.logbook.entry import Entry, cleaned, from_row, to_row
from gaugeside.preferences import dress_of, site_of
from gaugeside.quantities import PROPERTIES, SEA_LEVEL, Dress, Kind, Sense, read, read_state
from gaugeside.refrigerants import find, load_own, search
from gaugeside.settings import Settings, load_draft, load_settings

LONGEST_SENTENCE = 700
SI, IP, ABSOLUTE = Dress(), Dress("ip"), Dress(bare=Sense.ABSOLUTE)
STRANGE = [
    "\x00", "\x1b[2J", "\x1b]0;x\x07", "\x9b31m", "\u202e", "\u2066", "\u200b", "\ufeff", "\ud800", "\U0010ffff", "²",
    "①", "٣", "½", "K", "ſ", "İ", "\u0301", "[b]", "[/]", "{0}", "%s", "../", "\\", '"', "'", "\n", "\r", "\t",
    "\u2028", "nan", "inf", "1e999", "9" * 60, "-", "−", "e5", ",", ".", ";", "(", ")", "bar", "psi", "mPa", "C", "F",
    "K", "g", " vac", " abs", "SH", "x", "h", "=", "#", "[", "]", "{", "}", ":", "true", "0x" + "f" * 20,
]  # fmt: skip
_TURNS = "\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069"
WORDS = string.ascii_letters + string.digits + "  -.,°[]{}()#äß冷"


@dataclass
class Tally:
    """What the inputs came to."""

    inputs: int = 0
    taken: int = 0
    refused: int = 0
    crashes: int = 0
    misreadings: int = 0
    beyond_the_oracle: int = 0
    examples: list[str] = field(default_factory=list)

    def example(self, what: str, shown: object) -> None:
        """Remember what went wrong, the first few times."""
        if len(self.examples) < 20:
            self.examples.append(f"{what}: {shown!r:.300}")


class Misread(Exception):
    """Something was understood as what it does not mean."""


def misread_unless(condition: object, what: object) -> None:
    """Raise Misread unless the condition holds."""
    if not condition:
        raise Misread(repr(what)[:300])


def told(sentences: Iterable[str]) -> bool:
    """Check that each fault is one printable sentence; return whether there is any."""
    found = list(sentences)
    for sentence in found:
        assert sentence.isprintable(), f"not printable: {sentence!r:.200}"
        assert 0 < len(sentence) <= LONGEST_SENTENCE, f"{len(sentence)} characters: {sentence!r:.200}"
    return bool(found)


def harmless(text: str) -> None:
    """Check that a terminal would obey nothing in a text: control characters, forced direction, half characters."""
    obeyed = [c for c in text if ord(c) < 32 or 0x7F <= ord(c) <= 0x9F or 0xD800 <= ord(c) <= 0xDFFF or c in _TURNS]
    assert not obeyed, f"obeyed by a terminal: {obeyed} in {text!r:.200}"
    assert len(text) <= 2000, f"{len(text)} characters"


def mutated(text: str, chance: random.Random) -> str:
    """Return a text with a few characters changed."""
    for _ in range(chance.choice([1, 1, 2, 3, 8])):
        place = chance.randrange(len(text) + 1)
        end = min(len(text), place + chance.choice([0, 0, 1, 1, 2, 9]))
        gentle = chance.choice("0123456789.,' -")
        strange = chance.choice([chance.choice(STRANGE), chr(chance.randrange(32, 127))])
        new = chance.choice(["", gentle, gentle, strange, text[place:end] * 2])
        text = text[:place] + new + text[end:]
    return text


def noise(chance: random.Random) -> str:
    """Return a text that means nothing."""
    if chance.random() < 0.01:
        return chance.choice(STRANGE) * chance.choice([100, 10_000])
    return "".join(
        chance.choice([chance.choice(STRANGE), chr(chance.randrange(0x20, 0x250)), chr(chance.randrange(0x110000))])
        for _ in range(chance.randrange(12))
    )


def words(chance: random.Random, most: int = 20) -> str:
    """Return a harmless text."""
    return "".join(chance.choice(WORDS) for _ in range(chance.randrange(1, most)))


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


def _json_noise(chance: random.Random, depth: int = 0) -> Any:
    kinds = [None, True, 10**400, -1, 1.5, 1e308, noise(chance), words(chance), "bar", "9" * 70]
    if depth < 4 and chance.random() < 0.5:
        many = range(chance.randrange(4))
        made = [_json_noise(chance, depth + 1) for _ in many]
        return made if chance.random() < 0.5 else {words(chance): value for value in made}
    return chance.choice(kinds)


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
            content[name] = _json_noise(chance)
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
    text = json.dumps(draft if whole else {**draft, words(chance): _json_noise(chance)}, ensure_ascii=False)
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


def logbook_row(chance: random.Random, tally: Tally) -> bool:
    """A row whole or with other columns: the entry as it was kept, or what can be read of it and a word."""
    entry = cleaned(
        Entry(
            number=chance.randrange(1, 10**6), kept_at=datetime.fromtimestamp(chance.randrange(10**9, 2 * 10**9), UTC),
            check="superheat", refrigerant="R-454C", tag=words(chance), note=words(chance, 200),
            readings={words(chance): words(chance)}, values={"p": chance.uniform(0, 1e7)},
            findings={"superheat": {"value": chance.uniform(-9, 9), "unit": "K"}}, cautions=[words(chance)],
            headline=words(chance),
        )
    )  # fmt: skip
    row = to_row(entry)
    whole = chance.random() < 0.3
    if not whole:
        for place in chance.sample(range(1, len(row)), 3):
            was = str(row[place])
            blob: Any = chance.choice([None, 5, 1.5, b"\xff\xfe", noise(chance), json.dumps(_json_noise(chance)), ""])
            row[place] = chance.choice([mutated(was, chance), blob])
    found = from_row(tuple(row))
    misread_unless(not whole or found == entry, (entry, found))
    shown = [found.check, found.refrigerant, found.tag, found.note, found.headline, *found.notes, *found.cautions]
    shown += [*found.readings, *found.readings.values(), *found.options.values(), *found.findings]
    for text in shown:
        harmless(text)
    from_row(tuple(to_row(cleaned(found))))
    return True


Door = Callable[..., bool]
# Out of a hundred inputs.
DOORS: dict[Door, int] = {
    reading: 22, mutated_reading: 26, state: 6, mutated_state: 12, form: 4, settings_file: 8, draft_file: 4, theme: 5,
    refrigerants_file: 3, compressors_file: 3, logbook_row: 7,
}  # fmt: skip
_NEEDS_FOLDER = (settings_file, draft_file, refrigerants_file, compressors_file)


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
