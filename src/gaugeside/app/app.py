"""The app: modes, keys, theme, and what all panes share."""

from __future__ import annotations

import asyncio
import textwrap
from collections.abc import Callable
from contextlib import suppress
from dataclasses import replace
from functools import partial
from typing import Any

from textual.app import App, ComposeResult
from textual.binding import Binding
from textual.containers import Container
from textual.theme import Theme
from textual.widget import Widget

from gaugeside.app.help_text import help_lines
from gaugeside.app.panes.logbook import LogbookPane
from gaugeside.app.panes.sheet import SheetPane
from gaugeside.app.panes.site import SitePane
from gaugeside.app.saver import Saver
from gaugeside.app.widgets.dialogs import Dialog, Help, MachineAndNote, Menu, RefrigerantPicker
from gaugeside.app.widgets.lines import CAUTION, MUTED, RULE, Line, QuietScreen
from gaugeside.checks import CHECKS
from gaugeside.checks.view import FOOTNOTE
from gaugeside.engine import Engine, Reply
from gaugeside.errors import Refusal
from gaugeside.keeping import entry_of
from gaugeside.logbook import Entry, Logbook
from gaugeside.preferences import dress_of, site_of
from gaugeside.quantities.site import SEA_LEVEL
from gaugeside.refrigerants import Refrigerant, find
from gaugeside.settings import Places, Settings

PANES = {"saturation": "F2", "superheat": "F3", "component": "F4", "logbook": "F6", "site": "F7"}
_KEYS = "Enter keep  F1 help  F8 refrigerant  F9 machine, note  Ctrl+O menu  F10 leave"
_OTHER_KEYS = {
    "logbook": "Enter open  F1 help  F9 machine, note  Delete  Ctrl+Z back  Ctrl+O menu  F10 leave",
    "site": "Left Right choose  F1 help  Ctrl+O menu  F10 leave",
}
_MENU = (
    ("2", "saturation", "pane('saturation')"),
    ("3", "superheat and subcooling", "pane('superheat')"),
    ("4", "component", "pane('component')"),
    ("6", "logbook", "pane('logbook')"),
    ("7", "site, units, theme", "pane('site')"),
    ("8", "pick the refrigerant", "pick"),
    ("9", "machine and note", "words"),
    ("k", "keep in the logbook", "keep_here"),
    ("c", "clear this sheet", "clear_sheet"),
    ("d", "delete the logbook entry selected", "delete_entry"),
    ("u", "bring back the entry deleted last", "undo_delete"),
    ("h", "help", "help"),
    ("l", "paint the screen again", "repaint"),
    ("q", "leave", "leave"),
)


class GaugesideApp(App[None]):
    """The log sheet on the screen."""

    ENABLE_COMMAND_PALETTE = False
    AUTO_FOCUS = None
    CSS = """
    Screen { layout: vertical; overflow: hidden; }
    #panes { height: 1fr; width: 100%; }
    .pane { height: 1fr; width: 100%; scrollbar-size: 0 0; display: none; }
    .pane.-shown { display: block; }
    TextField, TextField:focus, ChoiceField { background: $background; color: $foreground; border: none; }
    TextField:focus { text-style: underline; background: $surface; }
    ChoiceField:focus { text-style: reverse; }
    .rule { text-overflow: clip; }
    #word { height: 2; }
    #word > Line { height: 1; }
    Screen.-narrow FieldLine { height: 2; layout: grid; grid-size: 2 2; grid-columns: 20 1fr; grid-rows: 1 1; }
    Screen.-narrow FieldLine > .understood { column-span: 2; width: 1fr; padding-left: 2; }
    Screen.-narrow FieldLine > TextField { width: 1fr; }
    Screen.-narrow FieldLine > ChoiceField { width: 1fr; }
    """
    HORIZONTAL_BREAKPOINTS = [(0, "-narrow"), (80, "-wide")]
    BINDINGS = [
        *(Binding(key.lower(), f"pane('{name}')", priority=True) for name, key in PANES.items()),
        Binding("f1", "help", priority=True),
        Binding("f8", "pick", priority=True),
        Binding("f9", "words", priority=True),
        Binding("f10,ctrl+q", "leave", priority=True),
        Binding("ctrl+o", "menu", priority=True),
        Binding("ctrl+l", "repaint", priority=True),
        Binding("ctrl+z", "undo_delete", priority=True),
        Binding("pageup", "scroll_pane(-1)", priority=True),
        Binding("pagedown", "scroll_pane(1)", priority=True),
        Binding("delete", "delete_entry", priority=True),
    ]

    def __init__(
        self,
        places: Places,
        settings: Settings,
        draft: dict[str, Any],
        themes: dict[str, Theme],
        theme_name: str,
        messages: list[str],
    ) -> None:
        super().__init__()
        self.places, self.settings, self._saved = places, settings, draft
        self.themes, self._theme_name = themes, theme_name
        self._messages = messages
        self.logbook = Logbook(places.logbook_file)
        self.refrigerant: Refrigerant | None = None
        self.note = str(draft.get("note", ""))[:2000]
        self.engine_word = ""
        self._word: tuple[str, str] = ("", "")
        self._now = ""
        self._under_way = False
        self._event_loop: asyncio.AbstractEventLoop | None = None
        self.engine = Engine(
            lambda reply: self._from_thread(self._reply, reply),
            lambda word: self._from_thread(self._engine_says, word),
            log=places.log_file,
            own_folder=places.settings_folder,
        )
        self.saver = Saver(places, lambda text: self._from_thread(self._trouble, text))
        self._take_settings(settings)

    # Shared by the panes

    def _take_settings(self, settings: Settings) -> None:
        self.settings = settings
        self.dress = dress_of(settings)
        try:
            self.site = site_of(settings)
        except Refusal as refusal:
            self.site = SEA_LEVEL
            self._messages.append(f"{refusal.sentence()} Sea level is used.")

    def apply(self, settings: Settings) -> None:
        """Use and remember other settings; every form is read again."""
        if settings == self.settings:
            return
        redressed = (settings.dress, settings.units, settings.bare_pressure) != (
            self.settings.dress,
            self.settings.units,
            self.settings.bare_pressure,
        )
        if settings.theme != self.settings.theme and settings.theme in self.themes:
            self.theme = settings.theme
        self._take_settings(settings)
        self.saver.settings(settings)
        for pane in self.query(SheetPane):
            if redressed:
                pane.units.clear()
            pane.read_all()
        self._head()

    def say(self, text: str, style: str = MUTED) -> None:
        """Show a sentence in the two lines under the sheet."""
        self._word = (text, style)
        self._show_word()

    def _show_word(self) -> None:
        text, style = (self.engine_word, CAUTION) if self.engine_word else self._word
        if self._messages:
            text, style = self._messages[0], CAUTION
        lines = textwrap.wrap(text or (FOOTNOTE if self._now in CHECKS else ""), max(20, self.size.width - 1))
        if len(lines) > 2:
            lines[1] = f"{lines[1][: max(1, self.size.width - 5)]} ..."
        for place, line in enumerate(self._base.query("#word > Line").results(Line)):
            line.say(lines[place] if place < len(lines) else "", style)

    @property
    def _base(self) -> Widget:
        return self.screen_stack[0]

    def form_changed(self) -> None:
        """Something was typed: save the forms soon, drop messages that have been read."""
        self._messages.clear()
        if self._under_way:
            self.saver.draft(self.draft())

    def draft(self) -> dict[str, Any]:
        """Return what is on the forms."""
        forms = dict(self._saved.get("forms", {})) if isinstance(self._saved.get("forms"), dict) else {}
        for pane in self.query(SheetPane):
            forms[pane.check.name] = {"texts": pane.texts(), "units": pane.units}
        return {"pane": self._now, "note": self.note, "forms": forms}

    def keep(self, pane: SheetPane) -> None:
        """Keep what a sheet shows in the logbook."""
        if pane.answer is None or pane.refusal is not None:
            word = pane.refusal.sentence() if pane.refusal else "There is no answer on this sheet yet."
            self.say(f"Not kept: {word}", CAUTION)
            return
        entry = entry_of(pane.check, pane.answer, pane.meant(), self.settings, self.dress, self.site, self.note)
        try:
            kept = self.logbook.keep(entry)
        except Refusal as refusal:
            self.say(f"NOT KEPT: {refusal.sentence()}", CAUTION)
            return
        at = kept.entry.kept_at.astimezone().strftime("%H:%M:%S")
        if kept.already:
            self.say(f"Already kept at {at} as entry {kept.entry.number}: the same within ten minutes is one entry.")
        else:
            self.note = ""
            self._head()
            machine = f" for {self.settings.tag}" if self.settings.tag else ""
            self.say(f"Kept at {at} as entry {kept.entry.number}{machine}. F6 shows the logbook.")
        self.form_changed()

    def open_entry(self, entry: Entry) -> None:
        """Bring an entry's readings back into their pane."""
        if entry.check not in CHECKS:
            self.say(f"Entry {entry.number} is of a kind this version does not have: {entry.check}.", CAUTION)
            return
        try:
            self._use(find(entry.refrigerant))
        except Refusal as refusal:
            self.say(refusal.sentence(), CAUTION)
            return
        if entry.tag != self.settings.tag:
            self.apply(replace(self.settings, tag=entry.tag))
        self.action_pane(entry.check)
        pane = self.query_one(f"#pane-{entry.check}", SheetPane)
        pane.call_after_refresh(pane.put, entry.readings)
        self._head()
        pane.call_after_refresh(self._say_opened, entry)
        self.form_changed()

    def _say_opened(self, entry: Entry) -> None:
        then = entry.options.get("site", "")
        datum = entry.options.get("datum", self.settings.datum)
        words = [f"Entry {entry.number} as it was typed."]
        if then and then != self.site.source:
            words.append(f"The site was then: {then}; now: {self.site.source}.")
        if datum != self.settings.datum:
            words.append(f"Enthalpy datum then {datum}, now {self.settings.datum}.")
        self.say(" ".join(words), CAUTION if len(words) > 1 else MUTED)

    # Building

    def get_default_screen(self) -> QuietScreen:
        """Return a screen that does not repaint whole at every Tab."""
        return QuietScreen(id="_default")

    def compose(self) -> ComposeResult:
        """Head, panes, word, keys."""
        yield Line(id="head")
        yield Line(id="tabs")
        yield Line(RULE, MUTED, classes="rule")
        yield Container(id="panes")
        with Container(id="word"):
            yield Line()
            yield Line()
        yield Line(_KEYS, MUTED, id="keys")

    def on_mount(self) -> None:
        """Start the helper, the theme and the pane that was open last."""
        self._event_loop = asyncio.get_running_loop()
        self.engine.start()
        for theme in self.themes.values():
            self.register_theme(theme)
        self.theme = self._theme_name
        if self.settings.refrigerant:
            try:
                self.refrigerant = find(self.settings.refrigerant)
            except Refusal as refusal:
                self._messages.append(refusal.sentence())
        wanted = str(self._saved.get("pane", ""))
        self.action_pane(wanted if wanted in PANES else "superheat")
        self._under_way = True

    def on_resize(self) -> None:
        """Say so when the window is smaller than the sheet."""
        self.call_after_refresh(self._show_keys)
        self._show_word()

    def _show_keys(self) -> None:
        width, height = self.size
        small = width < 80 or height < 24
        words = f"{width}x{height} PgUp PgDn scroll  Ctrl+O menu" if small else _OTHER_KEYS.get(self._now, _KEYS)
        self._base.query_one("#keys", Line).say(words, CAUTION if small else MUTED)
        self._head()

    def _head(self) -> None:
        r = self.refrigerant
        if r is None:
            left, style = "no refrigerant: F8", CAUTION
        else:
            left, style = f"{r.designation}  {r.safety_class}  {r.nature}", "bold"
        site = f"{self.site.atmosphere / 1000:.2f} kPa abs {self.site.source.split(',')[0]}"
        narrow = self.size.width < 80
        text = f" {left}  {self.settings.tag}" if narrow else f" {left:<26}{site:<38}{self.settings.tag[:14]}"
        self._base.query_one("#head", Line).say(text.rstrip(), style)
        tabs = "  ".join(f"{key} {name.upper() if name == self._now else name}" for name, key in PANES.items())
        if narrow:
            tabs = f"{self._now.upper()}   F2 to F7 or Ctrl+O"
        self._base.query_one("#tabs", Line).say(f" {tabs}")

    # Actions

    def action_pane(self, name: str) -> None:
        """Show a pane, built at its first showing."""
        while len(self.screen_stack) > 1:
            self.pop_screen()
        self._now = name
        panes = self._base.query_one("#panes", Container)
        found = next((pane for pane in panes.children if pane.id == f"pane-{name}"), None)
        if not isinstance(found, SheetPane | LogbookPane | SitePane):
            found = self._build(name)
            panes.mount(found)
        for pane in panes.children:
            pane.set_class(pane is found, "-shown")
        found.add_class("-shown")
        if isinstance(found, LogbookPane) and found.is_mounted:
            found.reload()
        self.say("")
        self._show_keys()
        found.call_after_refresh(found.focus_first)
        if self._under_way:
            self.saver.draft(self.draft())

    def _build(self, name: str) -> SheetPane | LogbookPane | SitePane:
        if name == "logbook":
            return LogbookPane()
        if name == "site":
            return SitePane(self.settings, tuple(self.themes))
        forms = self._saved.get("forms")
        saved = forms.get(name) if isinstance(forms, dict) else None
        return SheetPane(CHECKS[name], saved if isinstance(saved, dict) else {})

    def _pane(self) -> Any:
        return self._base.query_one(f"#pane-{self._now}")

    def _open(self, dialog: Dialog, answered: Callable[[Any], None] | None) -> None:
        """Lay a dialog over the pane; any key that opens one closes the one that is open."""
        if len(self.screen_stack) > 1:
            self.screen.dismiss(None)
        else:
            self.push_screen(dialog, answered)

    def action_pick(self) -> None:
        """Pick the refrigerant."""

        def picked(found: Any) -> None:
            if isinstance(found, Refrigerant):
                self._use(found)
                self.apply(replace(self.settings, refrigerant=found.designation))
                self._head()

        self._open(RefrigerantPicker(), picked)

    def _use(self, found: Refrigerant) -> None:
        self.refrigerant = found
        for pane in self.query(SheetPane):
            pane.read_all()

    def action_words(self) -> None:
        """Ask for machine and note: of the entry selected in the logbook, else of what is kept next."""
        pane = self._pane()
        if isinstance(pane, LogbookPane):
            entry = pane.selected
            if entry is None:
                self.say("There is no entry to change.")
                return
            title = f"Entry {entry.number}: which machine, and a note"

            def changed(words: Any) -> None:
                if words:
                    pane.change(*words)

            self._open(MachineAndNote(title, entry.tag, entry.note), changed)
            return

        def given(words: Any) -> None:
            if words:
                tag, self.note = words
                self.apply(replace(self.settings, tag=tag[:60]))
                self._head()
                self.say(f"Kept next: machine {tag or '-'}, note {self.note or '-'}.")
                self.form_changed()

        self._open(MachineAndNote("For what is kept next", self.settings.tag, self.note), given)

    def action_menu(self) -> None:
        """Show every action under a letter."""

        def chosen(action: Any) -> None:
            if action:
                self.call_later(self.run_action, action)

        self._open(Menu(_MENU), chosen)

    def action_help(self) -> None:
        """Show help for the pane."""
        pane = self._pane()
        check, units = (pane.check, pane.units) if isinstance(pane, SheetPane) else (None, {})
        self._open(Help(help_lines(check, units, self.dress)), None)

    def action_keep_here(self) -> None:
        """Keep what this pane shows."""
        pane = self._pane()
        if isinstance(pane, SheetPane):
            self.keep(pane)

    def action_clear_sheet(self) -> None:
        """Empty this pane's form."""
        pane = self._pane()
        if isinstance(pane, SheetPane):
            pane.clear()
            self.form_changed()

    def action_delete_entry(self) -> None:
        """Delete the logbook entry selected."""
        pane = self._pane()
        if isinstance(pane, LogbookPane):
            pane.delete()

    def action_undo_delete(self) -> None:
        """Bring back the entry deleted last."""
        pane = self._pane()
        if isinstance(pane, LogbookPane):
            pane.undo()

    def action_scroll_pane(self, by: int) -> None:
        """Scroll the pane by most of its height."""
        pane = self._pane()
        pane.scroll_relative(y=by * max(1, pane.size.height - 1), animate=False)

    def action_repaint(self) -> None:
        """Paint the whole screen again."""
        self.refresh(repaint=True, layout=True)

    def action_leave(self) -> None:
        """Save and leave."""
        if len(self.screen_stack) > 1:
            self.screen.dismiss(None)
            return
        self.saver.draft(self.draft())
        self.exit()

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Let Delete and PageUp through to the fields where the pane has no use for them."""
        if action == "delete_entry":
            return len(self.screen_stack) == 1 and self._now == "logbook"
        if action in ("scroll_pane", "undo_delete"):
            return len(self.screen_stack) == 1
        return True

    # From other threads

    def _from_thread(self, callback: Any, *arguments: Any) -> None:
        # After the app has ended there is no loop, and nobody to tell.
        with suppress(RuntimeError):
            if self._event_loop is not None:
                self._event_loop.call_soon_threadsafe(partial(self.call_later, callback, *arguments))

    def _reply(self, reply: Reply) -> None:
        self.engine_word = ""
        for pane in self.query(SheetPane):
            if pane.check.name == reply.slot:
                pane.receive(reply)
        self._show_word()

    def _engine_says(self, word: str) -> None:
        self.engine_word = word
        self._show_word()

    def _trouble(self, text: str) -> None:
        self._messages.append(text)
        self._show_word()
