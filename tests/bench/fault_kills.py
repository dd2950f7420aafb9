"""The helper process killed again and again while readings are typed: what is shown then belongs to what is typed."""

from __future__ import annotations

import contextlib
import math
import os
import random
import signal
import threading
import time
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from gaugeside.checks.perform import perform, request
from gaugeside.engine import Engine, Reply
from gaugeside.errors import Refusal
from gaugeside.quantities import SEA_LEVEL, Dress, Kind, read
from terminal.harness import Terminal, app_command

REFRIGERANTS = ("R-134a", "R-454C", "R-410A")
ANSWER_WITHIN = 20.0  # [s]: more is an answer that never came
DRESS = Dress()


@dataclass
class Kills:
    """What the kills came to."""

    kills: int = 0
    shown: int = 0
    wrong: int = 0
    stale: int = 0
    missing: int = 0
    slowest: float = 0.0
    examples: list[str] = field(default_factory=list)


@dataclass
class _Screen:
    """What a pane would show: the reply to the newest question, and every reply that came for an older one."""

    newest: int = 0
    shown: Reply | None = None
    stale: int = 0
    lock: threading.Lock = field(default_factory=threading.Lock)

    def take(self, reply: Reply) -> None:
        with self.lock:
            if reply.number == self.newest:
                self.shown = reply
            elif reply.number < self.newest:
                self.stale += 1


def _asked(refrigerant: str, text: str) -> dict[str, Any] | None:
    """Return the request for one typed pressure, None while it is not one."""
    try:
        value = read(text, Kind.PRESSURE, DRESS.default(Kind.PRESSURE), DRESS, SEA_LEVEL).value
    except Refusal:
        return None
    readings = {"reading": {Kind.PRESSURE.value: value}}
    return request("saturation", refrigerant, readings, site=SEA_LEVEL, datum="iir", dress=DRESS)


def _alike(one: Any, other: Any) -> bool:
    """Whether two replies say the same; an iteration ends differently in the last digits by what was asked before."""
    if isinstance(one, float) and isinstance(other, float):
        return math.isclose(one, other, rel_tol=1e-9, abs_tol=1e-9)
    if isinstance(one, dict) and isinstance(other, dict):
        return one.keys() == other.keys() and all(_alike(one[name], other[name]) for name in one)
    if isinstance(one, list | tuple) and isinstance(other, list | tuple):
        return len(one) == len(other) and all(map(_alike, one, other))
    return bool(one == other)


def kill_while_typing(kills: int, seed: int) -> Kills:
    """Type pressures key by key and kill the helper at a random moment of each."""
    chance, count, screen = random.Random(seed), Kills(), _Screen()
    engine = Engine(screen.take, lambda word: None)
    engine.start()
    try:
        for _ in range(kills):
            asked = _type_and_kill(engine, screen, chance, count)
            _judge(screen, asked, count)
    finally:
        engine.close()
    count.stale = screen.stale
    return count


def _type_and_kill(engine: Engine, screen: _Screen, chance: random.Random, count: Kills) -> dict[str, Any]:
    refrigerant = chance.choice(REFRIGERANTS)
    text = f"{chance.randrange(1, 20)}.{chance.randrange(100):02d} bar g"
    killed_at = chance.randrange(len(text))
    last: dict[str, Any] = {}
    for place in range(len(text)):
        asked = _asked(refrigerant, text[: place + 1])
        with screen.lock:
            # A key takes the answer to the text before it off the screen.
            screen.shown = None
            if asked is not None:
                # The callback waits for the lock, so no answer can come before its number is known.
                screen.newest = engine.ask("saturation", asked)
                last = asked
            else:
                engine.forget("saturation")
                screen.newest = 0
        if place == killed_at:
            time.sleep(chance.uniform(0, 0.004))
            count.kills += _kill(engine)
        time.sleep(chance.choice([0, 0.002, 0.02]))
    return last


def _kill(engine: Engine) -> int:
    deadline = time.monotonic() + ANSWER_WITHIN
    while (pid := engine.pid) is None and time.monotonic() < deadline:
        time.sleep(0.005)
    with contextlib.suppress(ProcessLookupError):
        os.kill(pid or 0, signal.SIGKILL) if pid else None
        return 1
    return 0


def _judge(screen: _Screen, asked: Mapping[str, Any], count: Kills) -> None:
    """Wait for the answer to what stands in the field and compare it with the undisturbed one."""
    began = time.monotonic()
    while screen.shown is None and time.monotonic() - began < ANSWER_WITHIN:
        time.sleep(0.005)
    count.slowest = max(count.slowest, time.monotonic() - began)
    with screen.lock:
        reply = screen.shown
    if reply is None:
        count.missing += 1
        return
    count.shown += 1
    expected = perform(asked)
    if reply.fault or not _alike([reply.answer, reply.error], [expected.get("answer"), expected.get("error")]):
        count.wrong += 1
        count.examples.append(f"{asked['refrigerant']} {asked['values']}: {reply.fault or reply.answer!r:.200}")


def kill_on_the_screen(kills: int, seed: int, folder: Path) -> Kills:
    """The same in a real terminal, beside a program that nobody disturbs: both screens must come to be alike."""
    chance, count = random.Random(seed), Kills()
    homes = [folder / name for name in ("disturbed", "left alone")]
    for home in homes:
        (home / "gaugeside").mkdir(parents=True)
        (home / "gaugeside" / "settings.json").write_text('{"refrigerant": "R-454C"}')
    with Terminal(app_command(), homes[0]) as disturbed, Terminal(app_command(), homes[1]) as calm:
        for terminal in (disturbed, calm):
            terminal.wait_for("suction pressure")
            terminal.send("\x1bOQ")
            terminal.wait_for("pressure or temp.")
        for _ in range(kills):
            text = f"{chance.randrange(1, 20)}.{chance.randrange(100):02d} bar g"
            killed_at = chance.randrange(len(text))
            for terminal in (disturbed, calm):
                terminal.send("\x15")
                for place, key in enumerate(text):
                    terminal.send(key)
                    terminal.pump(0.01)
                    if terminal is disturbed and place == killed_at:
                        count.kills += _kill_helper(terminal)
            began = time.monotonic()
            calm.wait_for(f"{text.split(' ')[0]} bar g ")
            calm.settle()
            with contextlib.suppress(AssertionError):
                disturbed.wait_for(lambda t: _sheet(t) == _sheet(calm), ANSWER_WITHIN)
            count.slowest = max(count.slowest, time.monotonic() - began)
            count.shown += 1
            if _sheet(disturbed) != _sheet(calm):
                count.wrong += 1
                count.examples.append(disturbed.framed())
    return count


def _kill_helper(terminal: Terminal) -> int:
    killed = 0
    for pid, command in terminal.children().items():
        if "gaugeside.engine.worker" in command:
            with contextlib.suppress(ProcessLookupError):
                os.kill(pid, signal.SIGKILL)
                killed = 1
    return killed


def _sheet(terminal: Terminal) -> list[str]:
    """The lines of the sheet, without the words under it, which tell of the restart."""
    return terminal.lines()[3:-3]
