"""The checks a person can run, by name; each is imported when it is first asked for."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from importlib import import_module
from typing import cast

from gaugeside.checks.sheet import Check

_NAMES = ("saturation", "superheat", "component", "stream", "machine")


class _Checks(Mapping[str, Check]):
    """The screen paints its first form before the others are loaded."""

    def __getitem__(self, name: str) -> Check:
        if name not in _NAMES:
            raise KeyError(name)
        return cast(Check, import_module(f"gaugeside.checks.{name}").CHECK)

    def __iter__(self) -> Iterator[str]:
        return iter(_NAMES)

    def __len__(self) -> int:
        return len(_NAMES)

    def __contains__(self, name: object) -> bool:
        return name in _NAMES


CHECKS: Mapping[str, Check] = _Checks()
