"""The invented cold store: it says that it is invented, its week tells its story, and its folder goes away."""

from __future__ import annotations

from pathlib import Path

from gaugeside.demo import MACHINE, demo_folder
from gaugeside.logbook import Logbook
from gaugeside.settings import load_draft, load_settings, places


def test_a_week_of_entries_that_say_they_are_invented():
    with demo_folder() as folder:
        home = places({"GAUGESIDE_HOME": str(folder)})
        entries = Logbook(home.logbook_file).entries()
        settings, faults = load_settings(home.settings_file)
        draft, more = load_draft(home.draft_file)
    assert faults == more == []
    assert "invented" in MACHINE
    assert settings.tag == MACHINE
    assert {entry.tag for entry in entries} == {MACHINE}
    assert all("invented" in entry.note for entry in entries)
    assert len({entry.kept_at.date() for entry in entries}) == 7
    # The story: superheat climbs and subcooling falls from day to day.
    checks = [entry for entry in reversed(entries) if entry.check == "superheat"]
    superheats = [entry.findings["superheat"]["value"] for entry in checks]
    subcoolings = [entry.findings["subcooling"]["value"] for entry in checks]
    assert superheats == sorted(superheats)
    assert subcoolings == sorted(subcoolings, reverse=True)
    assert subcoolings[-1] < 1 < 4 < subcoolings[0]
    assert set(draft["forms"]) == {"superheat", "machine"}


def test_the_folder_is_thrown_away():
    with demo_folder() as folder:
        assert Path(folder).is_dir()
    assert not Path(folder).exists()
