"""Calls to the kernel that fail or end the program: a filter of the kernel's own, inherited by every child."""

from __future__ import annotations

import platform
import struct
import sys
from collections.abc import Sequence
from dataclasses import dataclass

import pytest

# The kernel's mark of the architecture and its numbers of the calls, as in its headers; AArch64 knows the newer names
# of some calls only.
_NUMBERS = {
    "x86_64": (
        0xC000003E,
        {"socket": 41, "fcntl": 72, "flock": 73, "fsync": 74, "fdatasync": 75, "rename": 82, "link": 86,
         "renameat": 264, "linkat": 265, "renameat2": 316},
    ),
    "aarch64": (
        0xC00000B7,
        {"socket": 198, "fcntl": 25, "flock": 32, "fsync": 82, "fdatasync": 83, "renameat": 38, "linkat": 37,
         "renameat2": 276},
    ),
}  # fmt: skip
_LOAD, _EQUAL, _RETURN = 0x20, 0x15, 0x06
_ALLOW, _FAIL, _KILL = 0x7FFF0000, 0x00050000, 0x80000000

_INSTALL = """
import ctypes, os
steps = ctypes.create_string_buffer({steps!r}, {size})
library = ctypes.CDLL(None, use_errno=True)
class Filter(ctypes.Structure):
    _fields_ = [("length", ctypes.c_ushort), ("program", ctypes.c_void_p)]
program = Filter({size} // 8, ctypes.addressof(steps))
zero = ctypes.c_ulong(0)
assert library.prctl(38, ctypes.c_ulong(1), zero, zero, zero) == 0, "no new privileges"
assert library.prctl(22, ctypes.c_ulong(2), ctypes.byref(program), zero, zero) == 0, os.strerror(ctypes.get_errno())
"""


@dataclass(frozen=True)
class Rule:
    """What becomes of a call to the kernel.

    error: its error number; None ends the process.
    argument, values: only where this argument, counted from 0, is one of the values.
    unless: only where it is none of them.
    """

    call: str
    error: int | None
    argument: int = 0
    values: tuple[int, ...] = ()
    unless: bool = False


def refusing(rules: Sequence[Rule]) -> str:
    """Return Python code that puts its process, and all it starts, under `rules`; skip where it is not known how."""
    if sys.platform != "linux" or platform.machine() not in _NUMBERS:
        pytest.skip("the filter is written for Linux on x86-64 and AArch64")
    architecture, numbers = _NUMBERS[platform.machine()]
    known = [step for rule in rules if rule.call in numbers for step in _steps(rule, numbers[rule.call])]
    steps = [
        _step(_LOAD, 4),
        _step(_EQUAL, architecture, 1, 0),
        _step(_RETURN, _ALLOW),
        *known,
        _step(_RETURN, _ALLOW),
    ]
    return _INSTALL.format(steps=b"".join(steps), size=8 * len(steps))


def _steps(rule: Rule, number: int) -> list[bytes]:
    refuse = _step(_RETURN, _KILL if rule.error is None else _FAIL | rule.error)
    allow = _step(_RETURN, _ALLOW)
    then = [refuse]
    if rule.values:
        count = len(rule.values)
        otherwise, matched = (refuse, allow) if rule.unless else (allow, refuse)
        tests = [_step(_EQUAL, value, count - place, 0) for place, value in enumerate(rule.values)]
        then = [_step(_LOAD, 16 + 8 * rule.argument), *tests, otherwise, matched]
    return [_step(_LOAD, 0), _step(_EQUAL, number, 0, len(then)), *then]


def _step(code: int, value: int, yes: int = 0, no: int = 0) -> bytes:
    return struct.pack("HBBI", code, yes, no, value)
