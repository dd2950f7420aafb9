"""Lines of text that repaint only where they change: over a slow link every byte counts."""

from __future__ import annotations

from collections.abc import Sequence

from textual.app import ComposeResult
from textual.containers import Vertical
from textual.content import Content
from textual.geometry import Size
from textual.reactive import Reactive
from textual.screen import Screen
from textual.widget import Widget
from textual.widgets import Static

from gaugeside.app.charset import is_ascii, shown_text

# Text and its style, a style such as "bold $accent".
Styled = tuple[str, str]
MAIN, MUTED, CAUTION, REFUSED = "bold $accent", "$text-muted", "bold $warning", "bold $error"

RULE = "-" * 300


class QuietScreen(Screen[None]):
    """A screen that does not repaint itself whole when the focus moves."""

    focused: Reactive[Widget | None] = Reactive(None, repaint=False)


class Line(Static):
    """One line of text; setting the same text again costs nothing."""

    DEFAULT_CSS = "Line { height: 1; width: 1fr; text-wrap: nowrap; text-overflow: ellipsis; }"

    def __init__(self, text: str = "", style: str = "", *, id: str | None = None, classes: str | None = None) -> None:
        super().__init__("", markup=False, id=id, classes=classes)
        if is_ascii():
            # The ellipsis is no ASCII character.
            self.styles.text_overflow = "clip"
        self.text = ""
        self._style = ""
        if text:
            self.say(text, style)

    def say(self, text: str, style: str = "") -> None:
        """Show `text`, in ASCII where the terminal has no more."""
        if (text, style) == (self.text, self._style):
            return
        self.text, self._style = text, style
        plain = shown_text(text)
        self.update(Content.styled(plain, style) if style else Content(plain), layout=False)


class Lines(Vertical):
    """Any number of lines; a line that did not change is not painted again."""

    DEFAULT_CSS = "Lines { height: auto; width: 1fr; }"
    # Nothing scrolls in here: a line more or less needs one layout, not a second for this.
    virtual_size: Reactive[Size] = Reactive(Size(0, 0))

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self._lines: list[Line] = []
        self._composed = False
        self._used = 0

    def compose(self) -> ComposeResult:
        """The lines that were asked for before there was a place for them."""
        self._composed = True
        yield from self._lines

    def show(self, lines: Sequence[Styled], *, trimmed: bool = True) -> None:
        """Show these (text, style) lines.

        trimmed: lines that are too many go away; else they stay as blanks until `trim`, which spares a new layout of
        the screen where the next key may need them again.
        """
        for line, (text, style) in zip(self._lines, lines, strict=False):
            line.say(text, style)
            line.display = True
        for line in self._lines[len(lines) :]:
            line.say("")
        self._used = len(lines)
        if trimmed:
            self.trim()
        fresh = [Line(text, style) for text, style in lines[len(self._lines) :]]
        self._lines += fresh
        if fresh and self._composed:
            self.mount(*fresh)

    def trim(self) -> None:
        """Take the blanks away that are left of earlier lines."""
        for line in self._lines[self._used :]:
            line.display = False

    def texts(self) -> list[str]:
        """Return the lines that are shown."""
        return [line.text for line in self._lines[: self._used]]
