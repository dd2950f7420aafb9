"""A check's pane: its form as declared, its findings as they come back. It computes nothing."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any, cast

from textual import events, on
from textual.app import ComposeResult
from textual.containers import VerticalScroll
from textual.timer import Timer
from textual.widget import Widget
from textual.widgets import Input

from gaugeside.app.panes.answer_lines import answer_lines, answer_of, picture_lines, refusal_words
from gaugeside.app.widgets.field import ChoiceField, FieldLine, TextField
from gaugeside.app.widgets.lines import CAUTION, MAIN, MUTED, RULE, Line, Lines, Styled
from gaugeside.checks.perform import request
from gaugeside.checks.picture import DRAWN
from gaugeside.checks.sheet import Answer, Check, Entry, ReadingLine
from gaugeside.checks.typed import TypedLine, first_choice, read_line, takes
from gaugeside.checks.view import wrapped
from gaugeside.engine import Reply
from gaugeside.errors import Refusal
from gaugeside.keeping import headline, with_linked_entries

if TYPE_CHECKING:
    from gaugeside.app.house import House

_PICK = "Press F8 and type part of the refrigerant's name."
# Seconds after which a unit that was typed becomes the field's own although the field is not left.
_SETTLE = 0.7
# Seconds after which findings of older readings are taken off the screen while an answer is awaited or a unit is
# half typed; at once would paint the sheet twice for every unit.
_PATIENCE = 0.3
# Seconds after that in which a unit may still be half typed.
_HALF_TYPED = 1.7
# In the rule over the findings while a reading is half typed: to take them away and paint them again at the end of
# every unit would cost a slow line more than all else.
_BEFORE = f"-- STILL OF THE READINGS BEFORE {RULE}"


class SheetPane(VerticalScroll, can_focus=False):
    """The pane of one check."""

    def __init__(self, check: Check, saved: Mapping[str, Any]) -> None:
        super().__init__(id=f"pane-{check.name}", classes="pane")
        self.check = check
        texts, units = saved.get("texts"), saved.get("units")
        self._texts: dict[str, str] = {
            line.name: str(texts.get(line.name, ""))[:200] if isinstance(texts, dict) else ""
            for line in check.reading_lines()
        }
        self.units: dict[str, dict[str, str]] = {}
        if isinstance(units, dict):
            for name, known in units.items():
                if isinstance(known, dict):
                    self.units[str(name)] = {str(kind): str(label) for kind, label in known.items()}
        self._lines: dict[str, FieldLine] = {}
        self._rule = Line(RULE, MUTED, classes="rule")
        self._findings = Lines(id="findings")
        self._has_findings = False
        self.typed: dict[str, TypedLine] = {}
        self.answer: Answer | None = None
        self.refusal: Refusal | None = None
        self._left = ""
        self._without_answer = ("", "")
        self._asked = 0
        self._linking = 0
        self.keeps_then = False
        self._picture: dict[str, Any] | None = None
        self._patience: Timer | None = None
        self._settle: Timer | None = None

    @property
    def house(self) -> House:
        """The app, by its own type."""
        return cast("House", self.app)

    def compose(self) -> ComposeResult:
        """Column heads, the form, a rule, the findings."""
        yield Line(f"{'reading':<20}{'as typed':<21}understood", MUTED)
        for line in self.check.reading_lines():
            text = self._texts[line.name]
            field: TextField | ChoiceField
            if line.entry is Entry.CHOICE:
                field = ChoiceField(line.choices, text, id=line.name)
            else:
                field = TextField(text, id=line.name)
            self._lines[line.name] = FieldLine(line.name, line.label, field)
            yield self._lines[line.name]
        yield self._rule
        yield self._findings

    def on_mount(self) -> None:
        """Read what was saved; a number not before the first frame, which would wait for the unit library."""
        if self.house.is_painted or not any(isinstance(f, TextField) and f.value for f in self._fields()):
            self.read_all()
            return
        for line in self.check.reading_lines():
            if not self._texts[line.name] or line.entry is Entry.CHOICE:
                self._read(line)
        self._show_meant()

    def _fields(self) -> list[TextField | ChoiceField]:
        return [line.field for line in self._lines.values()]

    def meant(self) -> dict[str, TypedLine]:
        """Return the lines that are shown, as read."""
        return {name: typed for name, typed in self.typed.items() if self._lines[name].display}

    def texts(self) -> dict[str, str]:
        """Return what is typed, by reading."""
        return {name: line.field.value for name, line in self._lines.items()} if self._lines else self._texts

    def put(self, texts: Mapping[str, str]) -> None:
        """Replace what is typed."""
        for name, line in self._lines.items():
            text = texts.get(name, "")
            if isinstance(line.field, ChoiceField):
                if text in line.field.choices:
                    line.field.value = text
            else:
                with self.prevent(Input.Changed):
                    line.field.value = text
                    line.field.cursor_position = len(text)
            self.units.pop(name, None)
        self._show([])
        self.read_all()

    def clear(self) -> None:
        """Empty every field of the form."""
        self.put({name: line.field.value for name, line in self._lines.items() if isinstance(line.field, ChoiceField)})

    def first_field(self) -> Widget:
        """The field the cursor was left in, or the first that is typed in."""
        line = self._lines.get(self._left)
        return self.top_field() if line is None else line.field

    def top_field(self) -> Widget:
        """The first field that is typed in."""
        return next(field for field in self._fields() if isinstance(field, TextField))

    # Reading

    def read_all(self) -> None:
        """Read every line again, as after a change of site, units or refrigerant."""
        if not self._lines:
            # Not composed yet: it reads itself when it is.
            return
        for line in self.check.reading_lines():
            self._read(line)
        self._show_meant()
        self._ask()

    def _show_meant(self) -> None:
        """Show only the lines that have a meaning under what the form's first line chooses."""
        chosen = first_choice(self.check, self.typed)
        for line in self.check.reading_lines():
            self._lines[line.name].display = line.meant(chosen)

    def _read(self, line: ReadingLine) -> None:
        house = self.house
        shown_line = self._lines[line.name]
        units = self.units.get(line.name, {})
        typed = read_line(line, shown_line.field.value, units, house.dress, house.site)
        self.typed[line.name] = typed
        if isinstance(shown_line.field, TextField):
            placeholder = takes(line, units, house.dress)
            if shown_line.field.placeholder != placeholder:
                shown_line.field.placeholder = placeholder
        first, second = typed.understood
        if typed.refusal is not None:
            shown_line.understood.say("? not understood, see below", CAUTION)
        else:
            shown_line.understood.say(f"{first:<18} {second}".rstrip() if second else first)

    @on(Input.Changed)
    def _typed_in(self, event: Input.Changed) -> None:
        event.stop()
        self._changed(str(event.input.id))

    @on(ChoiceField.Changed)
    def _chosen(self, event: ChoiceField.Changed) -> None:
        event.stop()
        self._changed(str(event.field.id))

    def _changed(self, name: str) -> None:
        line = self.check.reading_line(name)
        self._read(line)
        if line == self.check.reading_lines()[0]:
            self._show_meant()
        self._ask()
        self.house.form_changed()
        if self._settle is not None:
            self._settle.stop()
        self._settle = self.set_timer(_SETTLE, self.settle_units)

    def settle_units(self) -> None:
        """Make the units that were typed the fields' own."""
        for name, typed in self.typed.items():
            if typed.value is not None and typed.units and dict(typed.units) != self.units.get(name):
                self.units[name] = dict(typed.units)

    def on_descendant_blur(self, event: events.DescendantBlur) -> None:
        """A field is left: its unit is settled, what was said has been read."""
        self.house.word_stays = False
        self.settle_units()
        if self._rule.text == _BEFORE:
            self._show_without_answer()

    def on_descendant_focus(self, event: events.DescendantFocus) -> None:
        """A field is entered: say what belongs in it."""
        self._left = str(event.widget.id)
        if not self.house.word_stays:
            self.say_word()

    # Asking and showing

    def _ask(self) -> None:
        meant = self.meant()
        refused = [typed.refusal for typed in meant.values() if typed.refusal is not None]
        self.answer, self.refusal = None, refused[0] if refused else None
        self.keeps_then = False
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
                if self._patience is None:
                    self._patience = self.set_timer(_PATIENCE, self._out_of_patience)
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
        if self._patience is None:
            self._patience = self.set_timer(_PATIENCE, self._out_of_patience)

    @property
    def _has_refrigerant(self) -> bool:
        return self.house.refrigerant is not None or not self.check.needs_refrigerant

    def _is_being_typed(self, name: str | None) -> bool:
        focused = self.screen.focused
        return focused is not None and focused.id == name

    def _show_without_answer(self) -> None:
        self._show_nothing(*self._without_answer)
        self.say_word()

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
        width = self._width
        lines = [(text, MUTED) for word in words for text in wrapped(word, width)]
        self._show([*self._long_refusal(), *lines])

    def _show(self, lines: Sequence[Styled], *, has_findings: bool = False) -> None:
        self._has_findings = has_findings
        self._rule.say(RULE, MUTED)
        self._findings.show(lines)

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
        self.answer, self.refusal = answer_of(reply)
        self._picture = reply.picture
        self._show_answer()
        if not self.house.word_stays:
            self.say_word()
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
        self._ask()

    def say_word(self) -> None:
        """Show under the sheet what stands in the way, or what belongs in the field."""
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
        if filled and self.answer is not None and self._findings_out_of_sight():
            self.house.say(headline(self.check, self.answer, self.house.dress, self.house.site), MAIN)
        else:
            self.house.say(f"{line.label}: {line.help}" if line is not None else "", MUTED)

    def _findings_out_of_sight(self) -> bool:
        """Whether the form is so long that what it tells stands below the window."""
        return self._findings.virtual_region.y >= self.scroll_y + self.size.height > 0

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
