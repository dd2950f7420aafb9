"""The harness itself, on programs of a few lines: what it says of a terminal must be so."""

from __future__ import annotations

import os
import signal
import sys
import termios
import time
from pathlib import Path

import pytest

from terminal.harness import FUNCTION_KEYS, PATIENCE, Terminal, clean_environ

PRELUDE = "import os, signal, subprocess, sys, termios, time, tty\n"
ECHO = (
    PRELUDE
    + """
tty.setraw(0)
os.write(1, b"ready")
while True:
    key = os.read(0, 64)
    if key == b"q":
        break
    os.write(1, b"\\r\\n" + repr(key).encode())
"""
)


def terminal(home: Path, program: str, **options: object) -> Terminal:
    return Terminal([sys.executable, "-c", program], home, **options)  # type: ignore[arg-type]


def test_keys_arrive_and_the_screen_shows_the_answer(tmp_path: Path) -> None:
    with terminal(tmp_path, ECHO) as shown:
        shown.wait_for("ready")
        shown.mark()
        shown.send("12,4 °")
        shown.wait_for("\\xc2\\xb0")
        assert shown.lines()[:2] == ["ready", repr("12,4 °".encode())]
        assert shown.line_with("12,4").startswith("b'")
        assert shown.bytes_since_mark() == len(b"\r\n" + repr("12,4 °".encode()).encode())
        shown.send("q")
        assert shown.wait_end() == 0


@pytest.mark.parametrize("encoding", FUNCTION_KEYS)
def test_function_keys_in_each_encoding(tmp_path: Path, encoding: str) -> None:
    # First and fifth key by xterm's control sequences document (PC-style function keys) and console_codes(4).
    expected = {
        "xterm": (b"\x1bOP", b"\x1b[15~"),
        "tilde": (b"\x1b[11~", b"\x1b[15~"),
        "console": (b"\x1b[[A", b"\x1b[[E"),
    }
    assert (FUNCTION_KEYS[encoding][1], FUNCTION_KEYS[encoding][5]) == expected[encoding]
    with terminal(tmp_path, ECHO) as shown:
        shown.wait_for("ready")
        for number in (1, 5, 12):
            shown.send(FUNCTION_KEYS[encoding][number])
            shown.wait_for(repr(FUNCTION_KEYS[encoding][number]))


def test_environment_owes_nothing_to_the_machine(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("NO_COLOR", "COLORTERM", "XDG_CONFIG_HOME", "LC_ALL", "TEXTUAL_THEME"):
        monkeypatch.setenv(name, "leak")
    program = "import os; [print(n, v) for n, v in sorted(os.environ.items())]; print('end')"
    with terminal(tmp_path, program, columns=200, environ={"TERM": "linux", "TZ": None}) as shown:
        shown.wait_for("end")
        text = shown.screen_text()
    assert "leak" not in text
    assert f"GAUGESIDE_HOME {tmp_path / 'gaugeside'}" in text
    assert f"\nHOME {tmp_path}\n" in text
    assert "\nTERM linux" in text
    assert "\nTZ" not in text
    assert set(clean_environ(tmp_path)) == {"PATH", "HOME", "GAUGESIDE_HOME", "TERM", "LANG", "TZ"}


def test_size_and_resize_reach_the_program(tmp_path: Path) -> None:
    program = (
        PRELUDE + "say = lambda *a: os.write(1, (str(os.get_terminal_size()) + '\\n').encode())\n"
        "signal.signal(signal.SIGWINCH, say); say()\n"
        "while True: time.sleep(1)"
    )
    with terminal(tmp_path, program, columns=70, rows=20) as shown:
        shown.wait_for("columns=70, lines=20")
        shown.resize(40, 10)
        shown.wait_for(lambda t: "columns=40, lines=10" in t.screen_text().replace("\n", ""))
        assert len(shown.lines()) == 10


def test_settings_and_modes_tell_a_clean_end_from_a_dirty_one(tmp_path: Path) -> None:
    opening = (
        PRELUDE
        + r"before = termios.tcgetattr(0); tty.setraw(0);"
        + r'os.write(1, b"\x1b[?1049h\x1b[?1000;1006h\x1b[?25lin");'
    )
    closing = r'os.read(0, 1); os.write(1, b"\x1b[?1000;1006l\x1b[?25h\x1b[?1049l"); termios.tcsetattr(0, 0, before)'
    with terminal(tmp_path, opening + closing) as clean:
        clean.wait_for("in")
        assert clean.modes() == {1049, 1000, 1006}
        assert not clean.attributes()[3] & termios.ECHO
        clean.send("x")
        assert clean.wait_end() == 0
        assert clean.modes() == {25}
        assert clean.attributes() == clean.attributes_before
    with terminal(tmp_path, opening) as dirty:
        dirty.wait_end()
        assert 1049 in dirty.modes()
        assert dirty.attributes() != dirty.attributes_before


def test_what_the_emulator_does_not_know_is_not_on_the_screen(tmp_path: Path) -> None:
    program = PRELUDE + (
        'parts = [b"a\\x1b[>1u", b"b\\x1b[?2026$p", b"c\\x1b]52;c;eA==\\x07", b"d\\x1b]0;title\\x1b\\\\", '
        'b"e\\x1bP+q\\x1b\\\\f", '
        'b"\\x1b[", b"1mg", b"\\x1b", b"[0mh\\xc2", b"\\xb0", b"\\x1b]0;ti", b"tle\\x1b", b"\\\\i"]\n'
        "for part in parts: os.write(1, part); time.sleep(0.02)"
    )
    with terminal(tmp_path, program) as shown:
        shown.wait_end()
        assert shown.lines()[0] == "abcdefgh°i"
        assert shown.screen.buffer[0][6].bold
        assert not shown.screen.buffer[0][7].bold


def test_hang_up_ends_the_program_by_its_signal(tmp_path: Path) -> None:
    with terminal(tmp_path, ECHO) as shown:
        shown.wait_for("ready")
        shown.hang_up()
        assert shown.wait_end() == -signal.SIGHUP


def test_a_test_that_does_not_wait_is_a_frozen_link(tmp_path: Path) -> None:
    program = PRELUDE + "os.write(1, b'go'); os.read(0, 1)\nfor n in range(200): os.write(1, b'x' * 1000)\n"
    with terminal(tmp_path, program) as shown:
        shown.wait_for("go")
        shown.send("\n")
        time.sleep(0.3)
        assert shown.process.poll() is None, "200 kB do not fit into a terminal that nobody reads"
        shown.mark()
        assert shown.wait_end() == 0
        assert shown.bytes_since_mark() >= 200_000


def test_signals_and_exit_status(tmp_path: Path) -> None:
    with terminal(tmp_path, ECHO) as shown:
        shown.wait_for("ready")
        shown.signal(signal.SIGTERM)
        assert shown.wait_end() == -signal.SIGTERM
    with terminal(tmp_path, "raise SystemExit(3)") as shown:
        assert shown.wait_end() == 3


def test_waiting_in_vain_shows_the_screen(tmp_path: Path) -> None:
    with terminal(tmp_path, ECHO, columns=20, rows=2) as shown:
        shown.wait_for("ready")
        with pytest.raises(AssertionError, match=r"'superheat'; 0\.1 s passed; the screen was\n\+-{20}\+\n\|ready"):
            shown.wait_for("superheat", timeout=0.1)
        with pytest.raises(AssertionError, match="not on the screen"):
            shown.line_with("superheat")
    with terminal(tmp_path, "print('last words')") as shown:
        shown.wait_for("last words")
        with pytest.raises(AssertionError, match="ended with 0"):
            shown.wait_for("more")


def has_ended(pid: int) -> bool:
    """Whether a process is gone, or only waits for whoever adopted it to take note."""
    try:
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] == "Z"
    except OSError:
        return True


def test_no_process_is_left_whatever_it_does(tmp_path: Path) -> None:
    program = PRELUDE + (
        "signal.signal(signal.SIGHUP, signal.SIG_IGN); signal.signal(signal.SIGTERM, signal.SIG_IGN)\n"
        "sleep = [sys.executable, '-c', 'import time; time.sleep(600)']\n"
        "subprocess.Popen(sleep, start_new_session=True); print('ready', flush=True); time.sleep(600)"
    )
    with terminal(tmp_path, program) as shown:
        shown.wait_for("ready")
        shown.wait_for(lambda t: any("time.sleep(600)" in command for command in t.children().values()))
        everyone = shown.processes()
        assert shown.process.pid in everyone
        assert len(everyone) == 2
        assert shown.cpu_seconds() < 5
        os.kill(shown.process.pid, signal.SIGKILL)
        shown.wait_end()
        assert len(shown.children()) == 1, "one whose parent is gone is still found"
    assert shown.processes() == {}
    # An orphan's new parent takes its leave a moment later.
    deadline = time.monotonic() + PATIENCE
    while not all(has_ended(pid) for pid in everyone):
        assert time.monotonic() < deadline
        time.sleep(0.01)
    shown.close()


def test_settle_counts_what_came(tmp_path: Path) -> None:
    with terminal(tmp_path, ECHO) as shown:
        shown.wait_for("ready")
        assert shown.settle() == 0
        shown.send("a")
        counted, deadline = 0, time.monotonic() + PATIENCE
        while b"b'a'" not in shown.raw:
            assert time.monotonic() < deadline
            counted += shown.settle()
        assert counted == len(b"\r\nb'a'")


def test_a_program_that_never_stops_sending_does_not_stop_the_test(tmp_path: Path) -> None:
    with terminal(tmp_path, PRELUDE + "while True: os.write(1, b'\\x1b[Hxxxx' * 100)") as shown:
        shown.wait_for("xxxx")
        with pytest.raises(AssertionError, match="still sending"):
            shown.settle(quiet=0.5, timeout=0.2)


def test_the_terminal_belongs_to_the_program(tmp_path: Path) -> None:
    program = (
        PRELUDE + "print(os.getsid(0) == os.getpid(), os.tcgetpgrp(0) == os.getpgrp(), os.ttyname(2) == os.ttyname(0))"
    )
    with terminal(tmp_path, program) as shown:
        shown.wait_for("True True True")
