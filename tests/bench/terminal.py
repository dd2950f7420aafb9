"""What the screen costs on a slow link, and how soon it answers, beside a bare app of the same screen library.

    python tests/bench/terminal.py [--json]

A pseudo-terminal of 80 x 24, xterm-256color. Bytes are counted as the program sends them: the first screen, three idle
seconds, each typed key with everything that follows within a fifth of a second, each Tab; the same eight inputs in
all columns. Other sheets are counted without a budget: there one key brings a page of figures. Times are medians of
several runs, taken in turn with the bare app's and told as ratios to them or to the import of the property library;
ends are the longest of as many.
"""

from __future__ import annotations

import argparse
import json
import os
import signal
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

# In the place of this folder, where this file itself has the name of what is imported.
sys.path[0] = str(Path(__file__).resolve().parents[1])

from terminal.apps import READY, app, helper_of  # noqa: E402
from terminal.harness import Terminal  # noqa: E402

READINGS = ("38 psig", "28 F", "14.1 bar g", "29 C", "15 bar g", "65 C")
# What opens another sheet from Ctrl+O, and what is typed there.
OTHER_SHEETS = {
    "saturation": ("2", ("12.4 bar g",)),
    "component": ("4", ("", "9.1 bar g, 68 C", "9 bar g, SC 4 K", "0.14 kg/s")),
    "machine": ("5", ("1 bar g", "8 C", "9.1 bar g", "68 C", "9 bar g", "32 C", "", "", "", "6.2 kW")),
    "stream": ("0", ("water", "12 C", "7 C", "3.2 L/s")),
}
PAUSE = 0.2  # [s] between keys, as fast as most people type
# Bytes at most.
BUDGET = {"key_mean": 400, "key_worst": 400, "tab_mean": 400, "tab_worst": 400, "idle": 0, "first_screen": 9000}
BARE = [sys.executable, str(Path(__file__).with_name("bare_app.py"))]


def sent(shown: Terminal, keys: str | bytes) -> int:
    """Return the bytes that follow some keys."""
    shown.mark()
    shown.send(keys)
    shown.pump(PAUSE)
    return shown.bytes_since_mark()


def byte_figures(open_it: Callable[[Path], Terminal], ready: str) -> dict[str, float]:
    """Return the bytes of one program."""
    with tempfile.TemporaryDirectory() as folder, open_it(Path(folder)) as shown:
        shown.wait_for(ready)
        shown.pump(1.0)
        figures: dict[str, float] = {"first_screen": len(shown.raw)}
        shown.mark()
        shown.pump(3.0)
        figures["idle"] = shown.bytes_since_mark()
        keys, tabs = [], []
        for reading in READINGS:
            keys += [sent(shown, key) for key in reading]
            tabs.append(sent(shown, "\t"))
        for name, counts in (("key", keys), ("tab", tabs)):
            figures[f"{name}_mean"] = round(statistics.mean(counts), 1)
            figures[f"{name}_median"] = statistics.median(counts)
            figures[f"{name}_worst"] = max(counts)
        return figures


def other_sheet(letter: str, readings: tuple[str, ...]) -> dict[str, float]:
    """Return the bytes of the keys typed into another sheet; the form's first line may be a choice."""
    with tempfile.TemporaryDirectory() as folder, app(Path(folder)) as shown:
        shown.wait_for(READY)
        shown.send("\x0f")
        shown.wait_for("leave")
        shown.send(letter)
        shown.pump(1.0)
        keys = []
        for reading in readings:
            keys += [sent(shown, key) for key in reading]
            sent(shown, "\t")
        return {"key_mean": round(statistics.mean(keys), 1), "key_worst": max(keys)}


def until(shown: Terminal, condition: Callable[[], object], start: float) -> float:
    """Return the seconds from `start` until something is on the screen."""
    while not condition():
        shown.pump(0.0005)
        if time.perf_counter() - start > 30:
            raise SystemExit(f"nothing came:\n{shown.framed()}")
    return time.perf_counter() - start


def first_frame(command: Callable[[Path], Terminal], ready: str) -> float:
    """Return the seconds from the start of the process to its first whole screen."""
    with tempfile.TemporaryDirectory() as folder:
        start = time.perf_counter()
        with command(Path(folder)) as shown:
            return until(shown, lambda: ready in shown.screen_text(), start)


def first_answer() -> float:
    """Return the seconds from the start to the answer to readings that were on the form, as after a break."""
    with tempfile.TemporaryDirectory() as folder:
        home = Path(folder)
        draft = {"pane": "superheat", "forms": {"superheat": {"texts": {"suction_pressure": "2 bar g"}, "units": {}}}}
        (home / "gaugeside").mkdir()
        (home / "gaugeside" / "settings.json").write_text(json.dumps({"refrigerant": "R-134a"}))
        (home / "gaugeside" / "draft.json").write_text(json.dumps(draft))
        start = time.perf_counter()
        with app(home) as shown:
            return until(shown, lambda: "saturated suction" in shown.screen_text(), start)


def key_to_answer(refrigerant: str) -> float:
    """Return the median seconds from a key to the repainted answer."""
    with tempfile.TemporaryDirectory() as folder, app(Path(folder), refrigerant=refrigerant) as shown:
        shown.wait_for(READY)
        shown.send("12 C")
        shown.settle()
        shown.send("\x152.0 bar g\t5 C")
        shown.wait_for("superheat  ")
        shown.send(b"\x1b[A\x15")
        shown.send("2.")
        times = []
        for number in range(40):
            shown.settle(0.1)
            before = shown.line_with("saturated suction")
            start = time.perf_counter()
            # A digit, then the next one in its place: every second key is measured.
            shown.send(str(number % 9 + 1))
            times.append(until(shown, lambda before=before: before != answer_line(shown), start))
            shown.settle(0.1)
            shown.send("\x7f")
        return statistics.median(times)


def answer_line(shown: Terminal) -> str:
    """Return the line of the saturated suction temperature; an empty screen is no answer."""
    found = [line for line in shown.lines() if "saturated suction" in line]
    return found[0] if found else next((line for line in shown.lines() if not line), "")


def key_to_echo() -> float:
    """Return the bare app's median seconds from a key to its repainted result."""
    with tempfile.TemporaryDirectory() as folder, Terminal(BARE, Path(folder)) as shown:
        shown.wait_for("leave")
        shown.pump(0.5)
        times = []
        text = ""
        for number in range(40):
            text += str(number % 10)
            start = time.perf_counter()
            shown.send(text[-1])
            times.append(until(shown, lambda text=text: f"result {text}" in shown.screen_text(), start))
            shown.pump(0.1)
        return statistics.median(times)


def library_import() -> float:
    """Return the seconds that a process takes to import the property library whole."""
    start = time.perf_counter()
    subprocess.run([sys.executable, "-c", "import CoolProp"], check=True)
    return time.perf_counter() - start


def answered_sheet(folder: str) -> Terminal:
    """Open the program and type what gives a superheat."""
    shown = app(Path(folder))
    shown.wait_for(READY)
    shown.send("2 bar g\t5 C")
    shown.wait_for("superheat  ")
    return shown


def freeze_and_hang_up(shown: Terminal) -> None:
    """Let the line stand still until painting does, then drop it."""
    for _ in range(120):
        shown.send(b"\x0c")
        time.sleep(0.005)
    time.sleep(1.0)
    shown.hang_up()


def end_after(what: Callable[[Terminal], None]) -> float:
    """Return the seconds from the moment something has happened to the end of the program and its helper."""
    with tempfile.TemporaryDirectory() as folder, answered_sheet(folder) as shown:
        helper = helper_of(shown)
        what(shown)
        start = time.perf_counter()
        while shown.process.poll() is None or Path(f"/proc/{helper}").exists():
            time.sleep(0.001)
            if time.perf_counter() - start > 30:
                raise SystemExit("it does not end")
        return time.perf_counter() - start


def answer_after_a_kill() -> float:
    """Return the seconds from the kill of the helper to the answer to the key that follows it at once."""
    with tempfile.TemporaryDirectory() as folder, answered_sheet(folder) as shown:
        before = shown.line_with("superheat  ")
        start = time.perf_counter()
        os.kill(helper_of(shown), signal.SIGKILL)
        shown.send(b"\x7f\x7f5 C")
        return until(shown, lambda: any("superheat  " in line and line != before for line in shown.lines()), start)


ENDS: dict[str, Callable[[Terminal], None]] = {
    "hangup": Terminal.hang_up,
    "sigterm": lambda shown: shown.signal(signal.SIGTERM),
    "freeze_and_hangup": freeze_and_hang_up,
    "f10": lambda shown: shown.send(b"\x1b[21~"),
}


def end_figures(rounds: int) -> dict[str, float]:
    """Return the longest of some ends, and the longest wait for an answer after a kill of the helper [s]."""
    worst = {f"end_after_{name}_s": max(end_after(what) for _ in range(rounds)) for name, what in ENDS.items()}
    worst["answer_after_helper_kill_s"] = max(answer_after_a_kill() for _ in range(rounds))
    return {name: round(seconds, 3) for name, seconds in worst.items()}


def time_figures(rounds: int) -> dict[str, float]:
    """Return medians [s] and their ratios."""
    frames: list[float] = []
    bare_frames: list[float] = []
    answers: list[float] = []
    imports: list[float] = []
    for _ in range(rounds):
        frames.append(first_frame(app, READY))
        bare_frames.append(first_frame(lambda home: Terminal(BARE, home), "leave"))
        answers.append(first_answer())
        imports.append(library_import())
    pure, blend, echo = key_to_answer("R-134a"), key_to_answer("R-454C"), key_to_echo()
    figures = {
        "first_frame": statistics.median(frames),
        "bare_first_frame": statistics.median(bare_frames),
        "first_answer": statistics.median(answers),
        "library_import": statistics.median(imports),
        "key_to_answer_pure": pure,
        "key_to_answer_blend": blend,
        "bare_key_to_echo": echo,
    }
    return {
        **{f"{name}_s": round(value, 4) for name, value in figures.items()},
        "first_frame_ratio": round(figures["first_frame"] / figures["bare_first_frame"], 2),
        "first_answer_ratio": round(figures["first_answer"] / figures["library_import"], 2),
        "key_to_answer_pure_ratio": round(pure / echo, 2),
        "key_to_answer_blend_ratio": round(blend / echo, 2),
    }


def main() -> int:
    """Print the tables; 1 when a byte budget is exceeded."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--json", action="store_true")
    parser.add_argument("--rounds", type=int, default=7, help="of each start that is timed")
    arguments = parser.parse_args()
    columns = {
        "program": byte_figures(lambda home: app(home, refrigerant="R-454C"), READY),
        "terminal colours": byte_figures(lambda home: app(home, refrigerant="R-454C", theme="terminal colours"), READY),
        "bare app": byte_figures(lambda home: Terminal(BARE, home), "leave"),
    }
    others = {name: other_sheet(*what) for name, what in OTHER_SHEETS.items()}
    times = time_figures(arguments.rounds) | end_figures(arguments.rounds)
    over = [
        name
        for name, most in BUDGET.items()
        for which in ("program", "terminal colours")
        if columns[which][name] > most
    ]
    if arguments.json:
        figures = {
            f"{which}_{name}".replace(" ", "_"): value
            for which, row in (columns | others).items()
            for name, value in row.items()
        }
        print(json.dumps({"figures": {**figures, **times}}))
        return 1 if over else 0
    print(f"{'bytes':<16}{'at most':>9}" + "".join(f"{which:>18}" for which in columns))
    for name in columns["program"]:
        most = str(BUDGET.get(name, ""))
        print(f"{name:<16}{most:>9}" + "".join(f"{row[name]:>18g}" for row in columns.values()))
    print()
    print(f"{'other sheets':<25}" + "".join(f"{which:>18}" for which in others))
    for name in ("key_mean", "key_worst"):
        print(f"{name:<25}" + "".join(f"{row[name]:>18g}" for row in others.values()))
    print()
    for name, value in times.items():
        print(f"{name:<28}{value:>10g}")
    if over:
        print("over the budget:", ", ".join(over))
    return 1 if over else 0


if __name__ == "__main__":
    sys.exit(main())
