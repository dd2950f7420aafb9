"""The program in a real terminal: keys as terminals send them, the screen as a person reads it."""

from __future__ import annotations

import os
import re
import signal
import time
from pathlib import Path

import CoolProp.CoolProp as library
import pytest

from terminal.apps import (
    READY,
    app,
    draft_holds,
    helper_of,
    is_restored,
    no_process_left,
    readings_kept,
    with_helper,
)
from terminal.harness import FUNCTION_KEYS, PATIENCE, Terminal

KEY = FUNCTION_KEYS["xterm"]
UP, DOWN = b"\x1b[A", b"\x1b[B"


def first_number(line: str, unit: str) -> float:
    found = re.search(rf"(-?[\d.]+) {re.escape(unit)}", line)
    assert found is not None, line
    return float(found[1])


def kelvin_shown(shown: Terminal) -> float | None:
    """Return the superheat on the screen, None while there is none."""
    there = "above the dew point" in shown.screen_text()
    return first_number(shown.line_with("above the dew point"), "K") if there else None


def typed(shown: Terminal, keys: str) -> None:
    """Type key by key, each seen on the screen before the next."""
    for key in keys:
        shown.send(key)
        shown.pump(0.03)


def test_start_and_quit_leave_the_terminal_clean(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        assert 1049 in shown.modes()
        assert not {1000, 1002, 1003, 1006} & shown.modes(), "the mouse stays the terminal's own"
        shown.send(KEY[10])
        assert shown.wait_end() == 0
        assert is_restored(shown)
        no_process_left(shown)


def test_ctrl_q_leaves_too(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        shown.send("\x11")
        assert shown.wait_end() == 0
        assert is_restored(shown)


@pytest.mark.parametrize("encoding", FUNCTION_KEYS)
def test_function_keys_in_each_encoding(tmp_path: Path, encoding: str) -> None:
    keys = FUNCTION_KEYS[encoding]
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        for number, text in ((2, "F2 SATURATION"), (3, "F3 SUPERHEAT"), (4, "F4 COMPONENT"), (6, "F6 LOGBOOK")):
            shown.send(keys[number])
            shown.wait_for(text)
        shown.send(keys[7])
        shown.wait_for("F7 SITE")
        shown.send(keys[8])
        shown.wait_for("Pick the refrigerant")
        shown.send(keys[8])
        shown.wait_for("F7 SITE")
        shown.send(keys[9])
        shown.wait_for("For what is kept next")
        shown.send(keys[9])
        shown.wait_for("F7 SITE")
        shown.send(keys[1])
        shown.wait_for("Enter or Space goes back")
        shown.send(keys[1])
        shown.wait_for("F7 SITE")
        shown.send(keys[10])
        assert shown.wait_end() == 0


def test_a_function_key_split_by_the_link_is_still_one_key(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        for part in (b"\x1b", b"[1", b"7~"):
            shown.send(part)
            shown.pump(0.2)
        shown.wait_for("F6 LOGBOOK")
        assert shown.line_with("show entries with").split() == ["show", "entries", "with", "none"]


def test_a_calculation_typed_key_by_key_kept_seen_and_reopened(tmp_path: Path) -> None:
    # The figure to meet comes from the property library itself: dew temperature of R-454C (21.5 % R-32 and 78.5 %
    # R-1234yf by mass, ASHRAE 34) at 38 psi over 101 325 Pa; 1 psi is 6894.757293 Pa (NIST SP 811).
    state = library.AbstractState("HEOS", "R32&R1234yf")
    state.set_mass_fractions([0.215, 0.785])
    state.update(library.PQ_INPUTS, 38 * 6894.757293168361 + 101325, 1)
    superheat = (28 - 32) * 5 / 9 + 273.15 - state.T()
    with app(tmp_path, refrigerant="") as shown:
        shown.wait_for(READY)
        shown.send(KEY[8])
        shown.wait_for("Pick the refrigerant")
        typed(shown, "454c")
        shown.wait_for("> R-454C")
        shown.send("\r")
        shown.wait_for(" R-454C  A2L  zeotrope")
        typed(shown, "38 psig")
        shown.wait_for("2.62 bar g         3.63 bar abs")
        typed(shown, "\t28 F")
        # Shown to a tenth; the answer to 28 °C may stand there a moment longer.
        shown.wait_for(lambda t: kelvin_shown(t) == pytest.approx(superheat, abs=0.051))
        line = shown.line_with("above the dew point")
        assert first_number(line, "°F") == pytest.approx(superheat * 9 / 5, abs=0.051)
        shown.send("\r")
        shown.wait_for("as entry 1")
        assert readings_kept(tmp_path)[0]["suction_pressure"] == "38 psig"
        shown.send(KEY[6])
        shown.wait_for("> 1")
        assert f"superheat {superheat:.1f} K" in shown.line_with("> ")
        shown.send(KEY[3])
        shown.wait_for("F3 SUPERHEAT")
        shown.send("\x15")
        shown.wait_for(lambda t: "28 F" not in t.line_with("suction pipe"))
        shown.send(KEY[6])
        shown.wait_for("1 shown")
        shown.send("\r")
        shown.wait_for("Entry 1 with its readings.")
        shown.wait_for(lambda t: kelvin_shown(t) == pytest.approx(superheat, abs=0.051))
        assert "28 F" in shown.line_with("suction pipe")


def test_a_whole_job_in_one_burst(tmp_path: Path) -> None:
    with app(tmp_path, refrigerant="") as shown:
        shown.wait_for(READY)
        shown.send(KEY[8] + b"134a\r" + b"2 bar g\t5 C" + DOWN + b"9 bar g\t30 C\r")
        shown.wait_for("as entry 1")
    assert readings_kept(tmp_path) == [
        {
            "suction_pressure": "2 bar g",
            "suction_temperature": "5 C",
            "liquid_pressure": "9 bar g",
            "liquid_temperature": "30 C",
        }
    ]


def test_forty_by_ten(tmp_path: Path) -> None:
    with app(tmp_path, columns=40, rows=10) as shown:
        shown.wait_for("40x10")
        shown.wait_for("PageDown: more")
        typed(shown, "2 bar g\t5 C")
        shown.wait_for(lambda t: "5 C" in t.screen_text())
        for _ in range(6):
            shown.send(b"\x1b[6~")
            shown.settle()
            if "superheat" in shown.screen_text():
                break
        shown.wait_for("superheat")
        shown.send("\t" * 3)
        shown.settle()
        shown.send(KEY[10])
        assert shown.wait_end() == 0
        assert is_restored(shown)


@pytest.mark.parametrize("size", [(20, 5), (300, 100), (1, 1)])
def test_any_size_while_typing(tmp_path: Path, size: tuple[int, int]) -> None:
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        typed(shown, "2 b")
        shown.resize(*size)
        shown.pump(0.2)
        typed(shown, "ar g")
        shown.resize(80, 24)
        shown.wait_for(READY)
        shown.wait_for("2.00 bar g         3.01 bar abs")
        typed(shown, "\t5 C")
        shown.wait_for("superheat")


def colours_of(raw: bytes) -> set[str]:
    """Return every SGR code for a colour that was sent."""
    found = set()
    for parameters in re.findall(rb"\x1b\[([0-9;]*)m", raw):
        for code in parameters.decode().split(";"):
            if code.isdigit() and ((30 <= int(code) <= 49 and int(code) not in (39, 49)) or 90 <= int(code) <= 107):
                found.add(code)
    return found


def test_no_color_sends_no_colour_and_still_marks_the_field(tmp_path: Path) -> None:
    with app(tmp_path, environ={"NO_COLOR": "1"}) as shown:
        shown.wait_for(READY)
        typed(shown, "2 bar g\t5 C\t9 ba")
        shown.wait_for("9 ba")
        shown.wait_for("not understood")
        assert colours_of(bytes(shown.raw)) == set()
        row = next(y for y, line in enumerate(shown.lines()) if line.startswith("liquid pressure"))
        assert any(shown.screen.buffer[row][x].underscore for x in range(20, 40)), "the field with the focus"
        assert not any(shown.screen.buffer[row + 2][x].underscore for x in range(20, 40))
    with app(tmp_path / "other", environ={"NO_COLOR": ""}) as shown:
        shown.wait_for(READY)
        assert colours_of(bytes(shown.raw)), "an empty value asks for nothing (no-color.org)"


@pytest.mark.parametrize("terminal", ["linux", "vt100", "screen", "tmux", "xterm"])
def test_sixteen_colours_on_plain_terminals(tmp_path: Path, terminal: str) -> None:
    with app(tmp_path, environ={"TERM": terminal}) as shown:
        shown.wait_for(READY)
        typed(shown, "2 bar g\t5 C")
        shown.wait_for("superheat")
        assert b"38;5;" not in shown.raw
        assert b"38;2;" not in shown.raw
        assert b"48;" not in shown.raw


@pytest.mark.parametrize(
    ("arguments", "environ"),
    [(["--ascii"], {}), ([], {"LANG": "C"}), ([], {"PYTHONIOENCODING": "latin-1"})],
)
def test_ascii_alone(tmp_path: Path, arguments: list[str], environ: dict[str, str]) -> None:
    with app(tmp_path, *arguments, refrigerant="R-454C", environ=environ) as shown:
        shown.wait_for(READY)
        # The degree sign as a Latin-1 terminal sends it, as a UTF-8 one does, and a tab.
        shown.send(b"2 bar g\t5 \xb0C\t9 \xc2\xb0C\t")
        shown.wait_for("not understood")
        for number in (2, 4, 5, 6, 7, 8, 8, 9, 9, 1, 1, 3):
            shown.send(KEY[number])
            shown.settle(0.05)
        shown.send("\x07")
        shown.settle(0.3)
        assert max(shown.raw) <= 126


def test_bytes_that_are_no_characters_change_nothing_else(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        shown.send(b"2\xff\xfe bar g\x00\t5 C")
        shown.wait_for("not understood")
        shown.send(UP + b"\x15" + b"2 bar g")
        shown.wait_for("superheat")


def test_the_first_frame_paints_before_the_helper_is_ready(tmp_path: Path) -> None:
    with app(tmp_path, environ=with_helper(tmp_path, "import time; time.sleep(3)")) as shown:
        shown.wait_for(READY)
        typed(shown, "2 bar g\t5 C")
        shown.wait_for("2.00 bar g         3.01 bar abs")
        shown.wait_for("Working.")
        assert "superheat  " not in shown.screen_text()
        shown.wait_for("superheat  ")


def test_a_killed_helper_is_survived_with_a_word_and_the_next_key_works(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        typed(shown, "2 bar g\t5 C")
        shown.wait_for("superheat  ")
        first = helper_of(shown)
        os.kill(first, signal.SIGKILL)
        shown.wait_for("The property helper ended; it is started again.")
        typed(shown, "\t9 bar g\t30 C")
        shown.wait_for("subcooling  ")
        assert helper_of(shown) != first
        assert "5 C" in shown.line_with("suction pipe")


def test_a_helper_that_hangs_is_survived_with_a_word_and_the_next_key_works(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        typed(shown, "2 bar g\t5 C")
        shown.wait_for("superheat  ")
        hanging = helper_of(shown)
        os.kill(hanging, signal.SIGSTOP)
        typed(shown, "\t9 bar g")
        # No figure of the readings before stands beside the new reading.
        shown.wait_for("Working.")
        assert "superheat  " not in shown.screen_text()
        shown.wait_for("The property helper did not answer in time; it is started again.")
        typed(shown, "\t30 C")
        shown.wait_for("subcooling  ")
        assert helper_of(shown) != hanging
        assert "9 bar g" in shown.line_with("liquid pressure")


def test_garbage_on_the_helpers_pipe_is_survived_and_not_shown(tmp_path: Path) -> None:
    now = tmp_path / "now"
    speak = (
        "import os, threading, time\nanswers = os.dup(1)\ndef speak():\n"
        f"    while not os.path.exists({str(now)!r}): time.sleep(0.02)\n"
        f"    os.unlink({str(now)!r})\n"
        '    os.write(answers, b\'\\x1b[2J{"number": 1, "answer": GARBAGE\\n\')\n'
        "threading.Thread(target=speak, daemon=True).start()"
    )
    with app(tmp_path, environ=with_helper(tmp_path, speak)) as shown:
        shown.wait_for(READY)
        typed(shown, "2 bar g\t5 C")
        shown.wait_for("superheat  ")
        first = helper_of(shown)
        now.touch()
        shown.wait_for("The property helper spoke unasked; it is started again.")
        typed(shown, "\t9 bar g\t30 C")
        shown.wait_for("subcooling  ")
        assert helper_of(shown) != first
        assert b"GARBAGE" not in shown.raw


def test_the_helpers_noise_never_reaches_the_screen(tmp_path: Path) -> None:
    noise = "def cry():\n    while True: time.sleep(0.1); os.write(2, b'NOISE')"
    start = "threading.Thread(target=cry, daemon=True).start()"
    environ = with_helper(tmp_path, f"import os, threading, time\n{noise}\n{start}")
    with app(tmp_path, environ=environ) as shown:
        shown.wait_for(READY)
        typed(shown, "2 bar g\t5 C")
        shown.wait_for("superheat  ")
        log = tmp_path / "gaugeside" / "helper.log"
        shown.wait_for(lambda _: log.exists() and "NOISE" in log.read_text())
        assert b"NOISE" not in shown.raw


def test_two_programs_keep_at_once(tmp_path: Path) -> None:
    with app(tmp_path) as one, app(tmp_path) as two:
        one.wait_for(READY)
        two.wait_for(READY)
        for turn in range(1, 5):
            one.send(f"\x15{turn} bar g\r")
            two.send(f"\x15{turn + 10} bar g\r")
            one.pump(0.05)
            two.pump(0.05)
            for shown in (one, two):
                shown.wait_for(lambda t: re.search(r"Kept at .* as entry", t.screen_text()) is not None)
            deadline = time.monotonic() + PATIENCE
            while len(readings_kept(tmp_path)) < 2 * turn:
                assert time.monotonic() < deadline, readings_kept(tmp_path)
                one.pump(0.02)
                two.pump(0.02)
    pressures = sorted(int(entry["suction_pressure"].split()[0]) for entry in readings_kept(tmp_path))
    assert pressures == [1, 2, 3, 4, 11, 12, 13, 14]


def test_the_forms_come_back_after_kill_nine_of_the_program(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        shown.wait_for(READY)
        typed(shown, "2 bar g\thalf ty")
        assert draft_holds(tmp_path, "half ty")
        helper_of(shown)
        shown.signal(signal.SIGKILL)
        shown.wait_end()
        no_process_left(shown)
    with app(tmp_path) as shown:
        shown.wait_for("half ty")
