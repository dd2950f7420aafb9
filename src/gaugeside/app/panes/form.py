"""The form of a check's pane, as declared: what is typed, and what it is understood as."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any, cast

from textual import events, on
from textual.app import ComposeResult
from textual.containers import VerticalScroll
from textual.timer import Timer
from textual.widget import Widget
from textual.widgets import Input

from gaugeside.app.widgets.field import ChoiceField, FieldLine, TextField
from gaugeside.app.widgets.lines import CAUTION, MUTED, RULE, Line, Lines
from gaugeside.checks.sheet import Check, Entry, ReadingLine
from gaugeside.checks.typed import FieldUnits, TypedLine, first_choice, read_line, takes

if TYPE_CHECKING:
    from gaugeside.app.house import House

# Seconds after which a unit that was typed becomes the field's own although the field is not left.
_SETTLE = 0.7


class FormPane(VerticalScroll, can_focus=False):
    """The form of one check, over what it tells."""

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
        self.typed: dict[str, TypedLine] = {}
        self._before: tuple[dict[str, str], dict[str, dict[str, str]]] | None = None
        self._left = ""
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

    def has_readings(self) -> bool:
        """Whether anything is typed."""
        return any(isinstance(field, TextField) and field.value.strip() for field in self._fields())

    def put(self, texts: Mapping[str, str], units: Mapping[str, dict[str, str]] | None = None) -> None:
        """Replace what is typed; what stood there can be brought back."""
        self._before = self.texts(), self.units
        self.units = {} if units is None else dict(units)
        self._write(texts)
        self.read_all()

    def _write(self, texts: Mapping[str, str]) -> None:
        for name, line in self._lines.items():
            text = texts.get(name, "")
            if isinstance(line.field, ChoiceField):
                if text in line.field.choices:
                    line.field.value = text
            elif line.field.value != text:
                with self.prevent(Input.Changed):
                    line.field.value = text
                    line.field.cursor_position = len(text)

    def clear(self) -> None:
        """Empty every field of the form."""
        self.put({name: line.field.value for name, line in self._lines.items() if isinstance(line.field, ChoiceField)})

    def bring_back(self) -> bool:
        """Put back what stood on the form before it was replaced; return whether there was anything."""
        if self._before is None:
            return False
        self.put(*self._before)
        return True

    def write_units(self) -> None:
        """Write its unit behind every number that has none, as before the units of the house change."""
        whole = {name: typed.complete for name, typed in self.typed.items() if typed.value is not None}
        self._write({**self.texts(), **{name: text for name, text in whole.items() if text}})
        self.units = {}

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
        self.ask()

    def ask(self) -> None:
        """Ask what the readings tell; the sheet itself knows how."""

    def _show_meant(self) -> None:
        """Show only the lines that have a meaning under what the form's first line chooses."""
        chosen = first_choice(self.check, self.typed)
        for line in self.check.reading_lines():
            self._lines[line.name].display = line.meant(chosen)

    def _read(self, line: ReadingLine) -> None:
        house = self.house
        shown_line = self._lines[line.name]
        units: FieldUnits = self.units.get(line.name, {})
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
        self.ask()
        self.house.form_changed()
        if self._settle is not None:
            self._settle.stop()
        self._settle = self.set_timer(_SETTLE, self.settle)

    def settle(self) -> None:
        """Take what is typed as typed to its end."""
        self.settle_units()

    def settle_units(self) -> None:
        """Make the units that were typed the fields' own."""
        for name, typed in self.typed.items():
            if typed.value is not None and typed.units and dict(typed.units) != self.units.get(name):
                self.units[name] = dict(typed.units)

    def on_descendant_focus(self, event: events.DescendantFocus) -> None:
        """A field is entered."""
        self._left = str(event.widget.id)
