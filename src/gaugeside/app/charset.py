"""Which characters this terminal has: UTF-8 where the locale says so, else ASCII alone."""

from __future__ import annotations

import codecs
import os
import unicodedata
from collections.abc import Mapping
from functools import cache
from pathlib import Path

from gaugeside.checks.view import ascii_only
from gaugeside.text import is_hidden, plain_text

_CELLS = str.maketrans("°·−²³Δµ—–…’", " /-23du--.'")

_ascii = False


def use_ascii() -> None:
    """From now on show only the characters every terminal has."""
    global _ascii
    _ascii = True


def is_ascii() -> bool:
    """Whether only the characters every terminal has are shown."""
    return _ascii


def has_braille() -> bool:
    """Whether the terminal's font can be trusted to have braille, which pictures are drawn in: a console's has none."""
    return not _ascii and os.environ.get("TERM", "") not in ("linux", "vt100", "vt102", "vt220")


def shown_text(text: str) -> str:
    """Return `text` as this terminal can show it, without anything it would obey."""
    plain = plain_text(text)
    return ascii_only(plain) if _ascii else plain


def typed_text(text: str) -> str:
    """Return what was typed or pasted with a visible mark in the place of each character a terminal would obey."""
    if text.isprintable():
        return text
    return "".join("\ufffd" if is_hidden(character) else plain_text(character) for character in text)


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


def first_environ() -> Mapping[str, str]:
    """Return the environment as the program was given it, where the system tells.

    At its start the interpreter puts a UTF-8 locale of its own in the place of C and of any it does not know.
    """
    try:
        pairs = Path("/proc/self/environ").read_bytes().split(b"\0")
    except OSError:
        return os.environ
    return dict(os.fsdecode(pair).split("=", 1) for pair in pairs if b"=" in pair)


def keyboard_encoding(environ: Mapping[str, str]) -> str:
    """Return the encoding of what is typed: the locale's own, UTF-8 where it names none."""
    return _named_encoding(environ) or "utf-8"


def speaks_utf8(environ: Mapping[str, str], stream_encoding: str | None) -> bool:
    """Whether the terminal is promised to show UTF-8: by its locale, and by the encoding we write in."""
    return _named_encoding(environ) == "utf-8" and (stream_encoding or "").lower().replace("-", "") == "utf8"


def _named_encoding(environ: Mapping[str, str]) -> str:
    """Return the encoding the locale names: LC_ALL, LC_CTYPE, LANG in this order (POSIX, Base Definitions 8.2)."""
    locale = next((environ[name] for name in ("LC_ALL", "LC_CTYPE", "LANG") if environ.get(name)), "")
    plain, _, named = locale.partition("@")[0].partition(".")
    try:
        # Some systems name the encoding alone.
        return codecs.lookup(named or plain).name
    except LookupError:
        return ""
