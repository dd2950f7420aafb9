"""The client side of the helper process: one request at a time, the newest of each slot, never a stale answer.

A thread owns the process. It starts it, restarts it when it dies, hangs or talks garbage, and reports through two
callbacks. The callers never wait.
"""

from __future__ import annotations

import contextlib
import json
import os
import selectors
import subprocess
import sys
import threading
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

TIME_LIMIT = 5.0  # [s]: the slowest answer takes a tenth of one
START_LIMIT = 60.0  # [s]
_LARGEST_LINE = 4_000_000


@dataclass(frozen=True)
class Reply:
    """What came back for the request `number` of a slot: exactly one of answer, error and fault is set.

    picture: beside an answer, where one was asked for and there is something to draw.
    """

    slot: str
    number: int
    answer: dict[str, Any] | None = None
    picture: dict[str, Any] | None = None
    error: dict[str, Any] | None = None
    fault: str = ""


@dataclass
class _Asked:
    slot: str
    number: int
    request: Mapping[str, Any]
    tries: int = 0


class _Broken(Exception):
    """The helper process cannot be used any more; the text says why."""


class Engine:
    """Runs checks in one helper process.

    on_reply is called with each Reply whose request is still the newest of its slot; on_state with a word about the
    helper ("" when all is well). Both are called from the engine's thread; both may be replaced at any time.
    command replaces the helper's command line (tests). time_limit: seconds one request may take.
    """

    def __init__(
        self,
        on_reply: Callable[[Reply], None],
        on_state: Callable[[str], None],
        *,
        log: Path | None = None,
        own_folder: Path | None = None,
        command: list[str] | None = None,
        time_limit: float = TIME_LIMIT,
    ) -> None:
        self.on_reply, self.on_state = on_reply, on_state
        self._command = command or [
            sys.executable, "-P", "-m", "gaugeside.engine.worker", str(log or ""), str(own_folder or ""),
        ]  # fmt: skip
        self._time_limit = time_limit
        self._lock = threading.Lock()
        self._waiting: dict[str, _Asked] = {}
        self._newest: dict[str, int] = {}
        self._number = 0
        self._closed = False
        self._ending = threading.Event()
        self._ailing = True
        self._wake_out, self._wake_in = os.pipe()
        os.set_blocking(self._wake_in, False)
        self._process: subprocess.Popen[bytes] | None = None
        self._buffer = b""
        self._starts = 0
        self._thread = threading.Thread(target=self._run, name="engine", daemon=True)

    def start(self) -> None:
        """Start the thread and the helper process; returns at once."""
        self._thread.start()

    @property
    def pid(self) -> int | None:
        """The helper's process number, None while there is none."""
        process = self._process
        return None if process is None else process.pid

    def ask(self, slot: str, request: Mapping[str, Any]) -> int:
        """Ask for `request`; an older one of the same slot that waits is dropped, its answer never delivered."""
        with self._lock:
            self._number += 1
            number = self._newest[slot] = self._number
            self._waiting[slot] = _Asked(slot, number, request)
        self._wake()
        return number

    def forget(self, slot: str) -> None:
        """Drop what was asked for `slot`: no answer to it is delivered any more."""
        with self._lock:
            self._waiting.pop(slot, None)
            self._newest.pop(slot, None)

    def close(self) -> None:
        """End the helper process; harmless twice."""
        self._closed = True
        self._ending.set()
        self._wake()
        process = self._process
        if process is not None:
            process.kill()
        if self._thread.is_alive() and threading.current_thread() is not self._thread:
            self._thread.join(timeout=2)
        if not self._thread.is_alive():
            for end in (self._wake_in, self._wake_out):
                if end >= 0:
                    os.close(end)
            self._wake_in = self._wake_out = -1

    def _wake(self) -> None:
        # Where the pipe is full the thread is about to wake anyway.
        with contextlib.suppress(OSError):
            os.write(self._wake_in, b".")

    def _run(self) -> None:
        current: _Asked | None = None
        while not self._closed:
            try:
                self._ensure_started()
                current = current or self._next()
                if current is None:
                    self._watch(None)
                    continue
                self._deliver(current, self._exchange(current))
                current = None
            except _Broken as broken:
                self._stop()
                if self._closed:
                    break
                current = self._after_break(current, str(broken))
        self._stop()

    def _after_break(self, current: _Asked | None, why: str) -> _Asked | None:
        """Say what happened and decide whether the request is tried once more."""
        self._ailing = True
        self.on_state(f"{why}; it is started again.")
        if self._starts > 3:
            self._ending.wait(min(self._starts, 20) * 0.1)
        if current is None:
            return None
        current.tries += 1
        if current.tries < 2:
            return current if self._is_newest(current) else None
        fault = f"{why} twice on these readings; change a reading to try again."
        self._deliver(current, {"fault": fault})
        return None

    def _is_newest(self, asked: _Asked) -> bool:
        with self._lock:
            return self._newest.get(asked.slot) == asked.number

    def _next(self) -> _Asked | None:
        with self._lock:
            if not self._waiting:
                return None
            slot = next(iter(self._waiting))
            return self._waiting.pop(slot)

    def _ensure_started(self) -> None:
        if self._process is not None:
            return
        self._buffer = b""
        self._starts += 1
        environment = {**os.environ, "COOLPROP_DISABLE_SUPERANCILLARIES_ENTIRELY": "1", "PYTHONUNBUFFERED": "1"}
        try:
            self._process = subprocess.Popen(
                self._command,
                stdin=subprocess.PIPE,
                stdout=subprocess.PIPE,
                stderr=subprocess.DEVNULL,
                start_new_session=True,
                env=environment,
            )
        except OSError as error:
            self._ending.wait(0.5)
            raise _Broken(f"The property helper cannot be started ({error.strerror})") from None
        deadline = time.monotonic() + START_LIMIT
        while "ready" not in self._receive(deadline):
            pass
        if self._ailing:
            self._ailing = False
            self.on_state("")

    def _stop(self) -> None:
        process, self._process = self._process, None
        if process is None:
            return
        process.kill()
        for stream in (process.stdin, process.stdout):
            if stream is not None:
                # Unsent bytes to a dead helper.
                with contextlib.suppress(OSError):
                    stream.close()
        process.wait()

    def _exchange(self, asked: _Asked) -> dict[str, Any]:
        assert self._process is not None
        assert self._process.stdin is not None
        if self._buffer:
            raise _Broken("The property helper spoke unasked")
        line = json.dumps({"number": asked.number, "request": dict(asked.request)}).encode() + b"\n"
        try:
            self._process.stdin.write(line)
            self._process.stdin.flush()
        except OSError:
            raise _Broken("The property helper ended") from None
        reply = self._receive(time.monotonic() + self._time_limit)
        if reply.get("number") != asked.number:
            raise _Broken("The property helper answered something else")
        return reply

    def _receive(self, deadline: float) -> dict[str, Any]:
        """Return the helper's next message."""
        while b"\n" not in self._buffer:
            if len(self._buffer) > _LARGEST_LINE:
                raise _Broken("The property helper sent too much")
            self._watch(deadline)
            if self._closed:
                raise _Broken("closed")
        line, _, self._buffer = self._buffer.partition(b"\n")
        try:
            message = json.loads(line)
        except (ValueError, RecursionError):
            message = None
        if not isinstance(message, dict):
            raise _Broken("The property helper sent garbage")
        return message

    def _watch(self, deadline: float | None) -> None:
        """Wait for bytes from the helper or for a wake-up; _Broken when it ended or the deadline passed."""
        assert self._process is not None
        assert self._process.stdout is not None
        with selectors.DefaultSelector() as selector:
            selector.register(self._process.stdout, selectors.EVENT_READ)
            selector.register(self._wake_out, selectors.EVENT_READ)
            wait = None if deadline is None else max(0.0, deadline - time.monotonic())
            ready = {key.fd for key, _ in selector.select(wait)}
        if not ready and deadline is not None and time.monotonic() >= deadline:
            raise _Broken("The property helper did not answer in time")
        if self._wake_out in ready:
            os.read(self._wake_out, 4096)
        if self._process.stdout.fileno() in ready:
            data = os.read(self._process.stdout.fileno(), 65536)
            if not data:
                raise _Broken("The property helper ended")
            self._buffer += data
            if deadline is None:
                raise _Broken("The property helper spoke unasked")

    def _deliver(self, asked: _Asked, message: Mapping[str, Any]) -> None:
        if not self._is_newest(asked):
            return
        self._starts = min(self._starts, 1) if "fault" not in message else self._starts
        self.on_reply(
            Reply(
                asked.slot,
                asked.number,
                answer=message.get("answer"),
                picture=message.get("picture"),
                error=message.get("error"),
                fault=str(message.get("fault", "")),
            )
        )
