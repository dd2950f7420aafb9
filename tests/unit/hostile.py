"""What the tests of bad hands share: texts nobody means well with, and what a terminal would obey in a text."""

from __future__ import annotations

import json
import unicodedata

TURNS = "\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069"
EVIL = "\x1b]0;OWNED\x07\x1b[2J\x1b[31m\x9b31m\x0e[b]x[/b][@click=app.exit]y[/]\u202e\u2066{0}%s\r\nz\x00"
# As they fit on a command line, and too large for one.
SHORT = {
    "escape": "\x1b[2J", "title": "\x1b]0;OWNED\x07", "c1": "5\x9b31m bar", "shift out": "\x0e5 bar",
    "nul": "5\x00 bar", "backspace": "5\b6 bar", "line end": "5 bar\r\nrm", "bidi": "5 \u202ebar",
    "zero width": "5\u200b bar", "surrogate": "5\ud800 bar", "markup": "[b]5 bar[/b]",
    "format": "{0.__class__} bar", "percent": "%s%n bar", "path": "../../../etc/passwd",
    "sql": "'; DROP TABLE entries;--", "shell": "$(touch owned) `id` bar", "expression": "__import__('os') bar",
    "power": "9**9**9 bar", "exponent": "1e999999999 bar", "nested": "(" * 10**5,
    "other digits": "٣٤ bar", "half": "½ bar", "combining": "5" + "\u0301" * 60, "nan": "nan", "infinite": "inf bar",
    "all": EVIL,
}  # fmt: skip
HOSTILE = SHORT | {
    "isolate": "\u20665", "bell": "5 bar\x07", "link": "[@click=app.exit]5[/]", "huge": "9" * 10**6,
    "long": "x" * 10**6, "commas": "," * 10**5, "blank": " " * 10**5,
}  # fmt: skip


def obeyed(text: str) -> list[str]:
    """What in a text a terminal would obey instead of showing it; a line end is none."""
    return [c for c in text if c != "\n" and (unicodedata.category(c) in ("Cc", "Cs") or c in TURNS)]


def is_sentence(text: str) -> bool:
    """Whether a text is one line of bounded length that a terminal only shows."""
    return not obeyed(text) and "\n" not in text and 0 < len(text) < 700


_DEEP = b"[" * 100_000
JSON_FILES = {
    "binary": bytes(range(256)), "deep": _DEEP, "deep objects": b'{"a":' * 50_000,
    "digits": b'{"tag": ' + b"9" * 10**5 + b"}", "infinite": b'{"forms": {"x": 1e999}}', "nan": b'{"tag": NaN}',
    "megabytes": b'{"tag": "' + b"x" * 3_000_000 + b'"}', "many": b'{"a": [' + b"1," * 400_000 + b"1]}",
    "surrogate": b'{"tag": "\\ud800\\u001b[2J"}', "utf-16": '{"a": 1}'.encode("utf-16"),
    "evil": json.dumps({"tag": EVIL, "theme": [EVIL], EVIL: EVIL, "note": EVIL, "pane": EVIL}).encode(),
}  # fmt: skip
_EVIL = json.dumps(EVIL)
TOML_FILES = {
    "binary": bytes(range(256)), "deep": b"a = " + _DEEP, "inline": b"a = " + b"{a = " * 30_000,
    "digits": b"a = " + b"9" * 9000, "sixteens": b"[x]\nrated_superheat = 0x" + b"f" * 9000,
    "dots": b"a" + b".a" * 90_000 + b" = 1", "heads": b"[a" + b".a" * 90_000 + b"]", "nul": b"a = '\x00'",
    "megabytes": b'a = "' + b"x" * 3_000_000 + b'"',
    "evil": f"name = {_EVIL}\n[names]\n{_EVIL} = {_EVIL}\n[blends.{_EVIL}]\ncomposition = {_EVIL}\n"
            f"[{_EVIL}]\nrefrigerant = {_EVIL}\n".encode(),
}  # fmt: skip
