"""What comes along when a room is imported: each room loads only what it is for."""

from __future__ import annotations

import subprocess
import sys

import pytest

ROOMS = [
    ("gaugeside.settings", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.quantities", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.refrigerants", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.checks", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.checks.perform", ["textual", "rich"]),
    ("gaugeside.engine", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.engine.worker", ["textual", "rich"]),
    ("gaugeside.logbook", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.preferences", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.keeping", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.oneshot", ["textual", "rich"]),
    ("gaugeside.cli", ["textual", "rich", "CoolProp", "pint"]),
    ("gaugeside.app.app", ["CoolProp", "pint"]),
    ("gaugeside.app.start", ["CoolProp", "pint"]),
]


def loaded_after(statement: str) -> set[str]:
    """Return the top-level packages a fresh interpreter has loaded after a statement."""
    program = f"{statement}\nimport sys\nprint(*{{name.partition('.')[0] for name in sys.modules}})"
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    return set(done.stdout.split())


@pytest.mark.parametrize(("room", "absent"), ROOMS, ids=[room for room, _ in ROOMS])
def test_a_room_brings_no_stranger(room: str, absent: list[str]) -> None:
    loaded = loaded_after(f"import {room}")
    assert "gaugeside" in loaded
    assert loaded.isdisjoint(absent), loaded & set(absent)


def test_the_strangers_are_noticed_where_they_belong() -> None:
    """The test above means something only if these names do appear."""
    assert {"textual", "rich"} <= loaded_after("import gaugeside.app.app")
    assert "pint" in loaded_after("from gaugeside.quantities.convert import warm_up; warm_up()")
    assert "CoolProp" in loaded_after("import gaugeside.refrigerants.library")
