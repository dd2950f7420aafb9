"""The terminal as the program reads and writes it, where the screen library's own way is not safe enough."""

from __future__ import annotations

import codecs
import os
import select

from textual._xterm_parser import XTermParser
from textual.drivers.linux_driver import LinuxDriver

from gaugeside.app.charset import ascii_cells, keyboard_encoding

# Reports of the window losing and gaining the focus would cost a whole screen each time.
_NOT_SENT = frozenset({"\x1b[?1004h", "\x1b[?1004l"})
_WAIT = 0.1


class TerminalDriver(LinuxDriver):
    """Reads any bytes without a fault, ends at the end of the input, writes ASCII alone where asked to."""

    def write(self, data: str) -> None:
        """Write `data`, character by character replaced where the terminal shows only ASCII."""
        if data not in _NOT_SENT:
            super().write(ascii_cells(data))

    def run_input_thread(self) -> None:
        """Hand on what is typed until the program ends or the terminal does."""
        # A byte that is no character of the encoding must not end the program.
        decode = codecs.getincrementaldecoder(keyboard_encoding(os.environ))(errors="replace").decode
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
