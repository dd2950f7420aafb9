"""What is typed and set is saved again by itself once the disk takes it, and trouble is told once."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from gaugeside.app import saver as module
from gaugeside.app.saver import Saver
from gaugeside.settings import Places, Settings, load_draft, load_settings, places

PATIENCE = 10.0  # [s]


@pytest.fixture
def home(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Places:
    for name in ("_PAUSE", "_REST", "_AGAIN"):
        monkeypatch.setattr(module, name, 0.02)
    return places({"GAUGESIDE_HOME": str(tmp_path / "home")})


@pytest.fixture
def told() -> list[str]:
    return []


@pytest.fixture
def saver(home: Places, told: list[str]) -> Iterator[Saver]:
    # Stands in the way of the folder.
    home.data_folder.write_text("")
    found = Saver(home, told.append)
    yield found
    found.close()


def wait_until(holds: Callable[[], bool]) -> None:
    deadline = time.monotonic() + PATIENCE
    while not holds():
        assert time.monotonic() < deadline
        time.sleep(0.01)


def test_what_could_not_be_saved_is_saved_once_it_can_be(saver: Saver, home: Places, told: list[str]) -> None:
    saver.settings(Settings(tag="rack 2"))
    saver.draft({"note": "first"})
    wait_until(lambda: bool(told))
    saver.draft({"note": "second"})
    saver.flush()
    saver.flush()
    assert told == [
        "NOT SAVED: settings.json cannot be written (not a directory). What is on the screen is not remembered; "
        "F7 shows the folder."
    ]
    home.data_folder.unlink()
    # Nothing is given to it any more.
    wait_until(lambda: len(told) == 2)
    assert told[1].startswith("Saved again")
    assert load_draft(home.draft_file) == ({"note": "second"}, [])
    assert load_settings(home.settings_file) == (Settings(tag="rack 2"), [])


def test_settings_that_were_not_read_at_the_start_are_not_replaced(saver: Saver, home: Places, told: list[str]) -> None:
    home.data_folder.unlink()
    home.data_folder.mkdir()
    home.settings_file.write_text('{"tag": "the old one"}')
    saver.settings(Settings(tag="rack 2"))
    saver.draft({"note": "first"})
    wait_until(lambda: bool(told))
    assert "settings.json could not be read at the start and is left as it is. Leave and start again" in told[0]
    assert home.settings_file.read_text() == '{"tag": "the old one"}'
    # Where there was no file, nothing can be lost.
    assert load_draft(home.draft_file) == ({"note": "first"}, [])
