"""The app: its frame, panes, dialogs and keys."""

from __future__ import annotations

import asyncio
import gc
import threading
from collections.abc import Callable
from dataclasses import replace
from typing import Any

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding
from textual.containers import Container

from gaugeside.app.driver import TerminalDriver
from gaugeside.app.frame import HIGH, LOW, MENU, PANES, TINY, WIDE, head_line, keys_line, rule_line, tabs_line
from gaugeside.app.help_text import help_lines
from gaugeside.app.house import House
from gaugeside.app.panes.logbook import LogbookPane
from gaugeside.app.panes.sheet import SheetPane
from gaugeside.app.panes.site import SitePane
from gaugeside.app.themes import CURSOR_STYLE
from gaugeside.app.widgets.dialogs import Dialog, Help, IntoFile, MachineAndNote, Menu, RefrigerantPicker
from gaugeside.app.widgets.field import TextField
from gaugeside.app.widgets.lines import CAUTION, MUTED, Line, QuietScreen
from gaugeside.checks import CHECKS
from gaugeside.errors import Refusal
from gaugeside.quantities.convert import warm_up
from gaugeside.refrigerants import Refrigerant, find

Pane = SheetPane | LogbookPane | SitePane


class GaugesideApp(House):
    """The log sheet on the screen."""

    ENABLE_COMMAND_PALETTE = False
    AUTO_FOCUS = None
    CSS = (
        """
    Screen { layout: vertical; overflow: hidden; }
    #panes { height: 1fr; width: 100%; }
    .pane { height: 1fr; width: 100%; scrollbar-size: 0 0; }
    TextField, TextField:focus, ChoiceField { background: $background; color: $foreground; border: none; }
    TextField:focus { text-style: underline; background: $surface; }
    ChoiceField:focus { text-style: reverse; }
    .pane.-picture FieldLine, .pane.-picture > Line { height: 0; }
    .pane.-picture FieldLine:focus-within { height: 1; }
    .rule { text-overflow: clip; }
    #word { height: 2; }
    #word > Line { height: 1; }
    Screen.-low #tabs, Screen.-low #rule { display: none; }
    Screen.-low #word { height: 1; }
    Screen.-narrow FieldLine { height: 2; layout: grid; grid-size: 2 2; grid-columns: 20 1fr; grid-rows: 1 1; }
    Screen.-tiny FieldLine { grid-columns: 9 1fr; }
    Screen.-narrow FieldLine > .understood { column-span: 2; width: 1fr; padding-left: 2; }
    Screen.-narrow FieldLine > TextField { width: 1fr; }
    Screen.-narrow FieldLine > ChoiceField { width: 1fr; }
    """
        + CURSOR_STYLE
    )
    BINDINGS = [
        *(Binding(key.lower(), f"pane('{name}')", priority=True) for name, key in PANES.items()),
        Binding("f1", "help", priority=True),
        Binding("f8", "pick", priority=True),
        Binding("f9", "words", priority=True),
        Binding("f10,ctrl+q", "leave", priority=True),
        Binding("ctrl+o", "menu", priority=True),
        Binding("ctrl+g", "picture", priority=True),
        Binding("ctrl+l", "repaint", priority=True),
        Binding("ctrl+z", "undo", priority=True),
        Binding("pageup", "scroll_pane(-1)", priority=True),
        Binding("pagedown", "scroll_pane(1)", priority=True),
        Binding("delete", "delete_entry", priority=True),
    ]

    # Building

    def get_default_screen(self) -> QuietScreen:
        """Return a screen that does not repaint whole at every Tab."""
        return QuietScreen(id="_default")

    def compose(self) -> ComposeResult:
        """Head, panes, word, keys."""
        yield Line(id="head")
        yield Line(id="tabs")
        yield Line(style=MUTED, id="rule", classes="rule")
        wanted = str(self.saved.get("pane", ""))
        self.now = wanted if wanted in PANES else "superheat"
        with Container(id="panes"):
            yield self._build(self.now)
        yield Line(id="standing")
        with Container(id="word"):
            yield Line()
            yield Line()
        yield Line(id="keys")

    async def on_mount(self) -> None:
        """Start the helper, the theme and the pane that was open last."""
        self.event_loop = asyncio.get_running_loop()
        # Not before: the helper's loading would keep the first frame waiting; not later: nor the first answer.
        self.engine.start()
        pane = self._pane()
        self._follow_scrolling(pane)
        self.head()
        self.base.set_focus(pane.first_field())
        self.under_way = True
        self.show_word()
        self.call_after_refresh(self._painted)

    def _painted(self) -> None:
        """After the first frame, do what would have kept it waiting."""
        self.is_painted = True
        gc.enable()
        if self.settings.refrigerant:
            try:
                self.refrigerant = find(self.settings.refrigerant)
            except Refusal as refusal:
                self.trouble(refusal.sentence())
        for pane in self.base.query(SheetPane):
            pane.read_all()
        self.head()
        threading.Thread(target=warm_up, name="units", daemon=True).start()

    def on_resize(self, event: events.Resize) -> None:
        """Lay the frame out anew, in two lines a reading where the window is narrow."""
        # Of the event: the app's own size may still be the one before.
        self.base.set_class(event.size.width < WIDE, "-narrow")
        self.base.set_class(event.size.width < TINY, "-tiny")
        self.base.set_class(event.size.height < LOW, "-low")
        self.call_after_refresh(self._frame)

    def _frame(self) -> None:
        if self.now:
            self.head()
            for pane in self.base.query(SheetPane):
                pane.lay_out()
            self._show_more()
            self.show_word()

    def head(self) -> None:
        """Show refrigerant, site, machine and keys as they are now."""
        width, height = self.size
        small = width < WIDE or height < HIGH
        wanted = "" if self.is_painted else self.settings.refrigerant
        lines = {
            "#head": (head_line(self.refrigerant or wanted, self.site, self.settings.tag, width),
                      "bold" if self.refrigerant or wanted else CAUTION),
            "#tabs": (tabs_line(self.now, width), ""),
            "#standing": self.standing(),
            "#keys": (keys_line(self.now, width, height), CAUTION if small else MUTED),
        }  # fmt: skip
        # While the app ends its lines go one by one, and what was kept meanwhile still comes to be shown.
        for name, (text, style) in lines.items():
            for line in self.base.query(name).results(Line):
                line.say(text, style)
                if name == "#standing":
                    line.display = bool(text)

    def _follow_scrolling(self, pane: Pane) -> None:
        for attribute in ("virtual_size", "scroll_y", "size"):
            self.watch(pane, attribute, self._scrolled, init=False)

    def _scrolled(self) -> None:
        self.call_after_refresh(self._show_more)

    def _show_more(self) -> None:
        """Say in the rule over the pane what is above and below the window."""
        pane = self._pane()
        above, below = pane.scroll_y > 0, pane.scroll_y < pane.max_scroll_y
        self.base.query_one("#rule", Line).say(rule_line(self.size.width, above, below), MUTED)

    # Actions

    async def action_pane(self, name: str) -> None:
        """Show a pane, built at its first showing."""
        while len(self.screen_stack) > 1:
            self.pop_screen()
        panes = self.base.query_one("#panes", Container)
        found = next((pane for pane in panes.children if pane.id == f"pane-{name}"), None)
        if not isinstance(found, Pane):
            found = self._build(name)
            found.display = False
            await panes.mount(found)
            self._follow_scrolling(found)
        elif isinstance(found, LogbookPane):
            found.reload()
        self.now = name
        for pane in panes.children:
            pane.display = pane is found
        self.say("")
        self.head()
        field = found.first_field()
        self.base.set_focus(field)
        if isinstance(found, SitePane) and isinstance(field, TextField):
            field.select_all()
        if self.under_way:
            self.saver.draft(self.draft())

    def _build(self, name: str) -> Pane:
        if name == "logbook":
            return LogbookPane()
        if name == "site":
            return SitePane(self.settings, tuple(self.themes))
        forms = self.saved.get("forms")
        saved = forms.get(name) if isinstance(forms, dict) else None
        return SheetPane(CHECKS[name], saved if isinstance(saved, dict) else {})

    def _pane(self) -> Pane:
        found = self.base.query_one(f"#pane-{self.now}")
        assert isinstance(found, Pane)
        return found

    async def _open(self, dialog: Dialog, answered: Callable[[Any], None] | None) -> None:
        """Lay a dialog over the pane; any key that opens one closes the one that is open."""
        if len(self.screen_stack) > 1:
            self.screen.dismiss(None)
        else:
            await self.push_screen(dialog, answered)
            dialog.set_focus(dialog.first_field())

    async def action_pick(self) -> None:
        """Pick the refrigerant."""

        def picked(found: Any) -> None:
            if isinstance(found, Refrigerant):
                self.use(found)
                if self.settings.tag:
                    self.say(f"What is kept goes under machine {self.settings.tag}; F9 changes it.", stays=True)

        await self._open(RefrigerantPicker(), picked)

    async def action_words(self) -> None:
        """Ask for machine and note: of the entry selected in the logbook, else of what is kept next."""
        pane = self._pane()
        if isinstance(pane, LogbookPane):
            entry = pane.selected
            if entry is None:
                self.say("There is no entry to change.")
                return
            title, words = f"Entry {entry.number}: which machine, and a note", (entry.tag, entry.note)
        else:
            title, words = "For what is kept next", (self.settings.tag, self.note)

        def given(words: tuple[str, str] | None) -> None:
            if words is None:
                return
            if isinstance(pane, LogbookPane):
                pane.change(*words)
                return
            tag, self.note = words
            self.apply(replace(self.settings, tag=tag[:60]))
            self.form_changed()
            note = f'note "{self.note}"' if self.note else "no note"
            self.say(f"Kept next: {f'machine {tag}' if tag else 'no machine'}; {note}.", stays=True)

        await self._open(MachineAndNote(title, *words), given)

    async def action_menu(self) -> None:
        """Show every action under a letter."""

        def chosen(action: str | None) -> None:
            if action:
                # What is typed behind the letter is for what the action opens.
                self.acts = True
                self.call_later(self._act, action)

        await self._open(Menu(MENU), chosen)

    async def _act(self, action: str) -> None:
        try:
            await self.run_action(action)
        finally:
            self.acts = False

    async def action_help(self) -> None:
        """Show help for the pane."""
        pane = self._pane()
        check, units = (pane.check, pane.units) if isinstance(pane, SheetPane) else (None, {})
        await self._open(
            Help(help_lines(self.now, check, units, self.dress, self.told, self.care(), self.size.width)), None
        )

    def action_help_quit(self) -> None:
        """Ctrl+C, where it copies nothing."""
        self.say("F10 or Ctrl+Q leaves.")

    def action_picture(self) -> None:
        """Show the picture of this sheet in place of its numbers, or the numbers again."""
        pane = self._pane()
        if isinstance(pane, SheetPane):
            pane.turn_picture()

    def action_keep_here(self) -> None:
        """Keep what this pane shows."""
        pane = self._pane()
        if isinstance(pane, SheetPane):
            pane.keep()

    def action_clear_sheet(self) -> None:
        """Empty this pane's form."""
        pane = self._pane()
        if isinstance(pane, SheetPane):
            had_readings = pane.has_readings()
            pane.clear()
            self.form_changed()
            pane.top_field().focus()
            if had_readings:
                self.say("The sheet is cleared; Ctrl+Z brings back what stood here.", stays=True)

    def action_delete_entry(self) -> None:
        """Delete the logbook entry selected."""
        pane = self._pane()
        if isinstance(pane, LogbookPane):
            pane.delete()

    def action_undo(self) -> None:
        """Bring back the entry deleted last, or what stood on the form before it was cleared or replaced."""
        pane = self._pane()
        if isinstance(pane, LogbookPane):
            pane.undo()
        elif isinstance(pane, SheetPane):
            if pane.bring_back():
                self.form_changed()
                self.say("What stood here before is back.", stays=True)
            else:
                self.say("Nothing was cleared or replaced here since the start.")

    async def action_write_entries(self) -> None:
        """Write the entries that the logbook shows into a file."""
        await self.action_pane("logbook")
        pane = self._pane()
        if isinstance(pane, LogbookPane):
            await self._open(IntoFile(*pane.into_file()), None)

    def action_scroll_pane(self, by: int) -> None:
        """Scroll the pane by most of its height."""
        pane = self._pane()
        pane.scroll_relative(y=by * max(1, pane.size.height - 1), animate=False)

    def action_repaint(self) -> None:
        """Paint the whole screen again."""
        if isinstance(self._driver, TerminalDriver):
            self._driver.repaint()
        self.refresh(repaint=True, layout=True)

    def action_leave(self) -> None:
        """Close what lies over the pane; else save, finish what goes into the logbook, and leave."""
        if len(self.screen_stack) > 1:
            self.screen.dismiss(None)
            return
        self.saver.draft(self.draft())
        if self.book.busy:
            self.say("Leaving as soon as the logbook is written.")
        self.book.after(self.exit)

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Let Delete and PageUp through to the fields where the pane has no use for them."""
        if action == "delete_entry":
            return len(self.screen_stack) == 1 and self.now == "logbook"
        if action in ("scroll_pane", "undo", "picture"):
            return len(self.screen_stack) == 1
        return True
