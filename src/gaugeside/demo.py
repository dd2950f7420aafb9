"""An invented cold store in a throw-away folder: a week of readings to try the program on.

Every figure is invented. The story: on Monday the machine runs well; through the week its superheat climbs and its
subcooling falls, as when refrigerant is lost.
"""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path

from gaugeside.checks import CHECKS
from gaugeside.checks.perform import perform, request
from gaugeside.checks.sheet import Answer
from gaugeside.checks.typed import read_form
from gaugeside.errors import Refusal
from gaugeside.keeping import entry_of
from gaugeside.logbook import Entry, Logbook
from gaugeside.preferences import dress_of, site_of
from gaugeside.settings import Settings, places, save_draft, save_settings

MACHINE = "demo rack 1, invented"
_REFRIGERANT = "R-448A"
_SETTINGS = Settings(
    site_pressure_text="640 m",
    site_pressure_from="altitude",
    refrigerant=_REFRIGERANT,
    tag=MACHINE,
)
# Suction and liquid pipe [°C], suction, discharge [bar g], discharge pipe [°C], motor power [kW]; one line a day.
_WEEK = (
    (-3.5, 28.9, 2.30, 15.8, 72.0, 14.2),
    (-3.2, 29.4, 2.28, 15.9, 72.5, 14.2),
    (-2.6, 29.8, 2.25, 15.7, 73.5, 14.0),
    (-1.5, 30.1, 2.18, 15.5, 75.0, 13.8),
    (0.2, 30.5, 2.10, 15.2, 77.5, 13.5),
    (2.4, 30.8, 2.00, 14.9, 80.5, 13.1),
    (4.8, 31.0, 1.90, 14.6, 84.0, 12.8),
)
_NOTES = (
    "invented: all well", "invented", "invented", "invented: door seal changed",
    "invented: sight glass bubbles now and then", "invented", "invented: leak search ordered",
)  # fmt: skip


def _readings(day: int) -> dict[str, dict[str, str]]:
    """Return the texts of one invented morning, by check."""
    suction_pipe, liquid_pipe, suction, discharge, discharge_pipe, power = _WEEK[day]
    pressures = {"suction_pressure": f"{suction:.2f} bar g", "discharge_pressure": f"{discharge:.1f} bar g"}
    pipes = {
        "suction_temperature": f"{suction_pipe:.1f} C",
        "liquid_temperature": f"{liquid_pipe:.1f} C",
        "discharge_temperature": f"{discharge_pipe:.0f} C",
    }
    return {
        "superheat": {**pressures, **pipes, "liquid_pressure": f"{discharge - 0.3:.1f} bar g"},
        "machine": {
            **pressures,
            **pipes,
            "electrical_power": f"{power:.1f} kW",
            "drive": "hermetic",
            "space_temperature": "2 C",
            "sink_temperature": "24 C",
        },
    }


def _entry(check_name: str, texts: dict[str, str], when: datetime, note: str) -> Entry:
    check, dress, site = CHECKS[check_name], dress_of(_SETTINGS), site_of(_SETTINGS)
    typed = read_form(check, texts, {}, dress, site)
    values = {name: line.value for name, line in typed.items() if line.value is not None}
    reply = perform(request(check_name, _REFRIGERANT, values, site=site, datum=_SETTINGS.datum, dress=dress))
    entry = entry_of(check, Answer.from_plain(reply["answer"]), typed, _SETTINGS, dress, site, note)
    return replace(entry, kept_at=when)


def fill(folder: Path) -> None:
    """Write the demo's settings, half-filled forms and a week of entries into `folder`."""
    home = places({"GAUGESIDE_HOME": str(folder)})
    save_settings(home.settings_file, _SETTINGS)
    today = _readings(len(_WEEK) - 1)
    forms = {name: {"texts": texts, "units": {}} for name, texts in today.items()}
    save_draft(home.draft_file, {"pane": "superheat", "note": "", "forms": forms})
    logbook = Logbook(home.logbook_file)
    morning = datetime.now(UTC).replace(minute=40, second=0, microsecond=0) - timedelta(hours=1)
    for day in range(len(_WEEK)):
        when = morning - timedelta(days=len(_WEEK) - 1 - day)
        for minutes, (check, texts) in enumerate(_readings(day).items()):
            logbook.keep(_entry(check, texts, when + timedelta(minutes=4 * minutes), _NOTES[day]))


@contextmanager
def demo_folder() -> Iterator[Path]:
    """Give a filled throw-away folder and remove it afterwards; Refusal when it cannot be made."""
    try:
        folder = Path(tempfile.mkdtemp(prefix="gaugeside-demo-"))
    except OSError as error:
        raise Refusal(
            f"No folder for the demo can be made: {error.strerror}.", "Set TMPDIR to a writable folder."
        ) from None
    try:
        # In a process of its own: the property library does not belong beside the screen.
        command = [sys.executable, "-P", "-m", "gaugeside.demo", str(folder)]
        done = subprocess.run(
            command, capture_output=True, check=False, env={**os.environ, "GAUGESIDE_HOME": str(folder)}
        )
        if done.returncode:
            raise Refusal("The demo's entries could not be calculated.", done.stderr.decode(errors="replace")[-200:])
        yield folder
    finally:
        shutil.rmtree(folder, ignore_errors=True)


if __name__ == "__main__":
    fill(Path(sys.argv[1]))
