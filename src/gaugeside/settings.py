"""Where the program keeps its files, and what it remembers from one start to the next.

Reading never raises and never changes a file: each fault becomes one sentence, and what is good
still counts. Writing replaces a file whole or not at all.
"""

from __future__ import annotations

import dataclasses
import json
import os
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Literal, get_args, get_type_hints

import platformdirs

from gaugeside.disk import next_save, read_json_file, standing_object, whole_path, write_json_file

LONGEST_SETTING = 60  # [characters]
MOST_UNITS = 100


@dataclass(frozen=True)
class Places:
    """The folders and files of one user; naming them creates none of them."""

    settings_folder: Path
    data_folder: Path
    settings_file: Path
    draft_file: Path
    logbook_file: Path
    themes_folder: Path
    log_file: Path


def places(environ: Mapping[str, str] | None = None, logbook: Path | None = None) -> Places:
    """Return where everything lives, creating nothing.

    environ: the environment, os.environ when None; `GAUGESIDE_HOME` names one folder for all files.
    logbook: a logbook file named by the user; it overrides the logbook alone.
    """
    home = (os.environ if environ is None else environ).get("GAUGESIDE_HOME", "")
    if home:
        settings_folder = data_folder = state_folder = whole_path(home)
    else:
        try:
            settings_folder = platformdirs.user_config_path("gaugeside", appauthor=False)
            data_folder = platformdirs.user_data_path("gaugeside", appauthor=False)
            state_folder = platformdirs.user_state_path("gaugeside", appauthor=False)
        except RuntimeError:
            # No home folder is known; what would be kept there is refused when it comes to that.
            settings_folder = data_folder = state_folder = Path("~", "gaugeside")
    own_logbook = data_folder / "logbook.sqlite3"
    return Places(
        settings_folder=settings_folder,
        data_folder=data_folder,
        settings_file=settings_folder / "settings.json",
        draft_file=data_folder / "draft.json",
        logbook_file=own_logbook if logbook is None else whole_path(logbook),
        themes_folder=settings_folder / "themes",
        log_file=state_folder / "helper.log",
    )


@dataclass(frozen=True)
class Settings:
    """What is remembered; every field has a default, so an absent file is a complete one.

    site_pressure_text: altitude or barometer reading as typed, with its unit.
    units: unit label by kind of quantity, overriding the dress.
    bare_pressure: what a pressure typed without gauge or absolute is taken for.
    datum: enthalpy datum.
    tag: which machine the next logbook entries belong to.
    """

    site_pressure_text: str = ""
    site_pressure_from: Literal["sea level", "altitude", "barometer"] = "sea level"
    dress: Literal["si", "ip"] = "si"
    units: dict[str, str] = field(default_factory=dict)
    bare_pressure: Literal["gauge", "absolute"] = "gauge"
    datum: Literal["iir", "ashrae", "nbp"] = "iir"
    theme: str = "log sheet dark"
    refrigerant: str = ""
    tag: str = ""


def load_settings(path: Path) -> tuple[Settings, list[str]]:
    """Return the settings kept in `path` and one sentence for each fault; never raises."""
    found, faults = read_json_file(path)
    good, bad, unknown = _sorted_out(found)
    faults += [f"{path.name}: the setting {name} {words}; its default is used." for name, words in bad.items()]
    faults += [f"{path.name}: {_shown(name)} is not a setting of this version and is not used." for name in unknown]
    return Settings(**good), faults


def save_settings(path: Path, settings: Settings) -> None:
    """Write `settings` to `path`, whole or not at all, beside what a newer version has put there.

    Raises Refusal when the file cannot be read or written; the file that was there is then untouched.
    """
    there = standing_object(path)
    _, bad, unknown = _sorted_out(there or {})
    write_json_file(path, {**unknown, **dataclasses.asdict(settings)}, keep_aside=there is None or bool(bad))


def load_draft(path: Path) -> tuple[dict[str, Any], list[str]]:
    """Return what stood on the forms, as kept in `path`, and one sentence for each fault; never raises."""
    found, faults = read_json_file(path)
    if not _is_draft(found):
        faults.append(f"{path.name} holds something else than forms, which is not used; {next_save(path)}.")
    return found, faults


def save_draft(path: Path, draft: Mapping[str, Any]) -> None:
    """Write what stands on the forms to `path`, whole or not at all.

    Raises Refusal when the file cannot be read or written; the file that was there is then untouched.
    """
    there = standing_object(path)
    write_json_file(path, draft, keep_aside=there is None or not _is_draft(there))


def _shown(value: object) -> str:
    text = "".join(c if c.isprintable() else "?" for c in json.dumps(value, ensure_ascii=False))
    return text if len(text) <= 40 else text[:37] + "..."


def _sorted_out(found: Mapping[str, Any]) -> tuple[dict[str, Any], dict[str, str], dict[str, Any]]:
    """Return the good settings, what is wrong with the bad ones, and those that this version does not know."""
    hints = get_type_hints(Settings)
    good: dict[str, Any] = {}
    bad: dict[str, str] = {}
    for name, value in found.items():
        try:
            if name in hints:
                good[name] = _checked_units(value) if name == "units" else _checked_text(value, hints[name])
        except ValueError as fault:
            bad[name] = str(fault)
    return good, bad, {name: value for name, value in found.items() if name not in hints}


def _is_draft(found: Mapping[str, Any]) -> bool:
    forms = found.get("forms", {})
    if not isinstance(forms, dict) or not all(isinstance(found.get(name, ""), str) for name in ("pane", "note")):
        return False
    return all(
        isinstance(form, dict) and all(isinstance(form.get(part, {}), dict) for part in ("texts", "units"))
        for form in forms.values()
    )


def _checked_text(value: object, hint: Any) -> str:
    if not isinstance(value, str):
        raise ValueError(f"is {_shown(value)}, not a text")
    choices = get_args(hint)
    if choices and value not in choices:
        raise ValueError(f"is {_shown(value)}, not one of {', '.join(choices)}")
    if len(value) > LONGEST_SETTING:
        raise ValueError(f"is longer than {LONGEST_SETTING} characters")
    return value


def _checked_units(value: object) -> dict[str, str]:
    if not isinstance(value, dict) or len(value) > MOST_UNITS:
        raise ValueError("is not a list of units by kind of quantity")
    return {_checked_text(kind, str): _checked_text(unit, str) for kind, unit in value.items()}
