"""A home on a network that refuses locks, certainty or new names: nothing is acknowledged that is not safe there."""

from __future__ import annotations

import stat
from collections.abc import Sequence
from pathlib import Path

import pytest

from terminal.apps import draft_holds, readings_kept
from terminal.calls import Rule
from terminal.disks import (
    NO_LOCKS,
    NO_NEW_NAMES,
    NO_SYNC,
    STALE_LOCKS,
    calculates,
    contents,
    home_of_old,
    lists,
    on_a_network,
    retypes,
    says,
    told,
)
from terminal.harness import Terminal


@pytest.mark.parametrize(
    ("rules", "why"),
    [
        (NO_LOCKS, "cannot be locked: its disk or network refuses"),
        (STALE_LOCKS, "cannot be locked: its disk or network refuses"),
        (NO_SYNC, "not written safely: its disk or network does not confirm"),
    ],
    ids=["no locks", "stale locks", "no certainty"],
)
def test_nothing_is_acknowledged_that_is_not_safe(tmp_path: Path, rules: Sequence[Rule], why: str) -> None:
    home = home_of_old(tmp_path)
    before = contents(home)
    with Terminal(on_a_network(rules), tmp_path) as shown:
        calculates(shown)
        shown.send("\r")
        said = says(shown, "NOT KEPT", why, "--logbook PATH")
        retypes(shown, 11)
        if rules is NO_SYNC:
            # Reading needs no certainty; what is typed does.
            lists(shown, "invented visit 0", "invented visit 2")
            says(shown, "NOT SAVED", "draft.json cannot be written", "not remembered")
        else:
            shown.send("\x1b[17~")  # F6
            says(shown, why)
            shown.send("\x1bOR")  # F3
            assert draft_holds(tmp_path, "11 C")
        messages = told(shown)
        assert [message for message in messages if "NOT KEPT" in message] == [said]
        assert len(messages) == (2 if rules is NO_SYNC else 1)
    after_it = contents(home)
    after_it.pop("draft.json", None)
    assert after_it == before


@pytest.mark.parametrize("is_damaged", [False, True], ids=["sound", "damaged"])
def test_a_place_without_second_or_new_names(tmp_path: Path, is_damaged: bool) -> None:
    home = home_of_old(tmp_path, entries=0)
    logbook = home / "logbook.sqlite3"
    if is_damaged:
        logbook.write_bytes(b"this is no logbook " * 300)
    before = contents(home)
    with Terminal(on_a_network(NO_NEW_NAMES), tmp_path) as shown:
        calculates(shown)
        shown.send("\r")
        if is_damaged:
            says(shown, "NOT KEPT", "damaged and cannot be set aside: input/output error")
        else:
            # A new file needs no second name, and an entry in it no new one.
            says(shown, "Kept at", "entry 1")
        retypes(shown, 11)
        # An end in order: one that is killed while it writes leaves the half-written file beside the others.
        shown.send("\x11")
        assert shown.wait_end() == 0
    if is_damaged:
        assert contents(home) == before
        return
    assert [readings["suction_temperature"] for readings in readings_kept(tmp_path)] == ["10 C"]
    assert stat.S_IMODE(logbook.stat().st_mode) == 0o600
    assert contents(home).keys() == {*before, "logbook.sqlite3"}
    assert contents(home)["settings.json"] == before["settings.json"]
