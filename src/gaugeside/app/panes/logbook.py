"""The logbook's pane: what was kept, newest first; filter, open, change tag and note, delete, take back."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, cast

from textual import on
from textual.app import ComposeResult
from textual.binding import Binding
from textual.containers import VerticalScroll
from textual.widget import Widget
from textual.widgets import Input

from gaugeside.app.frame import WIDE
from gaugeside.app.widgets.dialogs import IntoFile
from gaugeside.app.widgets.field import FieldLine, TextField
from gaugeside.app.widgets.lines import CAUTION, MUTED, RULE, Line, Lines, Styled
from gaugeside.checks.view import wrapped
from gaugeside.errors import Refusal
from gaugeside.logbook import Entry

if TYPE_CHECKING:
    from gaugeside.app.house import House

_MOST = 500


class FilterField(TextField):
    """The filter; the arrows move through the entries instead."""

    BINDINGS = [
        Binding("up", "pane_move(-1)", priority=True),
        Binding("down", "pane_move(1)", priority=True),
    ]

    def action_pane_move(self, by: int) -> None:
        """Select another entry."""
        self.screen.query_one(LogbookPane).move(by)


class LogbookPane(VerticalScroll, can_focus=False):
    """The pane of the logbook."""

    def __init__(self) -> None:
        super().__init__(id="pane-logbook", classes="pane")
        self._filter = FieldLine("filter", "show entries with", FilterField(id="filter"))
        # Made here and not when they are shown: what was read may arrive first.
        self._list, self._chosen = Lines(id="entries"), Lines(id="entry")
        self.entries: list[Entry] = []
        self._selected = 0
        self._top = 0
        self._deleted: list[Entry] = []

    @property
    def house(self) -> House:
        """The app, by its own type."""
        return cast("House", self.app)

    def compose(self) -> ComposeResult:
        """Filter, list, the entry selected."""
        yield Line(f"{'':<20}{'as typed':<21}words, all of which must occur", MUTED)
        yield self._filter
        yield Line(RULE, MUTED, classes="rule")
        yield self._list
        yield Line(RULE, MUTED, classes="rule")
        yield self._chosen

    def on_mount(self) -> None:
        """Read the logbook."""
        self.reload()

    def first_field(self) -> Widget:
        """The field the cursor starts in."""
        return self._filter.field

    @property
    def filter_text(self) -> str:
        """What the list is filtered by."""
        return self._filter.field.value

    @property
    def selected(self) -> Entry | None:
        """The entry the cursor is on."""
        return self.entries[self._selected] if self.entries else None

    def reload(self, number: int | None = None) -> None:
        """Read the entries again and put the cursor on entry `number`, or leave it where it was."""
        words = self.filter_text
        self.house.book.do(
            lambda logbook: logbook.entries(words, limit=_MOST),
            lambda entries: self._take(entries, number),
            self._refused,
        )

    def _refused(self, refusal: Refusal) -> None:
        self.house.say(refusal.sentence(), CAUTION)

    def _take(self, entries: list[Entry], number: int | None) -> None:
        self.entries = entries
        if number is not None:
            self._selected = next((i for i, entry in enumerate(self.entries) if entry.number == number), 0)
        self._selected = min(self._selected, max(0, len(self.entries) - 1))
        self._show()

    def move(self, by: int) -> None:
        """Select the entry `by` lines further down."""
        self.house.book.after(lambda: self._move(by))

    def _move(self, by: int) -> None:
        self._selected = min(max(0, self._selected + by), max(0, len(self.entries) - 1))
        self._show()

    def _rows(self) -> int:
        return max(3, (self.size.height or 18) - 9)

    def _show(self) -> None:
        rows = self._rows()
        self._top = min(max(self._top, self._selected - rows + 1), self._selected)
        lines: list[Styled] = []
        wide = (self.size.width or self.app.size.width) >= WIDE
        for place, entry in enumerate(self.entries[self._top : self._top + rows], self._top):
            when = entry.kept_at.astimezone().strftime("%m-%d %H:%M")
            mark = ">" if place == self._selected else " "
            tag = entry.tag or "-"
            machine = f"{tag if len(tag) <= 12 else f'{tag[:10]}..':<12}  " if wide else ""
            what = f"{mark} {when}  {entry.refrigerant:<10}  {machine}{entry.headline}"
            lines.append((what, "reverse" if place == self._selected else ""))
        self._understood()
        self._list.show(lines)
        self._chosen.show(self._details())

    def _understood(self) -> None:
        count = f"{len(self.entries)} shown" if self.entries else "none"
        self._filter.understood.say(count + ("; newest 500" if len(self.entries) == _MOST else ""))

    def _details(self) -> list[Styled]:
        entry = self.selected
        if entry is None:
            words = (
                "No entry holds these words." if self.filter_text else "Nothing kept yet: Enter on a sheet keeps it."
            )
            return self._wrapped(words, MUTED)
        readings = "; ".join(f"{name.replace('_', ' ')} {text}" for name, text in entry.readings.items())
        kept = entry.kept_at.astimezone().strftime("%Y-%m-%d %H:%M:%S")
        return [
            *self._wrapped(f"entry {entry.number}, {kept}, {entry.check}, site {entry.options.get('site', '')}", MUTED),
            *self._wrapped(f"machine: {entry.tag}" if entry.tag else "", ""),
            *self._wrapped(readings, ""),
            *self._wrapped(f"note: {entry.note}" if entry.note else "", ""),
            *self._wrapped(entry.headline, ""),
            *(line for text in entry.cautions for line in self._wrapped(text, CAUTION)),
        ]

    def _wrapped(self, text: str, style: str) -> list[Styled]:
        width = max(16, (self.size.width or self.app.size.width) - 1)
        return [(line, style) for line in wrapped(text, width, "  ")]

    @on(Input.Changed)
    def _filtered(self, event: Input.Changed) -> None:
        event.stop()
        self._selected = 0
        self.reload()

    @on(Input.Submitted)
    def _open(self, event: Input.Submitted) -> None:
        event.stop()
        self.house.book.after(self._open_selected)

    def _open_selected(self) -> None:
        if self.selected is not None:
            self.house.call_later(self.house.open_entry, self.selected)

    def delete(self) -> None:
        """Delete the entry selected; it can be brought back until the program ends."""
        self.house.book.after(self._delete)

    def _delete(self) -> None:
        number = self.selected.number if self.selected is not None else None
        if number is None:
            self.house.say("There is no entry to delete.")
            return
        self.house.book.do(lambda logbook: logbook.delete(number), self._is_deleted, self._refused)

    def _is_deleted(self, entry: Entry) -> None:
        self._deleted.append(entry)
        self.house.forget_kept(entry.number)
        self.reload()
        self.house.say(f"Entry {entry.number} is deleted; Ctrl+Z brings it back.")

    def undo(self) -> None:
        """Bring back what was deleted last."""
        self.house.book.after(self._undo)

    def _undo(self) -> None:
        if not self._deleted:
            self.house.say("Nothing was deleted since the start.")
            return
        entry = self._deleted.pop()

        def is_back(_: None) -> None:
            self.reload(entry.number)
            self.house.say(f"Entry {entry.number} is back.")

        def is_not_back(refusal: Refusal) -> None:
            self._deleted.append(entry)
            self._refused(refusal)

        self.house.book.do(lambda logbook: logbook.restore(entry), is_back, is_not_back)

    def into_file(self) -> tuple[str, str, Callable[[str, IntoFile], None]]:
        """Return what the dialog for a file needs: title, a name to start from, what writes."""
        # Imported here: the first frame need not wait for what is seldom asked for.
        from gaugeside.logbook.outgoing import write_file

        words = self.filter_text.strip()
        title = f"Write the entries with {words!r} into a file" if words else "Write the whole logbook into a file"
        name = f"~/gaugeside-{datetime.now():%Y-%m-%d}.csv"

        def write(typed: str, dialog: IntoFile) -> None:
            suffix = Path(typed).suffix.casefold()
            instead = f"{typed.removesuffix(Path(typed).suffix)}.csv" if Path(typed).name else name
            if suffix not in (".csv", ".json"):
                dialog.refuse(
                    Refusal("The name must end in .csv or .json, which says what is written.", f"Type {instead}.")
                )
                return

            def is_written(path: Path) -> None:
                if dialog.is_attached:
                    dialog.dismiss(None)
                self.house.say(f"Written: {path}")

            self.house.book.do(
                lambda logbook: write_file(
                    logbook, words, typed, as_csv=suffix == ".csv", replace=False, hint="Name another file."
                ),
                is_written,
                lambda refusal: dialog.refuse(refusal) if dialog.is_attached else self._refused(refusal),
            )

        return title, name, write

    def change(self, tag: str, note: str) -> None:
        """Give the entry selected another tag and note."""
        number = self.selected.number if self.selected is not None else None
        if number is not None:
            self.house.book.do(
                lambda logbook: logbook.change(number, tag=tag, note=note),
                lambda entry: self.reload(entry.number),
                self._refused,
            )
