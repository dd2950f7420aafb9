"""One line of a form: label, what is typed, what was understood."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from textual import events
from textual.app import ComposeResult
from textual.containers import Horizontal
from textual.geometry import Size
from textual.message import Message
from textual.reactive import Reactive
from textual.widget import Widget
from textual.widgets import Input, Static

from gaugeside.app.charset import shown_text, typed_text
from gaugeside.app.widgets.lines import Line

LONGEST_TYPED = 200


def move_focus(field: Widget, by: int) -> None:
    """Go from a field to the next; what stands there is selected, so that the next round's reading replaces it."""
    found = field.screen.focus_next() if by > 0 else field.screen.focus_previous()
    if isinstance(found, TextField):
        found.select_all()


class TextField(Input):
    """The typed part of a line; its value is kept as typed."""

    BINDINGS = [("up,shift+tab", "move(-1)"), ("down,tab", "move(1)")]
    # Follows every key; as the library declares it the whole screen is laid out anew each time.
    virtual_size: Reactive[Size] = Reactive(Size(0, 0))

    @dataclass
    class NotTaken(Message):
        """Posted when something typed or pasted is left out."""

        words: str

    def __init__(
        self, value: str = "", *, id: str | None = None, placeholder: str = "", longest: int = LONGEST_TYPED
    ) -> None:
        super().__init__(
            value,
            id=id,
            placeholder=shown_text(placeholder),
            compact=True,
            select_on_focus=False,
            max_length=longest,
        )
        self.cursor_blink = False

    def action_move(self, by: int) -> None:
        """Go to the field before or behind, ready to be typed over."""
        move_focus(self, by)

    def replace(self, text: str, start: int, end: int) -> None:
        """Replace a part of what stands here; what makes it longer than a field takes is left out whole, and said."""
        first, last = sorted((max(0, start), min(len(self.value), end)))
        length = len(self.value) - (last - first) + len(text)
        if self.max_length and length > self.max_length:
            words = f"Not taken: {length} characters, and this field holds {self.max_length}; it stays as it was."
            self.post_message(self.NotTaken(words))
            return
        super().replace(text, start, end)

    def _on_paste(self, event: events.Paste) -> None:
        event.stop()
        event.prevent_default()
        lines = [line for line in event.text.splitlines() if line.strip()]
        if lines:
            self.replace(lines[0], *self.selection)
        if len(lines) > 1:
            self.post_message(self.NotTaken(f"Only the first of the {len(lines)} lines pasted goes into a field."))

    def validate_value(self, value: str) -> str:
        """Let no character in that a terminal would obey, however it came: pasted, from a draft, a logbook."""
        return typed_text(value)


class ChoiceField(Static, can_focus=True):
    """One of a few words: Left and Right, Space, or the first letter of a word change it."""

    BINDINGS = [
        ("up,shift+tab", "move(-1)"),
        ("down,tab", "move(1)"),
        ("left", "step(-1)"),
        ("right,space", "step(1)"),
        ("enter", "submit"),
    ]

    @dataclass
    class Changed(Message):
        """Posted when another word is chosen."""

        field: ChoiceField
        value: str

        @property
        def control(self) -> ChoiceField:
            """The field, for `on` selectors."""
            return self.field

    @dataclass
    class Submitted(Message):
        """Posted on Enter."""

        field: ChoiceField

    def __init__(self, choices: Sequence[str], value: str, *, id: str | None = None) -> None:
        super().__init__("", id=id, markup=False)
        self.choices = tuple(choices)
        self._value = ""
        self.value = value if value in self.choices else self.choices[0]

    @property
    def value(self) -> str:
        """The word that is chosen."""
        return self._value

    @value.setter
    def value(self, value: str) -> None:
        self._value = value
        self.update(shown_text(f"< {value} >"), layout=False)

    def action_move(self, by: int) -> None:
        """Go to the field before or behind."""
        move_focus(self, by)

    def action_step(self, by: int) -> None:
        """Choose the next or the previous word."""
        self._choose(self.choices[(self.choices.index(self._value) + by) % len(self.choices)])

    def action_submit(self) -> None:
        """Pass Enter on."""
        self.post_message(self.Submitted(self))

    def on_key(self, event: events.Key) -> None:
        """Choose the next word that starts with the letter typed."""
        letter = (event.character or "").casefold()
        if not letter.isalnum():
            return
        event.stop()
        place = self.choices.index(self._value)
        order = [*self.choices[place + 1 :], *self.choices[: place + 1]]
        found = next((choice for choice in order if choice.casefold().startswith(letter)), None)
        if found is not None:
            self._choose(found)

    def _choose(self, value: str) -> None:
        if value != self._value:
            self.value = value
            self.post_message(self.Changed(self, value))


class FieldLine(Horizontal):
    """Label, field and what was understood, on one line; two on a narrow screen."""

    DEFAULT_CSS = """
    FieldLine { height: 1; width: 1fr; }
    FieldLine > .label { width: 20; }
    FieldLine > TextField, FieldLine > ChoiceField { width: 20; height: 1; }
    FieldLine > .understood { width: 1fr; padding-left: 1; }
    """

    def __init__(self, name: str, label: str, field: TextField | ChoiceField) -> None:
        super().__init__(id=f"line-{name}")
        self.reading = name
        self.field = field
        self._label = Line(label, classes="label")
        self.understood = Line(classes="understood")

    def compose(self) -> ComposeResult:
        """Label, field, understood."""
        yield self._label
        yield self.field
        yield self.understood
