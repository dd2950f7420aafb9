"""Writes the half-typed forms and the settings from a thread, so that a frozen screen loses nothing."""

from __future__ import annotations

import threading
from collections.abc import Callable, Mapping
from typing import Any

from gaugeside.errors import Refusal
from gaugeside.settings import Places, Settings, save_draft, save_settings

_PAUSE = 0.3


class Saver:
    """Saves what it was last given, a moment after the last change."""

    def __init__(self, places: Places, on_trouble: Callable[[str], None]) -> None:
        self._places = places
        self._on_trouble = on_trouble
        self._wake = threading.Condition()
        self._writing = threading.Lock()
        self._draft: Mapping[str, Any] | None = None
        self._settings: Settings | None = None
        self._closed = False
        self._told = ""
        self._thread = threading.Thread(target=self._run, name="saver", daemon=True)
        self._thread.start()

    def draft(self, draft: Mapping[str, Any]) -> None:
        """Save this draft soon."""
        with self._wake:
            self._draft = draft
            self._wake.notify()

    def settings(self, settings: Settings) -> None:
        """Save these settings soon."""
        with self._wake:
            self._settings = settings
            self._wake.notify()

    def flush(self) -> None:
        """Save what is waiting now, from the calling thread, after what is being saved already."""
        with self._writing:
            self._flush()

    def _flush(self) -> None:
        with self._wake:
            draft, settings = self._draft, self._settings
            self._draft = self._settings = None
        try:
            if settings is not None:
                save_settings(self._places.settings_file, settings)
            if draft is not None:
                save_draft(self._places.draft_file, draft)
            self._told = ""
        except Refusal as refusal:
            # Said once, not at every key.
            if refusal.message != self._told:
                self._told = refusal.message
                self._on_trouble(f"NOT SAVED: {refusal.sentence()}")

    def close(self) -> None:
        """Save what is waiting and stop."""
        with self._wake:
            self._closed = True
            self._wake.notify()
        self._thread.join(timeout=2)
        self.flush()

    def _run(self) -> None:
        while True:
            with self._wake:
                while not self._closed and self._draft is None and self._settings is None:
                    self._wake.wait()
                if self._closed:
                    return
                self._wake.wait(_PAUSE)
            self.flush()
