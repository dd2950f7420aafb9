"""A bare app of the screen library with the same eight inputs, a live result and the library's defaults."""

from __future__ import annotations

from textual.app import App, ComposeResult
from textual.widgets import Footer, Header, Input, Static

NAMES = ("suction pressure", "suction pipe", "liquid pressure", "liquid pipe", "discharge pressure", "discharge pipe")


class Bare(App[None]):
    """Eight fields and five lines that follow every key."""

    # Eight fields with the defaults' borders fill the window: the result would be scrolled out of sight.
    CSS = "#result { dock: top; height: 5; margin-top: 1; }"
    BINDINGS = [("f10", "quit", "leave")]

    def compose(self) -> ComposeResult:
        """Header, fields, result, footer."""
        yield Header()
        yield Static(id="result")
        for name in (*NAMES, "suction drop", "liquid drop"):
            yield Input(placeholder=name)
        yield Footer()

    def on_mount(self) -> None:
        """Start in the first field."""
        self.query(Input).first().focus()

    def on_input_changed(self) -> None:
        """Repeat what stands in the fields, as a stand-in for a result."""
        values = [field.value for field in self.query(Input)]
        self.query_one("#result", Static).update("\n".join(f"result {values[n]}" for n in range(5)))


if __name__ == "__main__":
    Bare().run()
