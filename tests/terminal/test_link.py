"""The line drops, freezes, ends: the program goes within a second, takes its helper along, and loses nothing typed."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from terminal.apps import AT_ONCE, READY, app, draft_holds, helper_of, is_restored, no_process_left
from terminal.harness import PATIENCE, Terminal, app_command, clean_environ


def typed(shown: Terminal, text: str) -> int:
    """Type a text into the first field, see it, and return the helper's process number."""
    shown.wait_for(READY)
    shown.send(text)
    shown.wait_for(text)
    return helper_of(shown)


def ends_at_once(shown: Terminal) -> int:
    """Wait for the end, which must come at once; return the exit status."""
    before = time.monotonic()
    status = shown.wait_end(AT_ONCE)
    no_process_left(shown)
    assert time.monotonic() - before < 2 * AT_ONCE
    return status


def test_sigterm_restores_the_terminal(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        typed(shown, "half ty")
        shown.signal(signal.SIGTERM)
        assert ends_at_once(shown) == 128 + signal.SIGTERM
        assert is_restored(shown)
        assert draft_holds(tmp_path, "half ty", 0.1)


def test_a_hangup_ends_both_processes_and_keeps_the_form(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        typed(shown, "half ty")
        # Within the pause before a draft is written.
        shown.send("p")
        shown.wait_for("half typ")
        shown.hang_up()
        assert ends_at_once(shown) == 128 + signal.SIGHUP
        assert draft_holds(tmp_path, "half typ", 0.1)
    with app(tmp_path) as shown:
        shown.wait_for("half typ")


def test_a_line_that_freezes_and_then_closes(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        typed(shown, "half ty")
        # Far more than the terminal and the program's own queue hold: painting stands still.
        for _ in range(120):
            shown.send(b"\x0c")
            time.sleep(0.005)
        shown.send("p")
        time.sleep(1.0)
        assert shown.process.poll() is None
        shown.hang_up()
        assert ends_at_once(shown) == 128 + signal.SIGHUP
        assert draft_holds(tmp_path, "half ty", 0.1)


def test_a_line_that_freezes_and_thaws_goes_on(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        typed(shown, "2 bar g")
        for _ in range(60):
            shown.send(b"\x0c")
            time.sleep(0.005)
        time.sleep(0.5)
        shown.send("\t5 C")
        shown.wait_for("superheat  ")


def test_the_processor_rests_when_nothing_is_typed(tmp_path: Path) -> None:
    with app(tmp_path) as shown:
        helper = typed(shown, "2 bar g")
        # What the start and the last key have set going may take a busy machine a while.
        deadline = time.monotonic() + PATIENCE
        while not rests(shown, helper):
            assert time.monotonic() < deadline, "it never rests"


def rests(shown: Terminal, helper: int) -> bool:
    """Tell whether nothing is sent and next to nothing computed for two seconds."""
    before = shown.cpu_seconds(), shown.cpu_seconds(helper)
    shown.mark()
    shown.pump(2.0)
    return (
        shown.bytes_since_mark() == 0
        and shown.cpu_seconds() - before[0] < 0.2
        and shown.cpu_seconds(helper) - before[1] < 0.1
    )


def test_nohup_does_not_keep_it_alive_behind_a_closed_terminal(tmp_path: Path) -> None:
    ignore = "import os, signal, sys; signal.signal(signal.SIGHUP, signal.SIG_IGN); os.execv(sys.argv[1], sys.argv[1:])"
    ignoring = [sys.executable, "-c", ignore]
    (tmp_path / "gaugeside").mkdir()
    with Terminal([*ignoring, *app_command()], tmp_path) as shown:
        typed(shown, "half ty")
        shown.hang_up()
        assert ends_at_once(shown) == 128 + signal.SIGHUP
        assert draft_holds(tmp_path, "half ty", 0.1)


def test_the_end_of_the_input_alone_ends_it(tmp_path: Path) -> None:
    # Its screen is one terminal, its keys another, which closes: no hangup comes.
    script = (
        "import os, pty, subprocess, sys\n"
        "keys, program_side = pty.openpty()\n"
        "program = subprocess.Popen(sys.argv[1:], stdin=program_side)\n"
        "os.close(program_side)\n"
        "os.read(0, 1)\n"
        "os.close(keys)\n"
        "sys.exit(program.wait() != 129)\n"
    )
    with Terminal([sys.executable, "-c", script, *app_command()], tmp_path) as shown:
        shown.wait_for(READY)
        shown.send("\n")
        assert ends_at_once(shown) == 0


@pytest.mark.parametrize("victim", ["program", "helper while it loads"])
def test_kill_nine_leaves_nobody_behind(tmp_path: Path, victim: str) -> None:
    with app(tmp_path) as shown:
        if victim == "program":
            typed(shown, "half ty")
            assert draft_holds(tmp_path, "half ty")
            shown.signal(signal.SIGKILL)
            assert ends_at_once(shown) == -signal.SIGKILL
            return
        os.kill(helper_of(shown), signal.SIGKILL)
        shown.wait_for(READY)
        shown.send("2 bar g\t5 C")
        shown.wait_for("superheat  ")


@pytest.mark.parametrize(
    ("stdin", "terminal"), [("no terminal", "xterm"), ("end of input", "xterm"), ("terminal", "dumb"), ("terminal", "")]
)
def test_where_no_screen_can_be_it_points_to_the_commands(tmp_path: Path, stdin: str, terminal: str) -> None:
    if stdin == "terminal":
        with Terminal(app_command(), tmp_path, environ={"TERM": terminal}) as shown:
            assert shown.wait_end() == 2
            assert "one-shot commands" in " ".join(shown.screen_text().split())
            assert b"\x1b" not in shown.raw
        return
    done = subprocess.run(
        app_command(),
        input="" if stdin == "end of input" else None,
        stdin=subprocess.DEVNULL if stdin == "no terminal" else None,
        capture_output=True,
        text=True,
        env=clean_environ(tmp_path, {"TERM": terminal}),
        timeout=PATIENCE,
        check=False,
    )
    assert done.returncode == 2
    assert "gaugeside saturation" in done.stderr
    assert done.stdout == ""


def test_a_hangup_takes_the_demo_s_folder_along(tmp_path: Path) -> None:
    with app(tmp_path, "--demo", environ={"TMPDIR": str(tmp_path)}) as shown:
        shown.wait_for("demo rack")
        assert len(list(tmp_path.glob("gaugeside-demo-*"))) == 1
        shown.hang_up()
        ends_at_once(shown)
    assert list(tmp_path.glob("gaugeside-demo-*")) == []
