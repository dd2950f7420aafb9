"""A check's pane: its form, and its findings as they come back. It computes nothing."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from textual import events, on
from textual.timer import Timer
from textual.widgets import Input

from gaugeside.app.panes.answer_lines import answer_lines, answer_of, picture_lines, refusal_words
from gaugeside.app.panes.form import FormPane
from gaugeside.app.widgets.field import ChoiceField
from gaugeside.app.widgets.lines import CAUTION, MAIN, MUTED, RULE, Styled
from gaugeside.checks.perform import request
from gaugeside.checks.picture import DRAWN
from gaugeside.checks.sheet import Answer, Check, Entry
from gaugeside.checks.view import sentence, wrapped
from gaugeside.engine import Reply
from gaugeside.errors import Refusal
from gaugeside.keeping import headline, with_linked_entries
from gaugeside.logbook import Entry as LogbookEntry

_PICK = "Press F8 and type part of the refrigerant's name."
_NO_PICTURE = "There is nothing to draw yet; Ctrl+G brings the form back."
# Seconds after which findings of older readings are taken off the screen while an answer is awaited, and in which
# a unit may be half typed before a word is said of it.
_PATIENCE = 0.3
# Seconds after that in which a unit may still be half typed.
_HALF_TYPED = 1.7
# In the rule over the findings while a reading is half typed: to take them away and paint them again at the end of
# every unit would cost a slow line more than all else.
_BEFORE = f"-- STILL OF THE READINGS BEFORE {RULE}"
# In the same place when what is told rests on a part of the form.
_WITHOUT = f"-- WITHOUT WHAT IS NOT UNDERSTOOD {RULE}"


class SheetPane(FormPane):
    """The pane of one check.

    kept_as: the entry that holds what the sheet shows, None where there is none.
    """

    def __init__(self, check: Check, saved: Mapping[str, Any]) -> None:
        super().__init__(check, saved)
        self.answer: Answer | None = None
        self.refusal: Refusal | None = None
        self.keeps_then = False
        self.kept_as: LogbookEntry | None = None
        self._has_findings = False
        self._without_answer = ("", "")
        self._asked = 0
        self._linking = 0
        self._picture: dict[str, Any] | None = None
        self._patience: Timer | None = None

    def put(self, texts: Mapping[str, str], units: Mapping[str, dict[str, str]] | None = None) -> None:
        """Replace what is typed; what stood there can be brought back."""
        self._show([])
        super().put(texts, units)

    def on_descendant_blur(self, event: events.DescendantBlur) -> None:
        """A field is left: its unit is settled, what was said has been read."""
        self.house.word_stays = False
        self.settle_units()
        if self._rule.text == _BEFORE:
            self._show_without_answer()

    def on_descendant_focus(self, event: events.DescendantFocus) -> None:
        """A field is entered: say what belongs in it."""
        super().on_descendant_focus(event)
        if not self.house.word_stays:
            self.say_word()

    # Asking and showing

    def ask(self) -> None:
        """Ask what the readings tell; a key that comes meanwhile asks anew."""
        meant = self.meant()
        refused = [typed.refusal for typed in meant.values() if typed.refusal is not None]
        # What is being typed is what the person looks at.
        refused.sort(key=lambda refusal: not self._is_being_typed(refusal.field))
        self.answer, self.refusal = None, refused[0] if refused else None
        self.keeps_then, self.kept_as = False, None
        self._linking += 1
        house = self.house
        values = {name: typed.value for name, typed in meant.items() if typed.value is not None}
        typed_in = [name for name in values if self.check.reading_line(name).entry is not Entry.CHOICE]
        if self.refusal is not None or not typed_in or not self._has_refrigerant:
            self._asked = 0
            house.engine.forget(self.check.name)
            self._without_answer = (
                "" if typed_in or refused else self.check.summary,
                "" if self._has_refrigerant or not house.is_painted else _PICK,
            )
            if self.refusal is None or not self._is_being_typed(self.refusal.field):
                self._show_without_answer()
            else:
                if self._has_findings and not self.has_class("-picture"):
                    self._rule.say(_BEFORE, MUTED)
                self._be_patient(anew=True)
            return
        if any(isinstance(value, Mapping) and "entry" in value for value in values.values()):
            self._link(values)
        else:
            self._put_question(values)

    def _link(self, values: dict[str, Any]) -> None:
        """Look up the logbook entries that are named before the question is put."""
        self._asked = 0
        self._linking += 1
        turn = self._linking

        def found(linked: dict[str, Any]) -> None:
            if turn == self._linking:
                self._put_question(linked)

        def missing(refusal: Refusal) -> None:
            if turn == self._linking:
                self.refusal, self._without_answer = refusal, ("", "")
                self._show_without_answer()

        self.house.book.do(lambda logbook: with_linked_entries(values, logbook), found, missing)

    def _put_question(self, values: Mapping[str, Any]) -> None:
        house = self.house
        asked = request(
            self.check.name,
            house.refrigerant.designation if house.refrigerant is not None else "",
            values,
            site=house.site,
            datum=house.settings.datum,
            dress=house.dress,
            compressor=house.compressor() if self.check.name == "machine" else None,
            drawn=self.has_class("-picture"),
        )
        self._asked = house.engine.ask(self.check.name, asked)
        # Of a half-typed reading nothing is left to wait for.
        self._be_patient(anew=self._rule.text == _BEFORE)

    def _be_patient(self, *, anew: bool) -> None:
        if self._patience is not None:
            if not anew:
                return
            self._patience.stop()
        self._patience = self.set_timer(_PATIENCE, self._out_of_patience)

    @property
    def _has_refrigerant(self) -> bool:
        return self.house.refrigerant is not None or not self.check.needs_refrigerant

    def _is_being_typed(self, name: str | None) -> bool:
        focused = self.screen.focused
        return focused is not None and focused.id == name

    def _show_without_answer(self) -> None:
        rest = self._apart_from_refused()
        if rest:
            self._put_question(rest)
        else:
            self._show_nothing(*self._without_answer)
        self.say_word()

    def _apart_from_refused(self) -> dict[str, Any]:
        """Return the values of the places whose readings are all understood, where one place stands without another."""
        meant = self.meant()
        refused = {name for name, typed in meant.items() if typed.refusal is not None}
        places = [place for place in self.check.places if refused.isdisjoint(place)]
        if not refused or not self._has_refrigerant:
            return {}
        return {name: meant[name].value for place in places for name in place if meant[name].value is not None}

    def _out_of_patience(self) -> None:
        self._patience = None
        if self._asked:
            self._show_nothing(self.house.engine_word or "Working.", "")
        elif self._rule.text == _BEFORE and not self._long_refusal():
            self.say_word()
            self._patience = self.set_timer(_HALF_TYPED, self._no_longer_half_typed)
        elif self.answer is None:
            self._show_without_answer()

    def _no_longer_half_typed(self) -> None:
        self._patience = None
        if self._rule.text == _BEFORE:
            self._show_without_answer()

    def _show_nothing(self, *words: str) -> None:
        if self.has_class("-picture") and not self._asked:
            words = (_NO_PICTURE, *words[1:])
        width = self._width
        lines = [(text, MUTED) for word in words for text in wrapped(word, width)]
        self._show([*self._long_refusal(), *lines])

    def _show(self, lines: Sequence[Styled], *, has_findings: bool = False) -> None:
        self._has_findings = has_findings
        self._rule.say(RULE, MUTED)
        self._findings.show(lines, trimmed=not has_findings)

    def _long_refusal(self) -> list[Styled]:
        """Return the refusal whole where the two lines under the sheet cannot hold it."""
        lines = wrapped(refusal_words(self.check, self.refusal), self._width)
        return [(line, CAUTION) for line in lines] if len(lines) > 2 else []

    @property
    def _width(self) -> int:
        return max(16, (self.size.width or self.app.size.width) - 1)

    def receive(self, reply: Reply) -> None:
        """Take the helper's reply, unless another question has been asked since."""
        if reply.number != self._asked:
            return
        self._asked = 0
        if self._patience is not None:
            self._patience.stop()
            self._patience = None
        not_read = self.refusal
        self.answer, self.refusal = answer_of(reply)
        self.refusal = not_read or self.refusal
        self._picture = reply.picture
        self._show_answer()
        if not self.house.word_stays:
            self.say_word(settled=False)
        if self.keeps_then:
            self.keeps_then = False
            self.house.keep(self)

    def _show_answer(self) -> None:
        house, lines = self.house, list[Styled]()
        if self.answer is not None:
            if self.has_class("-picture"):
                # The field being typed in and three lines of the legend stay in sight.
                height = max(8, self.size.height - 4)
                lines = picture_lines(self._picture, house.dress, house.site, self._width + 1, height)
            else:
                lines = answer_lines(
                    self.check, self.answer, house.dress, house.site, self._width, house.stands_already()
                )
        self._show([*self._long_refusal(), *lines], has_findings=self.answer is not None)
        if self.answer is not None and self._apart_from_refused():
            self._rule.say(_WITHOUT, MUTED)

    def lay_out(self) -> None:
        """Show the answer anew, as after a change of the window's size."""
        if self.answer is not None:
            self._show_answer()

    def turn_picture(self) -> None:
        """Show the picture in place of form and numbers, or the other way round."""
        if self.check.name not in DRAWN:
            self.house.say("This sheet has no picture.")
            return
        self.toggle_class("-picture")
        self.scroll_home(animate=False)
        self.ask()

    def settle(self) -> None:
        """Take what is typed as typed to its end: its units, and what is wrong with it."""
        super().settle()
        self._findings.trim()
        if not self.house.word_stays and self.refusal is None:
            self.say_word()

    def say_word(self, *, settled: bool = True) -> None:
        """Show under the sheet what stands in the way, or what belongs in the field.

        settled: what is typed is not about to go on; half of a number would give cautions that flash by.
        """
        if not self.display:
            return
        if self.refusal is not None:
            self.house.say(refusal_words(self.check, self.refusal), CAUTION)
            return
        focused = self.screen.focused
        line = next(
            (line for line in self.check.reading_lines() if focused is not None and line.name == focused.id), None
        )
        filled = line is None or bool(self._lines[line.name].field.value.strip())
        below = self._what_stands_below(self.answer, settled) if filled and self.answer else None
        self.house.say(*(below or (f"{line.label}: {line.help}" if line is not None else "", MUTED)))

    def _what_stands_below(self, answer: Answer, settled: bool) -> Styled | None:
        """Return in one line what does not fit into the window: what is wrong, else what was asked for."""
        house, end = self.house, self.scroll_y + self.size.height
        cautions = [sentence(remark, house.dress, house.site) for remark in answer.cautions]
        urgent = [caution for caution in cautions if caution not in house.care()]
        # Counted, because what has just been shown is laid out only later.
        top = self._findings.virtual_region.y
        if settled and urgent and top + len(self._findings.texts()) > end > 0:
            return urgent[0], CAUTION
        if top >= end > 0:
            return headline(self.check, answer, house.dress, house.site), MAIN
        return None

    # Keeping

    @on(Input.Submitted)
    @on(ChoiceField.Submitted)
    def _enter(self, event: Any) -> None:
        event.stop()
        self.settle_units()
        self.keep()

    def keep(self) -> None:
        """Keep the answer in the logbook, one that is still awaited when it comes."""
        if self._asked:
            self.keeps_then = True
            self.house.say("Working; the answer is kept when it comes.")
        else:
            self.house.keep(self)
