"""What all panes share: settings and site, the refrigerant, the words under the sheet, the helper, the logbook."""

from __future__ import annotations

import asyncio
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import replace
from datetime import UTC, datetime
from functools import partial
from typing import Any

from textual import on
from textual.app import App
from textual.screen import Screen
from textual.theme import Theme

from gaugeside.app.book import Book
from gaugeside.app.driver import TerminalDriver
from gaugeside.app.frame import HIGH, word_lines
from gaugeside.app.keys import KeysInTurn
from gaugeside.app.panes.answer_lines import refusal_words
from gaugeside.app.panes.logbook import LogbookPane
from gaugeside.app.panes.sheet import SheetPane
from gaugeside.app.saver import Saver
from gaugeside.app.themes import pick_theme, without_colour
from gaugeside.app.widgets.field import TextField
from gaugeside.app.widgets.lines import CAUTION, MUTED, Line, Styled
from gaugeside.checks import CHECKS
from gaugeside.checks.caution import model_remark, standing_caution
from gaugeside.checks.compressor_map import CompressorMap, load_maps
from gaugeside.checks.sheet import Answer
from gaugeside.checks.typed import whole_texts
from gaugeside.checks.view import footnote, sentence
from gaugeside.engine import Engine, Reply
from gaugeside.errors import Refusal
from gaugeside.keeping import entry_of
from gaugeside.logbook import SAME_WITHIN, Entry, Kept, Logbook
from gaugeside.preferences import dress_of, site_of
from gaugeside.quantities.site import SEA_LEVEL
from gaugeside.refrigerants import Refrigerant, find
from gaugeside.settings import Places, Settings

_MOST_MESSAGES = 20


class House(KeysInTurn):
    """The app as its panes know it."""

    def head(self) -> None:
        """Show refrigerant, site, machine and keys as they are now; the app itself knows how."""

    async def action_pane(self, name: str) -> None:
        """Show a pane; the app itself knows how."""

    def __init__(
        self,
        places: Places,
        settings: Settings,
        draft: dict[str, Any],
        themes: dict[str, Theme],
        messages: list[str],
        environ: Mapping[str, str],
        engine: Engine,
    ) -> None:
        super().__init__(driver_class=TerminalDriver, ansi_color=True if without_colour(environ) else None)
        self.places, self.settings, self.saved = places, settings, draft
        self.themes, self.environ = themes, environ
        self._messages, self.told = messages, list(messages)
        self.refrigerant: Refrigerant | None = None
        self.note = str(draft.get("note", ""))[:2000]
        self.engine_word = ""
        self._word: tuple[str, str] = ("", "")
        self.word_stays = False
        self.now = ""
        self.under_way = False
        self.acts = False
        self.is_painted = False
        self.event_loop: asyncio.AbstractEventLoop | None = None
        self.engine = engine
        engine.on_reply = lambda reply: self._from_thread(self._reply, reply)
        engine.on_state = lambda word: self._from_thread(self._engine_says, word)
        self.saver = Saver(places, lambda text: self._from_thread(self.trouble, text))
        self.book = Book(Logbook(places.logbook_file), self._from_thread, self.trouble)
        self._maps, bad_maps = load_maps(places.settings_folder)
        for trouble in bad_maps:
            self.trouble(trouble)
        self._take_settings(settings)
        for theme in themes.values():
            self.register_theme(theme)
        # Before the app runs: a theme set later has the whole style sheet read again.
        self.set_reactive(App.theme, pick_theme(settings.theme, environ, themes))
        self.stylesheet.set_variables(self.get_css_variables())

    def _take_settings(self, settings: Settings) -> None:
        self.settings = settings
        self.dress = dress_of(settings)
        try:
            self.site = site_of(settings)
        except Refusal as refusal:
            self.site = SEA_LEVEL
            self.trouble(f"{refusal.sentence()} Sea level is used.")

    def apply(self, settings: Settings) -> None:
        """Use and remember other settings; every form is read again."""
        if settings == self.settings:
            return
        redressed = (settings.dress, settings.units, settings.bare_pressure) != (
            self.settings.dress,
            self.settings.units,
            self.settings.bare_pressure,
        )
        if redressed:
            self._write_units()
            # Before the settings: a bare number may never stand on the disk beside units it was not typed in.
            self.saver.draft(self.draft())
        if settings.theme != self.settings.theme:
            self.theme = pick_theme(settings.theme, self.environ, self.themes)
        self._take_settings(settings)
        self.saver.settings(settings)
        for pane in self.base.query(SheetPane):
            pane.read_all()
        self.head()

    def _write_units(self) -> None:
        """Write its unit behind every number on a form that has none: it keeps what it was typed to mean."""
        for pane in self.base.query(SheetPane):
            pane.write_units()
            if pane.has_readings():
                self.say("Readings that were typed keep the units they had.")
        shown = {pane.check.name for pane in self.base.query(SheetPane)}
        forms = self.saved.get("forms")
        for name, form in forms.items() if isinstance(forms, dict) else ():
            if name in CHECKS and name not in shown and isinstance(form, dict):
                form["texts"] = whole_texts(CHECKS[name], form.get("texts"), form.get("units"), self.dress, self.site)
                form["units"] = {}

    def compressor(self) -> CompressorMap | None:
        """Return the polynomials kept for the machine that is named, where they are for this refrigerant."""
        found = self._maps.get(self.settings.tag.casefold())
        if found is None or self.refrigerant is None:
            return None
        with suppress(Refusal):
            if find(found.refrigerant).designation == self.refrigerant.designation:
                return found
        return None

    def say(self, text: str, style: str = MUTED, *, stays: bool = False) -> None:
        """Show a sentence in the two lines under the sheet.

        stays: until the next key that changes something; an answer that comes does not replace it.
        """
        self.word_stays = stays
        self._word = (text, style)
        self.show_word()

    def show_word(self) -> None:
        """Show what is most urgent: a message not read yet, the helper's state, the word said last."""
        if not self.under_way:
            return
        text, style = (self.engine_word, CAUTION) if self.engine_word else self._word
        if self._messages:
            more = len(self._messages) - 1
            text, style = self._messages[0] + (f" ({more} more: F1)" if more else ""), CAUTION
        standing = self._footnote() if self.now in CHECKS else ""
        shown = word_lines(text, standing, self.size.width)
        # While the app ends its lines go one by one, and a thread may still have something to say.
        for line, part in zip(self.base.query("#word > Line").results(Line), shown, strict=False):
            line.say(part, MUTED if part == standing else style)

    def _footnote(self) -> str:
        refrigerant = self.refrigerant
        is_said = refrigerant is not None and model_remark(refrigerant) is not None
        return footnote(refrigerant.model_uncertainty if refrigerant and is_said else 0.0, self.dress, self.site)

    def care(self) -> list[str]:
        """Return what there is to know of the refrigerant whatever is read: its harm, how far its model may be off."""
        if self.refrigerant is None:
            return []
        model = model_remark(self.refrigerant)
        harm = standing_caution(self.refrigerant)[0]
        return [harm] if model is None else [harm, sentence(model, self.dress, self.site)]

    def stands_already(self) -> list[str]:
        """Return the remarks that need not be on a sheet, since they stand around it."""
        has_room = bool(self.standing()[0]) and len(self._footnote()) <= self.size.width
        return self.care() if has_room else []

    def standing(self) -> Styled:
        """Return what the refrigerant asks of a person whatever is read; empty where there is no room for it."""
        check = CHECKS.get(self.now)
        width, height = self.size
        if self.refrigerant is None or check is None or not check.needs_refrigerant or height < HIGH:
            return "", MUTED
        text, is_urgent = standing_caution(self.refrigerant)
        return (text if len(text) <= width else "", CAUTION if is_urgent else MUTED)

    @property
    def base(self) -> Screen[Any]:
        """The screen with the panes, whatever lies over it."""
        return self.screen_stack[0]

    @property
    def is_busy(self) -> bool:
        """Whether something is at work, or the logbook about to change: a key could mean what is not there yet."""
        if self.acts:
            return True
        if self.now != "logbook":
            return False
        return self.book.busy or any(pane.keeps_then for pane in self.base.query(SheetPane))

    def form_changed(self) -> None:
        """Something was typed: save the forms soon, drop messages that have been read."""
        # Fields tell of the text they start with, too: before the first frame nothing has been read.
        if self.is_painted:
            self._messages.clear()
            self.word_stays = False
            self.saver.draft(self.draft())

    def draft(self) -> dict[str, Any]:
        """Return what is on the forms."""
        forms = dict(self.saved.get("forms", {})) if isinstance(self.saved.get("forms"), dict) else {}
        for pane in self.base.query(SheetPane):
            forms[pane.check.name] = {"texts": pane.texts(), "units": pane.units}
        return {"pane": self.now, "note": self.note, "forms": forms}

    @on(TextField.NotTaken)
    def _not_taken(self, event: TextField.NotTaken) -> None:
        self.say(event.words, CAUTION, stays=True)

    def keep(self, pane: SheetPane) -> None:
        """Keep what a sheet shows in the logbook."""
        if pane.answer is None or pane.refusal is not None:
            word = refusal_words(pane.check, pane.refusal) or "There is no answer on this sheet yet."
            self.say(f"Not kept: {word}", CAUTION)
            return
        earlier = pane.kept_as
        # With a note it is another entry; without, the note of the first must not make two of one reading.
        if earlier is not None and not self.note and datetime.now(UTC) - earlier.kept_at <= SAME_WITHIN:
            self._say_already(earlier)
            return
        entry = entry_of(pane.check, pane.answer, pane.meant(), self.settings, self.dress, self.site, self.note)
        self.book.do(lambda logbook: logbook.keep(entry), partial(self._kept, pane, pane.answer), self._not_kept)

    def _kept(self, pane: SheetPane, answer: Answer, kept: Kept) -> None:
        if pane.answer is answer:
            pane.kept_as = kept.entry
        at = kept.entry.kept_at.astimezone().strftime("%H:%M:%S")
        if not kept.already and self.note == kept.entry.note:
            self.note = ""
        # First: an earlier word, such as that it was not kept, must not cover this one.
        self.form_changed()
        if kept.already:
            self._say_already(kept.entry)
            return
        self.head()
        machine = f" for {kept.entry.tag}" if kept.entry.tag else ""
        count = len([caution for caution in kept.entry.cautions if caution not in self.care()])
        cautions = f", with {count} caution{'s' if count > 1 else ''}" if count else ""
        self.say(f"Kept at {at} as entry {kept.entry.number}{machine}{cautions}. F6 shows the logbook.", stays=True)
        for shown in self.base.query(LogbookPane):
            shown.reload()

    def _say_already(self, entry: Entry) -> None:
        at = entry.kept_at.astimezone().strftime("%H:%M:%S")
        self.say(f"Already kept at {at} as entry {entry.number}: the same within ten minutes is one entry.", stays=True)

    def forget_kept(self, number: int | None) -> None:
        """An entry is deleted: the sheet that it was kept from may be kept again."""
        for pane in self.base.query(SheetPane):
            if pane.kept_as is not None and pane.kept_as.number == number:
                pane.kept_as = None

    def _not_kept(self, refusal: Refusal) -> None:
        self.trouble(f"NOT KEPT: {refusal.sentence()}", first=True)

    async def open_entry(self, entry: Entry) -> None:
        """Bring an entry's readings back into their pane."""
        if entry.check not in CHECKS:
            self.say(f"Entry {entry.number} is of a kind this version does not have: {entry.check}.", CAUTION)
            return
        if entry.refrigerant:
            try:
                self.use(find(entry.refrigerant))
            except Refusal as refusal:
                self.say(refusal.sentence(), CAUTION)
                return
        machine = self.settings.tag
        self.apply(replace(self.settings, tag=entry.tag))
        await self.action_pane(entry.check)
        pane = self.base.query_one(f"#pane-{entry.check}", SheetPane)
        words = [f"Entry {entry.number} with its readings.", *self._otherwise_then(entry)]
        style = CAUTION if len(words) > 1 else MUTED
        if machine != entry.tag:
            words.append(f"Machine now: {entry.tag or 'none'}.")
        if pane.has_readings():
            words.append("Ctrl+Z brings back what stood here.")
        pane.put(entry.readings)
        self.head()
        self.form_changed()
        self.say(" ".join(words), style, stays=True)

    def _otherwise_then(self, entry: Entry) -> list[str]:
        """Return what an entry rests on that is otherwise now."""
        then = entry.options.get("site", "")
        datum = entry.options.get("datum", self.settings.datum)
        words = [f"The site was then: {then}; now: {self.site.source}."] if then and then != self.site.source else []
        return (
            [*words, f"Enthalpy datum then {datum}, now {self.settings.datum}."]
            if (datum != self.settings.datum)
            else words
        )

    def use(self, found: Refrigerant) -> None:
        """Take this refrigerant for every sheet."""
        self.refrigerant = found
        self.apply(replace(self.settings, refrigerant=found.designation))
        for pane in self.base.query(SheetPane):
            pane.read_all()
        self.head()

    # From other threads

    def _from_thread(self, callback: Any, *arguments: Any) -> None:
        # After the app has ended there is no loop, and nobody to tell.
        with suppress(RuntimeError):
            if self.event_loop is not None:
                self.event_loop.call_soon_threadsafe(partial(self.call_later, callback, *arguments))

    def _reply(self, reply: Reply) -> None:
        self.engine_word = ""
        for pane in self.base.query(SheetPane):
            if pane.check.name == reply.slot:
                pane.receive(reply)
        self.show_word()

    def _engine_says(self, word: str) -> None:
        if self.engine_word and not word:
            self.say("The property helper was started again; nothing typed is lost.", CAUTION)
        self.engine_word = word
        self.show_word()

    def trouble(self, text: str, *, first: bool = False) -> None:
        """Tell something that must be read, before all else where it answers a key; the help keeps it after that."""
        self.told = [*self.told, text][-_MOST_MESSAGES:]
        self._messages.insert(0 if first else len(self._messages), text)
        self.show_word()
