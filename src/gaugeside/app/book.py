"""The logbook in a thread of its own: another program's lock on it must not stop the screen."""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import Any, TypeVar

from gaugeside.errors import Refusal
from gaugeside.logbook import Logbook

Found = TypeVar("Found")


class Book:
    """Does one thing after the other with the logbook, in the order asked.

    deliver: hands a callback with its arguments to the screen's own thread.
    on_message: takes what the logbook has to tell besides, such as where a damaged one was put.
    """

    def __init__(self, logbook: Logbook, deliver: Callable[..., None], on_message: Callable[[str], None]) -> None:
        self._logbook = logbook
        self._deliver = deliver
        self._on_message = on_message
        self._thread = ThreadPoolExecutor(max_workers=1, thread_name_prefix="logbook")
        self._waiting = 0

    @property
    def busy(self) -> bool:
        """Whether something asked for has not been shown yet."""
        return self._waiting > 0

    def do(
        self, work: Callable[[Logbook], Found], then: Callable[[Found], None], refused: Callable[[Refusal], None]
    ) -> None:
        """Do `work` and call `then` with what it found, or `refused` with the reason why not; returns at once."""

        def run() -> None:
            try:
                found = work(self._logbook)
            except Refusal as refusal:
                self._deliver(self._done, refused, self._without_path(refusal))
            except Exception as fault:
                # A thread's exception would be lost, and with it the word that nothing was kept.
                why = Refusal(f"The logbook met a fault ({type(fault).__name__}: {fault}).", "The sheet is not lost.")
                self._deliver(self._done, refused, why)
            else:
                self._deliver(self._done, then, found)

        self._waiting += 1
        self._thread.submit(run)

    def after(self, callback: Callable[[], None]) -> None:
        """Call `callback` after everything asked for, at once when nothing is."""
        if self.busy:
            self.do(lambda _: None, lambda _: callback(), lambda _: None)
        else:
            callback()

    def close(self) -> None:
        """Finish what was asked for."""
        self._thread.shutdown(wait=True)

    def _without_path(self, refusal: Refusal) -> Refusal:
        # It would fill the two lines that a sentence has, and the reason stands behind it; the site pane shows it.
        path = str(self._logbook.path)
        short = refusal.message.replace(f"The logbook {path}", "The logbook").replace(path, "the logbook")
        return Refusal(short, refusal.hint, refusal.field)

    def _done(self, callback: Callable[[Any], None], found: Any) -> None:
        self._waiting -= 1
        callback(found)
        messages, self._logbook.messages[:] = list(self._logbook.messages), []
        for message in messages:
            self._on_message(message)
