"""Starting and ending the app: environment, signals, what is remembered."""

from __future__ import annotations

import gc
import os
import select
import signal
import sys
import termios
import threading
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from textual.theme import Theme

    from gaugeside.app.app import GaugesideApp
    from gaugeside.settings import Places, Settings

# Leave the other screen, show the cursor, wrap lines, end reports of paste, mouse, focus and keys, plain colours.
_RESTORE = b"\x1b[?1049l\x1b[?25h\x1b[?7h\x1b[?2004l\x1b[?1000l\x1b[?1003l\x1b[?1006l\x1b[?1004l\x1b[<u\x1b[0m\r\n"
_SIGNALS = (signal.SIGHUP, signal.SIGTERM)


def start(logbook: Path | None, ascii_alone: bool = False, on_hangup: Callable[[], None] | None = None) -> int:
    """Run the app in this terminal until it is left; return the exit status.

    ascii_alone: show no character but ASCII, as on a terminal whose locale is not UTF-8. on_hangup: called last where
    the program ends without returning, on SIGHUP, SIGTERM or a terminal that has gone.
    """
    if not os.environ.get("NO_COLOR", "-"):
        # Only a value that is not empty asks for no colour; the screen library takes the name alone for it.
        del os.environ["NO_COLOR"]
    # Read by the screen library when it is imported, therefore here.
    os.environ.setdefault("ESCDELAY", "400")
    os.environ.setdefault("TEXTUAL_ANIMATIONS", "none")
    # What changed is painted at the next tick of this clock, which stands still when nothing does: at the usual 60 an
    # answer of two milliseconds is seen after forty.
    os.environ.setdefault("TEXTUAL_FPS", "250")
    # Every key as a sequence of several bytes, which no key here needs.
    os.environ.setdefault("TEXTUAL_DISABLE_KITTY_KEY", "1")
    for number in _SIGNALS:
        # An inherited "ignore" (nohup) would keep the program alive behind a closed terminal.
        signal.signal(number, signal.SIG_DFL)
    # Blocked before any thread starts, so that only the watching thread ever takes them.
    signal.pthread_sigmask(signal.SIG_BLOCK, _SIGNALS)
    # Until the first frame nothing is worth collecting.
    gc.disable()
    from gaugeside.app.app import GaugesideApp
    from gaugeside.app.charset import first_environ, speaks_utf8, use_ascii
    from gaugeside.engine import Engine
    from gaugeside.settings import places

    home = places(logbook=logbook)
    if ascii_alone or not speaks_utf8(first_environ(), sys.stderr.encoding):
        use_ascii()
    settings, draft, themes, messages = _remembered(home)
    engine = Engine(lambda _: None, lambda _: None, log=home.log_file, own_folder=home.settings_folder)
    app = GaugesideApp(home, settings, draft, themes, messages, dict(os.environ), engine)
    modes = termios.tcgetattr(0)
    threading.Thread(target=_watch, args=(app, modes, on_hangup), name="signals", daemon=True).start()
    try:
        app.run(mouse=False)
    finally:
        app.saver.close()
        app.engine.close()
        app.book.close()
    return app.return_code or 0


def _remembered(home: Places) -> tuple[Settings, dict[str, Any], dict[str, Theme], list[str]]:
    """Return settings, forms and themes, and one sentence for each fault; one alone for a folder that is shut."""
    from gaugeside.app.themes import load_themes
    from gaugeside.disk import folder_fault
    from gaugeside.refrigerants import load_own
    from gaugeside.settings import load_draft, load_settings

    settings, bad_settings = load_settings(home.settings_file)
    draft, bad_draft = load_draft(home.draft_file)
    themes, bad_themes = load_themes(home.themes_folder)
    bad_settings += [*bad_themes, *load_own(home.settings_folder)]
    messages = []
    for folder, faults in ((home.settings_folder, bad_settings), (home.data_folder, bad_draft)):
        shut = folder_fault(folder)
        messages += [shut] if shut else faults
    return settings, draft, themes, list(dict.fromkeys(messages))


def _watch(app: GaugesideApp, modes: list[Any], on_hangup: Callable[[], None] | None) -> None:
    """End the program in good order on SIGHUP, SIGTERM or a terminal that has gone."""
    terminal = select.poll()
    terminal.register(0, select.POLLHUP | select.POLLERR)
    while True:
        taken = signal.sigtimedwait(_SIGNALS, 0.5)
        gone = any(event & (select.POLLHUP | select.POLLERR | select.POLLNVAL) for _, event in terminal.poll(0))
        if taken is None and not gone:
            continue
        with suppress(Exception):
            app.saver.flush()
        with suppress(Exception):
            app.engine.close()
        if on_hangup is not None:
            with suppress(Exception):
                on_hangup()
        if taken is not None and taken.si_signo == signal.SIGTERM and not gone:
            _restore(modes)
        os._exit(128 + (taken.si_signo if taken is not None else signal.SIGHUP))


def _restore(modes: list[Any]) -> None:
    """Give the terminal back as it was, without ever waiting for it."""
    with suppress(OSError, termios.error):
        os.set_blocking(2, False)
        os.write(2, _RESTORE)
        os.set_blocking(2, True)
        termios.tcsetattr(0, termios.TCSANOW, modes)
