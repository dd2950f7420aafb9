"""What every door of the fault benchmark is put with: texts, mutations, noise, and the count of what comes of them."""

from __future__ import annotations

import random
import string
from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Any

from gaugeside.quantities import Dress, Sense

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


def json_noise(chance: random.Random, depth: int = 0) -> Any:
    kinds = [None, True, 10**400, -1, 1.5, 1e308, noise(chance), words(chance), "bar", "9" * 70]
    if depth < 4 and chance.random() < 0.5:
        many = range(chance.randrange(4))
        made = [json_noise(chance, depth + 1) for _ in many]
        return made if chance.random() < 0.5 else {words(chance): value for value in made}
    return chance.choice(kinds)
