"""Every test runs away from the machine's own files, language and colours."""

from __future__ import annotations

from pathlib import Path

import pytest

_COLOUR = ("NO_COLOR", "FORCE_COLOR", "CLICOLOR", "CLICOLOR_FORCE", "COLORTERM", "TEXTUAL_ANIMATIONS")
_LANGUAGE = ("LC_ALL", "LC_CTYPE", "LC_NUMERIC", "LANGUAGE", "PYTHONIOENCODING", "PYTHONUTF8")
_PLACES = ("XDG_CONFIG_HOME", "XDG_DATA_HOME", "XDG_STATE_HOME", "XDG_CACHE_HOME")


@pytest.fixture(autouse=True)
def isolated(monkeypatch: pytest.MonkeyPatch, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Give the test an own home and an own folder of the program, which does not exist yet; return that folder."""
    home = tmp_path_factory.mktemp("home")
    for name in (*_COLOUR, *_LANGUAGE, *_PLACES):
        monkeypatch.delenv(name, raising=False)
    monkeypatch.setenv("HOME", str(home))
    monkeypatch.setenv("GAUGESIDE_HOME", str(home / "gaugeside"))
    monkeypatch.setenv("LANG", "C.UTF-8")
    monkeypatch.setenv("TZ", "UTC")
    return home / "gaugeside"
