"""What faults cost, counted by hand: python tests/bench/faults.py [--rounds N] [--inputs N] [--kills N] [--json].

(a) Two writers keep entries in one logbook until both are killed with SIGKILL at a random moment. Every
entry that a writer acknowledged must be there, whole, in a file that passes its integrity check.
(b) Random and mutated inputs at every door through which text comes in. Each is taken as what it means, by an
independent oracle, or refused with one sentence.
(c) The helper process is killed while readings are typed. What is shown then is the answer to what is typed; a
tenth as many kills are of a program in a real terminal.
A part is left out with the number 0.
"""

from __future__ import annotations

import argparse
import contextlib
import json
import os
import random
import signal
import sqlite3
import subprocess
import sys
import tempfile
import time
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from gaugeside.logbook import Entry, Logbook

WRITERS = 2
ENTRIES_IN_A_FILE = 2000  # a new file after that many, so that a round's check stays quick


@dataclass
class Count:
    """What the rounds came to."""

    rounds: int = 0
    acknowledged: int = 0
    lost: int = 0
    changed: int = 0
    damaged_files: int = 0


def invented_entry(note: str) -> Entry:
    """An entry of an invented machine."""
    return Entry(
        number=None,
        kept_at=datetime.now(UTC),
        check="superheat",
        refrigerant="R-454C",
        tag="rack 2",
        note=note,
        readings={"suction_pressure": "38 psig", "suction_temperature": "28 F"},
        values={"suction_pressure": 363_300.0, "suction_temperature": 270.9},
        findings={"superheat": {"value": 9.2, "unit": "K"}},
        headline="superheat 9.2 K",
    )


def write_for_ever(path: Path, name: str) -> None:
    """Keep entries one after the other; each acknowledged number and note is a line of output."""
    logbook = Logbook(path, busy_seconds=30)
    number = 0
    while True:
        number += 1
        kept = logbook.keep(invented_entry(f"{name} {number}"))
        # One write call, so that a killed writer leaves at most one line unfinished.
        os.write(1, f"{kept.entry.number} {kept.entry.note}\n".encode())


def kill_round(path: Path, seconds: float) -> list[tuple[int, str]]:
    """Let two writers keep, kill both after `seconds` of keeping [s]; return what was acknowledged."""
    command = [sys.executable, __file__, "--write", str(path)]
    writers = [
        subprocess.Popen([*command, f"{os.getpid()}-{random.random()}-{n}"], stdout=subprocess.PIPE)
        for n in range(WRITERS)
    ]
    output: list[bytes] = []
    try:
        for writer in writers:
            assert writer.stdout is not None
            output.append(writer.stdout.readline())
        time.sleep(seconds)
    finally:
        for writer in writers:
            writer.send_signal(signal.SIGKILL)
    for n, writer in enumerate(writers):
        output[n] += writer.communicate()[0]
    lines = [line.split(b" ", 1) for text in output for line in text.splitlines(keepends=True) if line[-1:] == b"\n"]
    return [(int(number), note.decode().rstrip("\n")) for number, note in lines]


def check(path: Path, acknowledged: dict[int, str], count: Count) -> None:
    """Add to `count` what the logbook at `path` is short of."""
    found = {entry.number: entry for entry in Logbook(path).entries(limit=-1)}
    for number, note in acknowledged.items():
        if number not in found:
            count.lost += 1
        elif found[number].note != note or found[number].readings != invented_entry("").readings:
            count.changed += 1
    with contextlib.closing(sqlite3.connect(path)) as connection:
        count.damaged_files += connection.execute("PRAGMA integrity_check").fetchall() != [("ok",)]


def kill_writers(folder: Path, rounds: int, seed: int) -> Count:
    """Run `rounds` rounds in `folder`; the kill comes up to 0.15 s after both writers keep."""
    chance = random.Random(seed)
    count = Count()
    acknowledged: dict[int, str] = {}
    path = folder / "logbook-0.sqlite3"
    for number in range(rounds):
        if len(acknowledged) > ENTRIES_IN_A_FILE:
            path, acknowledged = folder / f"logbook-{number}.sqlite3", {}
        fresh = dict(kill_round(path, chance.uniform(0, 0.15)))
        count.rounds += 1
        count.acknowledged += len(fresh)
        acknowledged.update(fresh)
        check(path, acknowledged, count)
    return count


def inputs_at_the_doors(inputs: int, seed: int, folder: Path) -> tuple[dict[str, float], list[str]]:
    """Run (b); return the counts by door and in all, and what went wrong."""
    from bench import fault_inputs  # here, because a run by hand must set the path first

    began = time.monotonic()
    tallies = fault_inputs.put(inputs, seed, folder)
    names = ("inputs", "taken", "refused", "crashes", "misreadings", "beyond_the_oracle")
    figures: dict[str, float] = {
        f"{door}_{name}": getattr(tally, name) for door, tally in tallies.items() for name in names[:5]
    }
    figures |= {f"all_{name}": sum(getattr(tally, name) for tally in tallies.values()) for name in names}
    figures["seconds"] = round(time.monotonic() - began, 1)
    return figures, [example for tally in tallies.values() for example in tally.examples]


def helper_kills(kills: int, seed: int, folder: Path) -> tuple[dict[str, float], list[str]]:
    """Run (c); return the counts and what went wrong."""
    from bench import fault_kills

    figures: dict[str, float] = {}
    wrong: list[str] = []
    for name, count in (
        ("engine", fault_kills.kill_while_typing(kills, seed)),
        ("screen", fault_kills.kill_on_the_screen(kills // 10, seed, folder)),
    ):
        wrong += count.examples
        figures |= {f"{name}_{what}": round(n, 2) for what, n in vars(count).items() if what != "examples"}
    return figures, wrong


def main() -> None:
    """Run what was asked for and print the counts."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--rounds", type=int, default=500)
    parser.add_argument("--inputs", type=int, default=200_000)
    parser.add_argument("--kills", type=int, default=100)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--json", action="store_true")
    parser.add_argument("--write", nargs=2, metavar=("PATH", "NAME"), help=argparse.SUPPRESS)
    asked = parser.parse_args()
    if asked.write:
        write_for_ever(Path(asked.write[0]), asked.write[1])
    figures: dict[str, float] = {}
    wrong: list[str] = []
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        if asked.rounds:
            count = kill_writers(folder, asked.rounds, asked.seed)
            figures |= {f"logbook_kill_{name}": value for name, value in vars(count).items()}
        for part, run, number in (
            ("inputs", inputs_at_the_doors, asked.inputs), ("helper_kill", helper_kills, asked.kills),
        ):  # fmt: skip
            if number:
                found, faults = run(number, asked.seed, folder)
                figures |= {f"{part}_{name}": value for name, value in found.items()}
                wrong += faults
    for line in wrong:
        print(line, file=sys.stderr)
    if asked.json:
        print(json.dumps({"figures": figures}))
    else:
        for name, value in figures.items():
            print(f"{name:44}{value:>10}")


if __name__ == "__main__":
    sys.path[0] = str(Path(__file__).resolve().parents[1])
    main()
