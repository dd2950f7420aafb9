"""Text of other hands made harmless for a terminal."""

from __future__ import annotations

import unicodedata

_SPACING = frozenset("\t\n\r\u2028\u2029")
# Bidirectional embeddings, overrides, isolates and marks reorder what stands around them.
_REORDERING = frozenset("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069\u200e\u200f\u061c")


def plain_text(text: str, longest: int | None = None) -> str:
    """Return `text` without control characters, lone surrogates and forced text direction.

    Tabs and line ends become spaces; everything else stays as typed.

    longest: cut after that many characters; None for no limit.
    """
    if longest is not None:
        text = text[: 4 * longest]  # a text of megabytes is not walked through for a short one
    if text.isprintable():
        return text[:longest]
    kept = (" " if character in _SPACING else character for character in text if not is_hidden(character))
    return "".join(kept)[:longest]


def is_hidden(character: str) -> bool:
    """Whether a character is not seen but obeyed: a control character, half a surrogate pair, a forced direction."""
    if character in _SPACING:
        return False
    return character in _REORDERING or unicodedata.category(character) in ("Cc", "Cs")
