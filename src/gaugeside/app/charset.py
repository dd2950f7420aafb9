"""Which characters this terminal has: UTF-8 where the locale says so, else ASCII alone."""

from __future__ import annotations

import codecs
import unicodedata
from collections.abc import Mapping
from functools import cache

from gaugeside.checks.view import ascii_only

_CELLS = str.maketrans("°·−²³Δµ—–…’", " /-23du--.'")

_ascii = False


def use_ascii() -> None:
    """From now on show only the characters every terminal has."""
    global _ascii
    _ascii = True


def is_ascii() -> bool:
    """Whether only the characters every terminal has are shown."""
    return _ascii


def shown_text(text: str) -> str:
    """Return `text` as this terminal can show it."""
    return ascii_only(text) if _ascii else text


def ascii_cells(data: str) -> str:
    """Return what goes to the terminal; in ASCII mode each other character is replaced, cell by cell."""
    if not _ascii or data.isascii():
        return data
    return "".join(_in_cells(character) for character in data.translate(_CELLS))


@cache
def _in_cells(character: str) -> str:
    if character.isascii():
        return character
    if unicodedata.combining(character):
        return ""
    return "??" if unicodedata.east_asian_width(character) in "WF" else "?"


def keyboard_encoding(environ: Mapping[str, str]) -> str:
    """Return the encoding of what is typed: the locale's own, UTF-8 where it names none.

    environ: LC_ALL, LC_CTYPE and LANG count in this order (POSIX, Base Definitions 8.2).
    """
    locale = next((environ[name] for name in ("LC_ALL", "LC_CTYPE", "LANG") if environ.get(name)), "")
    named = locale.partition("@")[0].partition(".")[2]
    try:
        return codecs.lookup(named).name if named else "utf-8"
    except LookupError:
        return "utf-8"


def speaks_utf8(environ: Mapping[str, str], stream_encoding: str | None) -> bool:
    """Whether the terminal is promised to show UTF-8: by its locale, and by the encoding we write in."""
    locale = next((environ[name] for name in ("LC_ALL", "LC_CTYPE", "LANG") if environ.get(name)), "")
    named = "." in locale and keyboard_encoding(environ) == "utf-8"
    return named and (stream_encoding or "").lower().replace("-", "") == "utf8"
