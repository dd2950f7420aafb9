"""The helper process: JSON lines in on standard input, JSON lines out on what was standard output.

Run as `python -P -m gaugeside.engine.worker LOG OWN_FOLDER`. It ends when its standard input ends, so it never
outlives the program that started it.
"""

from __future__ import annotations

import json
import os
import queue
import signal
import stat
import sys
import threading
import traceback
from contextlib import suppress
from pathlib import Path
from typing import BinaryIO

from gaugeside.disk import make_private_folder
from gaugeside.errors import Refusal

_LARGEST_LOG = 200_000


def main() -> None:
    """Serve requests until standard input ends."""
    answers_to = _take_over_outputs(sys.argv[1] if len(sys.argv) > 1 else "")
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    signal.pthread_sigmask(signal.SIG_UNBLOCK, {signal.SIGHUP, signal.SIGTERM})
    asked: queue.Queue[bytes] = queue.Queue()
    threading.Thread(target=_listen, args=(sys.stdin.buffer, asked), daemon=True).start()
    _send(answers_to, {"hello": os.getpid()})
    _load(sys.argv[2] if len(sys.argv) > 2 else "")
    _send(answers_to, {"ready": os.getpid()})
    while True:
        _serve(asked.get(), answers_to)


def _take_over_outputs(log: str) -> int:
    """Point file descriptors 1 and 2 at the log, so that no library's print ever meets a screen or an answer."""
    answers_to = os.dup(1)
    target = os.open(os.devnull, os.O_WRONLY)
    if log:
        # Without a log the program still works; there is nobody here to tell.
        with suppress(OSError, ValueError, Refusal):
            target = _opened(Path(log))
    os.dup2(target, 1)
    os.dup2(target, 2)
    return answers_to


def _opened(log: Path) -> int:
    """Open the log to append, emptied when it has grown large; OSError for a link, a pipe, anything but a file."""
    make_private_folder(log.parent)
    # A pipe that nobody reads would hold the helper up for ever, a link leads into a file of another purpose.
    flags = os.O_WRONLY | os.O_CREAT | os.O_APPEND | os.O_NOFOLLOW | os.O_NONBLOCK
    target = os.open(log, flags, 0o600)
    found = os.fstat(target)
    if not stat.S_ISREG(found.st_mode):
        raise OSError("not a file")
    if found.st_size > _LARGEST_LOG:
        os.ftruncate(target, 0)
    return target


def _listen(source: BinaryIO, asked: queue.Queue[bytes]) -> None:
    for line in source:
        asked.put(line)
    os._exit(0)


def _load(own_folder: str) -> None:
    """Import the checks and the property library, and read the person's own refrigerants."""
    import gaugeside.checks.perform
    import gaugeside.refrigerants.library  # noqa: F401  the import is the work
    from gaugeside.refrigerants import load_own

    if own_folder:
        load_own(Path(own_folder))


def _serve(line: bytes, answers_to: int) -> None:
    from gaugeside.checks.perform import perform

    number = None
    try:
        asked = json.loads(line)
        number = asked["number"]
        reply = perform(asked["request"])
    except Exception:
        # Whatever goes wrong here must reach the person as a sentence; the details go to the log.
        traceback.print_exc()
        reply = {"fault": "The property helper met a fault on these readings; details are in its log."}
    _send(answers_to, {"number": number, **reply})


def _send(answers_to: int, message: dict[str, object]) -> None:
    data = json.dumps(message).encode() + b"\n"
    while data:
        data = data[os.write(answers_to, data) :]


if __name__ == "__main__":
    main()
