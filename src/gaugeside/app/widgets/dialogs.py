"""What lies over a pane for a moment: picking a refrigerant, the menu, help, machine and note.

Each closes with its own keys and never needs Escape: over a slow link a lone Escape is slow and easily lost.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from textual import events, on
from textual.app import ComposeResult
from textual.binding import Binding
from textual.containers import Vertical, VerticalScroll
from textual.reactive import Reactive
from textual.screen import ModalScreen
from textual.widget import Widget
from textual.widgets import Input

from gaugeside.app.widgets.field import FieldLine, TextField
from gaugeside.app.widgets.lines import CAUTION, MAIN, MUTED, Line, Lines, Styled
from gaugeside.checks.view import wrapped
from gaugeside.errors import Refusal
from gaugeside.logbook.entry import LONGEST_NAME
from gaugeside.refrigerants import Refrigerant, search

_ROWS = 14


class Dialog(ModalScreen[Any]):
    """A quiet screen over the pane."""

    focused: Reactive[Widget | None] = Reactive(None, repaint=False)
    DEFAULT_CSS = """
    Dialog { align: center top; background: $background; }
    Dialog > VerticalScroll { scrollbar-size: 0 0; }
    Dialog > Vertical, Dialog > VerticalScroll { width: 80; max-width: 100%; height: auto; max-height: 100%; }
    """
    BINDINGS = [Binding("escape", "leave", priority=True)]

    def first_field(self) -> Widget | None:
        """What the keys go to first; None for the dialog itself."""
        return None

    @on(TextField.NotTaken)
    def _not_taken(self, event: TextField.NotTaken) -> None:
        event.stop()
        self.query_one(".word", Line).say(event.words, CAUTION)

    def action_leave(self) -> None:
        """Close without an answer."""
        self.dismiss(None)


def refrigerant_words(r: Refrigerant) -> str:
    """Return one line about a refrigerant for the list."""
    gwp = "GWP -" if r.gwp is None else f"GWP {r.gwp:.0f}"
    mass = " ".join(f"{name.removeprefix('R-')} {100 * part:.4g}" for name, part in r.composition)
    what = ", ".join(r.names) if len(r.composition) < 2 else f"{mass} %"
    tail = what if r.modelled else f"NOT MODELLED  {what}"
    return f"{r.designation:<12}{r.safety_class or '-':<5}{r.nature:<10}{gwp:<10}{tail}"[:78]


class PickField(TextField):
    """The typed part of a name; the arrows move through the matches instead."""

    BINDINGS = [Binding("up", "screen.move(-1)", priority=True), Binding("down", "screen.move(1)", priority=True)]


class RefrigerantPicker(Dialog):
    """Type part of a designation, a name or a component; Enter takes the line with the mark."""

    def __init__(self, typed: str = "") -> None:
        super().__init__()
        self._field = FieldLine("pick", "refrigerant", PickField(typed, id="pick", placeholder="part of its name"))
        self._found: list[Refrigerant] = []
        self._selected = 0
        self._top = 0

    def compose(self) -> ComposeResult:
        """Field, matches, keys."""
        with Vertical():
            yield Line("Pick the refrigerant: type part of its designation, name or component", MUTED)
            yield self._field
            yield Lines(id="matches")
            yield Line("")
            yield Line(id="pick-word", classes="word")
            yield Line("Up Down move   Enter takes the marked line   F8 back without a change", MUTED)

    def on_mount(self) -> None:
        """Show all of them."""
        self._search()

    def first_field(self) -> Widget:
        """The typed part of a name."""
        return self._field.field

    @on(Input.Changed)
    def _typed(self, event: Input.Changed) -> None:
        event.stop()
        self._search()

    def _search(self) -> None:
        self._found = search(self._field.field.value)
        self._selected = self._top = 0
        self._show()

    def action_move(self, by: int) -> None:
        """Mark another match."""
        self._selected = min(max(0, self._selected + by), max(0, len(self._found) - 1))
        self._show()

    def _show(self) -> None:
        self._top = min(max(self._top, self._selected - _ROWS + 1), self._selected)
        lines: list[Styled] = []
        for place, found in enumerate(self._found[self._top : self._top + _ROWS], self._top):
            marked = place == self._selected
            lines.append((f"{'>' if marked else ' '} {refrigerant_words(found)}", "reverse" if marked else ""))
        self.query_one("#matches", Lines).show(lines)
        count = len(self._found)
        self._field.understood.say(f"{count} match{'es' if count > 1 else ''}" if count else "none; see the line below")
        word = "" if self._found else "No refrigerant of the catalogue has this in its name, names or components."
        self.query_one("#pick-word", Line).say(word, CAUTION)

    @on(Input.Submitted)
    def _take(self, event: Input.Submitted) -> None:
        event.stop()
        if not self._found:
            return
        found = self._found[self._selected]
        if not found.modelled:
            self.query_one("#pick-word", Line).say(f"{found.designation}: {found.reason}", CAUTION)
            return
        self.dismiss(found)


class Menu(Dialog):
    """Every action under a letter, for terminals that lose function keys."""

    def __init__(self, items: Sequence[tuple[str, str, str]]) -> None:
        super().__init__()
        self._items = items

    def compose(self) -> ComposeResult:
        """One line an action."""
        with Vertical():
            yield Line("Press the letter or digit. Ctrl+O or Enter goes back.", MUTED)
            for letter, label, _ in self._items:
                yield Line(f"  {letter}  {label}")

    def on_key(self, event: events.Key) -> None:
        """Answer with the action of the letter."""
        event.stop()
        if event.key == "enter":
            self.dismiss(None)
            return
        for letter, _, action in self._items:
            if event.character is not None and event.character.casefold() == letter:
                self.dismiss(action)
                return


class Help(Dialog):
    """What each field accepts, and the keys."""

    BINDINGS = [
        Binding("enter,space", "leave", priority=True),
        Binding("down", "scroll(1)"),
        Binding("up", "scroll(-1)"),
        Binding("pagedown", "scroll(18)"),
        Binding("pageup", "scroll(-18)"),
    ]

    def __init__(self, lines: Sequence[Styled]) -> None:
        super().__init__()
        self._text = lines

    def compose(self) -> ComposeResult:
        """The lines, scrolled by the arrows."""
        with VerticalScroll(id="help"):
            for text, style in self._text:
                yield Line(text, style)

    def action_scroll(self, by: int) -> None:
        """Scroll by some lines."""
        self.query_one("#help").scroll_relative(y=by, animate=False)


class MachineAndNote(Dialog):
    """Which machine the readings are of, and a note; Enter on the note takes both."""

    DEFAULT_CSS = "MachineAndNote TextField { width: 1fr; } MachineAndNote .understood { width: 0; padding: 0; }"

    def __init__(self, title: str, tag: str, note: str) -> None:
        super().__init__()
        self._title = title
        self._tag = FieldLine("tag", "machine", TextField(tag, id="tag", placeholder="rack 2", longest=LONGEST_NAME))
        self._note = FieldLine("note", "note", TextField(note, id="note"))

    def compose(self) -> ComposeResult:
        """Two fields."""
        with Vertical():
            yield Line(self._title, MAIN)
            yield self._tag
            yield self._note
            yield Line(classes="word")
            yield Line("Enter goes on to the note, then takes both   F9 back without a change", MUTED)

    def first_field(self) -> Widget:
        """The machine."""
        return self._tag.field

    @on(Input.Changed)
    def _typed(self, event: Input.Changed) -> None:
        event.stop()
        self.query_one(".word", Line).say("")

    @on(Input.Submitted)
    def _take(self, event: Input.Submitted) -> None:
        event.stop()
        if event.input.id == "tag":
            self._note.field.focus()
            return
        self.dismiss((self._tag.field.value.strip(), self._note.field.value.strip()))


class IntoFile(Dialog):
    """The name of a file to write the logbook into; it closes once that is done, and says why where it is not."""

    DEFAULT_CSS = "IntoFile TextField { width: 1fr; } IntoFile .understood { width: 0; padding: 0; }"

    def __init__(self, title: str, name: str, write: Callable[[str, IntoFile], None]) -> None:
        super().__init__()
        self._title, self._put = title, write
        self._file = FieldLine("file", "file", TextField(name, id="file"))
        self._why = Lines(id="why")

    def compose(self) -> ComposeResult:
        """The field, what names mean, why it did not work."""
        with Vertical():
            yield Line(self._title, MAIN)
            yield self._file
            yield Line("A name ending in .csv is a table, one in .json what another logbook takes in.", MUTED)
            yield Line("Enter writes   Ctrl+U clears the name   Ctrl+O back without a change", MUTED)
            yield self._why

    def first_field(self) -> Widget:
        """The name."""
        return self._file.field

    @on(Input.Submitted)
    def _take(self, event: Input.Submitted) -> None:
        event.stop()
        self._why.show([("Writing.", MUTED)])
        self._put(self._file.field.value.strip(), self)

    def refuse(self, refusal: Refusal) -> None:
        """Say why the file is not written; the name stays."""
        self._why.show([(line, CAUTION) for line in wrapped(refusal.sentence(), max(16, self.size.width - 1))])
