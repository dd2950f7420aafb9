"""The terminal as the program reads and writes it, where the screen library's own way is not safe enough."""

from __future__ import annotations

import codecs
import curses
import os
import select
from contextlib import suppress
from typing import Any

from textual._xterm_parser import XTermParser
from textual.drivers.linux_driver import LinuxDriver

from gaugeside.app.cells import Cells
from gaugeside.app.charset import ascii_cells, first_environ, keyboard_encoding

# Reports of the window's focus would cost a paint each, and the two questions come back as keys in a terminal that
# does not know them.
_NOT_SENT = frozenset({"\x1b[?1004h", "\x1b[?1004l", "\x1b[?2026$p", "\x1b[?2048$p"})
# The shape of the mouse's pointer, which old terminals print.
_POINTER = "\x1b]22;"
_OTHER_SCREEN, _CLEAR = "\x1b[?1049h", "\x1b[H\x1b[2J"
_WAIT = 0.1
# Seconds after a change of the window's size until it is painted whole, by when the change has been taken in.
_RESIZED = 0.15


def erases_in_colour() -> bool:
    """Whether this terminal erases with the ground set last; no where that is not known."""
    with suppress(curses.error):
        curses.setupterm()
        return bool(curses.tigetflag("bce") > 0)
    return False


class TerminalDriver(LinuxDriver):
    """Reads any bytes without a fault, ends at the end of the input, sends only what changes, in ASCII if need be."""

    def __init__(self, *arguments: Any, **options: Any) -> None:
        self._cells = Cells(erases_in_colour())
        self._has_screen = False
        super().__init__(*arguments, **options)

    def repaint(self) -> None:
        """Send everything with the next paint, whatever stands on the screen."""
        self._cells.forget()

    def _get_terminal_size(self) -> tuple[int, int]:
        # Asked for when the window changes: what it then shows of its old content is the terminal's own affair, and
        # a paint for the old size may still be under way. One that comes back to its size is painted anew all the same.
        self._cells.forget()
        if self._has_screen:
            self._loop.call_soon_threadsafe(self._loop.call_later, _RESIZED, self._paint_anew)
        return super()._get_terminal_size()

    def _paint_anew(self) -> None:
        self._cells.forget()
        if self._app.screen_stack:
            self._app.screen.refresh(layout=True)

    def write(self, data: str) -> None:
        """Write what `data` changes on the screen."""
        if data in _NOT_SENT or data.startswith(_POINTER):
            return
        if data == _OTHER_SCREEN:
            # The Linux console has no other screen; there the shell's lines would shine through.
            self._has_screen = True
            super().write(data + _CLEAR)
            self._cells.clear(*self._app.size)
            return
        changes = self._cells.changes(ascii_cells(data), *self._app.size)
        if changes:
            super().write(changes)

    def run_input_thread(self) -> None:
        """Hand on what is typed until the program ends or the terminal does."""
        # A byte that is no character of the encoding must not end the program.
        decode = codecs.getincrementaldecoder(keyboard_encoding(first_environ()))(errors="replace").decode
        parser = XTermParser(self._debug)
        poll = select.poll()
        poll.register(self.fileno, select.POLLIN)
        while not self.exit_event.is_set():
            if poll.poll(_WAIT * 1000):
                try:
                    data = os.read(self.fileno, 4096)
                except OSError:
                    data = b""
                if not data:
                    # The terminal has gone; whoever watches for that ends the program.
                    return
                # Nothing at all would tell the parser that the input has ended.
                if text := decode(data):
                    for event in parser.feed(text):
                        self.process_message(event)
            for event in parser.tick():
                self.process_message(event)
