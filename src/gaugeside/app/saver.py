"""Writes the half-typed forms and the settings from a thread, so that a frozen screen loses nothing."""

from __future__ import annotations

import threading
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from gaugeside.disk import stands_there
from gaugeside.errors import Refusal
from gaugeside.settings import Places, Settings, save_draft, save_settings

_PAUSE = 0.3
# Seconds without a change after which trouble is told: the next key would take the word off the screen unread.
_REST = 2.0
# Seconds after which what could not be saved is tried again, though nothing changes.
_AGAIN = 5.0
_BACK = "Saved again: settings and forms are on the disk."


class Saver:
    """Saves what it was last given, a moment after the last change, and tries again what could not be saved.

    on_trouble: is told once that saving fails, and once that it works again.
    """

    def __init__(self, places: Places, on_trouble: Callable[[str], None]) -> None:
        self._on_trouble = on_trouble
        self._save: dict[Path, Callable[[Any], None]] = {
            places.settings_file: lambda settings: save_settings(places.settings_file, settings),
            places.draft_file: lambda draft: save_draft(places.draft_file, draft),
        }
        self._settings_file, self._draft_file = places.settings_file, places.draft_file
        self._unread = {path for path in self._save if stands_there(path) is None}
        self._wake = threading.Condition()
        self._writing = threading.Lock()
        self._waiting: dict[Path, Any] = {}
        self._changed = False
        self._closed = False
        self._fault = self._told = ""
        self._thread = threading.Thread(target=self._run, name="saver", daemon=True)
        self._thread.start()

    def draft(self, draft: Mapping[str, Any]) -> None:
        """Save this draft soon."""
        self._take(self._draft_file, draft)

    def settings(self, settings: Settings) -> None:
        """Save these settings soon."""
        self._take(self._settings_file, settings)

    def flush(self) -> None:
        """Save what is waiting now, from the calling thread, after what is being saved already."""
        with self._writing:
            self._flush()

    def close(self) -> None:
        """Save what is waiting and stop."""
        with self._wake:
            self._closed = True
            self._wake.notify()
        self._thread.join(timeout=2)
        self.flush()

    def _take(self, path: Path, content: Any) -> None:
        with self._wake:
            self._waiting[path] = content
            self._changed = True
            self._wake.notify()

    def _flush(self) -> None:
        with self._wake:
            waiting, self._waiting, self._changed = self._waiting, {}, False
        faults = []
        for path, content in waiting.items():
            try:
                if path in self._unread and stands_there(path):
                    raise Refusal(
                        f"{path.name} could not be read at the start and is left as it is.",
                        "Leave and start again to use it.",
                    )
                self._save[path](content)
                self._unread.discard(path)
            except Refusal as refusal:
                faults.append(f"NOT SAVED: {refusal.sentence()}")
                with self._wake:
                    # What came meanwhile is newer.
                    self._waiting.setdefault(path, content)
        # One fault of the disk meets both files, and one word is enough.
        self._fault = faults[0] if faults else ""

    def _run(self) -> None:
        while True:
            with self._wake:
                if not self._wake.wait_for(lambda: self._closed or self._changed, self._patience()):
                    self._tell()
                if self._closed:
                    return
                if self._changed:
                    self._wake.wait(_PAUSE)
            if self._waiting:
                self.flush()

    def _patience(self) -> float | None:
        if bool(self._fault) != bool(self._told):
            return _REST
        return _AGAIN if self._waiting else None

    def _tell(self) -> None:
        if bool(self._fault) != bool(self._told):
            self._on_trouble(self._fault or _BACK)
        self._told = self._fault
