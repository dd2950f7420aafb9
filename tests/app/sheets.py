"""The app under a pilot: with the real helper, or with one of a few lines that answers every question alike."""

from __future__ import annotations

import asyncio
import sys
import time
from collections.abc import AsyncIterator, Callable
from contextlib import asynccontextmanager
from typing import Any

from textual import events
from textual.pilot import Pilot
from textual.widget import Widget

from gaugeside.app.app import GaugesideApp
from gaugeside.app.panes.sheet import SheetPane
from gaugeside.app.themes import load_themes
from gaugeside.app.widgets.field import FieldLine
from gaugeside.app.widgets.lines import Line, Lines
from gaugeside.engine import Engine
from gaugeside.settings import Settings, load_draft, load_settings, places

# Waits for a slow machine; nothing is measured with it.
PATIENCE = 5.0

# Every superheat is 5 K, and the note tells what was asked; only the screen is under test.
CANNED = r"""
import json, sys
print(json.dumps({"ready": 1}), flush=True)
for line in sys.stdin:
    asked = json.loads(line)
    request = asked["request"]
    note = "asked " + json.dumps(request["values"]).replace("{", "(").replace("}", ")")
    print(json.dumps({"number": asked["number"], "answer": {
        "check": request["check"], "refrigerant": request["refrigerant"], "findings": {"superheat": 5.0},
        "remarks": {}, "notes": [[note, {}]], "cautions": [], "tables": [], "unresolved": None,
        "library_version": "0",
    }}), flush=True)
"""
CANNED_COMMAND = [sys.executable, "-S", "-c", CANNED]


_NAMES = {
    " ": "space", "\n": "enter", "\t": "tab", ",": "comma", ".": "full_stop", "-": "minus", "/": "slash",
    "(": "left_parenthesis", ")": "right_parenthesis", "[": "left_square_bracket",
}  # fmt: skip
_CHARACTERS = {"enter": "\r", "tab": "\t", "space": " ", "\n": "\r"}


class Sheet:
    """What a test does with the app and sees of it."""

    def __init__(self, app: GaugesideApp, pilot: Pilot[None]) -> None:
        self.app, self.pilot = app, pilot

    async def press(self, *keys: str) -> None:
        """Press keys by name, all at once as a slow link brings them."""
        for key in keys:
            character = _CHARACTERS.get(key, key if len(key) == 1 else None)
            self.app.post_message(events.Key(_NAMES.get(key, key), character))
        arrived = asyncio.Event()
        self.app.call_later(arrived.set)
        # An app that has been left takes no more calls.
        await self.wait(
            lambda: (arrived.is_set() and self.app.is_idle) or not self.app.is_running, "the keys to be taken"
        )

    async def type(self, text: str) -> None:
        """Type text into whatever has the focus; a line end is Enter, a tab Tab."""
        await self.press(*text)

    async def wait(self, condition: Callable[[], object], what: str = "") -> None:
        """Wait until something holds."""
        deadline = time.monotonic() + PATIENCE
        while not condition():
            assert time.monotonic() < deadline, f"waited in vain for {what or condition}:\n{self.text()}"
            await self.pilot.pause(0.01)

    async def see(self, text: str) -> None:
        """Wait until a text is on the screen."""
        await self.wait(lambda: text in self.text(), repr(text))

    def lines(self) -> list[str]:
        """The lines of the screen that is on top, whether or not they fit into the window."""
        shown: list[str] = []
        for widget in self.app.screen.query(Widget):
            if not all(parent.display for parent in [widget, *widget.ancestors] if isinstance(parent, Widget)):
                continue
            if isinstance(widget, FieldLine):
                # One that is just being put there has no label yet.
                for label in widget.query(".label").results(Line):
                    shown.append(f"{label.text:<20}{widget.field.value:<21}{widget.understood.text}".rstrip())
            elif isinstance(widget, Line) and not isinstance(widget.parent, FieldLine):
                shown.append(widget.text)
        return shown

    def text(self) -> str:
        """The screen as one text."""
        return "\n".join(self.lines())

    def line(self, start: str) -> str:
        """The line of the sheet that starts so; the help under the sheet has a colon behind the same words."""
        found = [
            line for line in self.lines() if line.strip().startswith(start) and not line.strip().startswith(f"{start}:")
        ]
        assert len(found) == 1, f"{len(found)} lines start with {start!r}:\n{self.text()}"
        return found[0]

    @property
    def word(self) -> str:
        """What is said under the sheet."""
        return " ".join(line.text for line in self.app.base.query("#word > Line").results(Line)).strip()

    @property
    def focus(self) -> str | None:
        """The name of the field that has the focus."""
        return None if self.app.focused is None else self.app.focused.id

    def pane(self, name: str) -> SheetPane:
        """A check's pane."""
        return self.app.base.query_one(f"#pane-{name}", SheetPane)

    @property
    def rule(self) -> str:
        """What the rule over the findings says, empty for a rule alone."""
        return self.app.base.query_one(f"#pane-{self.app.now} > .rule", Line).text.rstrip("- ")

    def findings(self) -> list[str]:
        """The lines under the form of the pane that is shown."""
        return self.app.base.query_one(f"#pane-{self.app.now}").query_one("#findings", Lines).texts()


@asynccontextmanager
async def sheet(
    refrigerant: str = "R-134a",
    size: tuple[int, int] = (80, 24),
    command: list[str] | None = CANNED_COMMAND,
    environ: dict[str, str] | None = None,
    **settings: Any,
) -> AsyncIterator[Sheet]:
    """Open the app on the test's own home, with what was remembered there, or with these settings the first time.

    command: the helper's; None for the real one.
    """
    where = places()
    if where.settings_file.exists():
        known, messages = load_settings(where.settings_file)
    else:
        known, messages = Settings(refrigerant=refrigerant, **settings), []
    draft, more = load_draft(where.draft_file)
    themes, faults = load_themes(where.themes_folder)
    shown = environ or {"TERM": "xterm-256color"}
    engine = Engine(
        lambda _: None, lambda _: None, log=where.log_file, own_folder=where.settings_folder, command=command
    )
    app = GaugesideApp(where, known, draft, themes, [*messages, *more, *faults], shown, engine)
    try:
        async with app.run_test(size=size) as pilot:
            shown_sheet = Sheet(app, pilot)
            await shown_sheet.wait(lambda: app.is_painted, "the first frame")
            yield shown_sheet
    finally:
        app.saver.close()
        app.engine.close()
        app.book.close()
