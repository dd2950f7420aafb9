"""The program never touches a network: not its own code, not a library's, not in the helper process.

Two proofs. Inside the interpreter every event of the socket module ends the run. Around the whole process, and all it
starts, the kernel ends whoever asks for a socket that is not a local one.
"""

from __future__ import annotations

import json
import os
import socket
import subprocess
import sys
from pathlib import Path

from terminal.calls import Rule, refusing
from terminal.harness import Terminal, clean_environ

ENDED_BY_THE_HOOK = 97
HOOK = f"""
import os, runpy, sys
def watch(event, arguments):
    # The screen library's event loop wakes itself through a pair of sockets that has no address.
    local = event == "socket.__new__" and arguments[1] == 1 and "--local" in os.environ.get("WATCH", "")
    if (event.startswith("socket.") or event.startswith(("urllib.", "http.", "ftplib.", "smtplib."))) and not local:
        os.write(2, f"NETWORK {{event}} {{arguments}}".encode())
        os._exit({ENDED_BY_THE_HOOK})
sys.addaudithook(watch)
"""
# socket(2) of any family but the local one ends the process.
NO_SOCKET = [Rule("socket", error=None, values=(socket.AF_UNIX,), unless=True)]
RUN = """
sys.argv[0] = "gaugeside"
runpy.run_module(MODULE, run_name="__main__", alter_sys=True)
"""

COMMANDS = [
    ["saturation", "R-454C", "12.4 bar g", "--json", "--keep"],
    ["superheat", "R-448A", "--suction-pressure", "2.6 bar g", "--suction-temperature", "2 C", "--picture"],
    ["component", "condenser", "R-134a", "--inlet", "9.1 bar g, 68 C", "--outlet", "9 bar g, SC 4 K",
     "--mass-flow", "0.14 kg/s"],
    ["stream", "water", "--inlet", "12 C", "--outlet", "7 C", "--flow", "10 m3/h"],
    ["machine", "R-134a", "--suction-pressure", "1 bar g", "--discharge-pressure", "9 bar g",
     "--suction-temperature", "0 C", "--discharge-temperature", "70 C"],
    ["convert", "12.4 bar g"],
    ["refrigerants", "propane"],
    ["table", "R-410A", "--from", "0 C", "--to", "5 C"],
    ["logbook", "list"],
    ["logbook", "export", "--to", "logbook.json"],
    ["logbook", "export", "--csv"],
    ["logbook", "import", "logbook.json"],
    ["batch", "superheat", "R-134a", "readings.csv"],
    ["--help"],
    ["saturation", "R-134a", "http://example.org/ C"],
]  # fmt: skip


def environment(home: Path, **more: str) -> dict[str, str]:
    return {**clean_environ(home), **more}


def watched(code: str, home: Path, *words: str, **options: object) -> subprocess.CompletedProcess[bytes]:
    return subprocess.run(
        [sys.executable, "-c", code, *words],
        env=environment(home), capture_output=True, timeout=60, check=False, **options,
    )  # type: ignore[call-overload,no-any-return]  # fmt: skip


def caged() -> str:
    """The kernel's filter, inherited by every child; where it is not known the other proof runs."""
    return refusing(NO_SOCKET)


def test_the_watch_itself_sees_a_socket(tmp_path: Path) -> None:
    for ask in ("socket.socket()", "socket.getaddrinfo('localhost', 80)", "socket.socketpair()"):
        done = watched(f"{HOOK}\nimport socket\n{ask}", tmp_path)
        assert done.returncode == ENDED_BY_THE_HOOK, ask


def test_the_cage_itself_holds(tmp_path: Path) -> None:
    assert watched(f"{caged()}\nimport socket\nsocket.socketpair()", tmp_path).returncode == 0
    for family in ("AF_INET", "AF_INET6"):
        done = watched(f"{caged()}\nimport socket\nsocket.socket(socket.{family})", tmp_path)
        assert done.returncode == -31, (family, done)
    child = (
        "import subprocess, sys\nsys.exit(subprocess.call([sys.executable, '-c', 'import socket as s; s.socket()']))"
    )
    assert watched(f"{caged()}\n{child}", tmp_path).returncode == -31 % 256


def test_no_command_opens_a_socket(tmp_path: Path) -> None:
    """All commands one after the other in one interpreter, watched from inside and outside."""
    run_all = """
import contextlib, io, json
from gaugeside.cli import main
codes = []
for words in json.loads(sys.argv[1]):
    with contextlib.redirect_stdout(io.StringIO()) as said, contextlib.redirect_stderr(said):
        codes.append([main(words), said.getvalue()])
print(json.dumps(codes))
"""
    (tmp_path / "readings.csv").write_text("suction pressure,note\n2 bar g,http://example.org/\n")
    done = watched(f"{HOOK}{caged()}{run_all}", tmp_path, json.dumps(COMMANDS), cwd=tmp_path)
    assert done.returncode == 0, done
    codes = json.loads(done.stdout)
    assert [code for code, _ in codes] == [0] * (len(COMMANDS) - 1) + [2], codes


def test_the_helper_opens_no_socket(tmp_path: Path) -> None:
    log = tmp_path / "helper.log"
    request = {
        "check": "saturation", "refrigerant": "R-454C", "values": {"reading": {"temperature": 280.0}},
        "atmosphere": 101325.0, "site": "", "datum": "iir", "grid": [273.15, 1.0],
    }  # fmt: skip
    code = HOOK + caged() + RUN.replace("MODULE", "'gaugeside.engine.worker'")
    process = subprocess.Popen(
        [sys.executable, "-c", code, str(log), str(tmp_path)],
        env=environment(tmp_path), stdin=subprocess.PIPE, stdout=subprocess.PIPE,
    )  # fmt: skip
    assert process.stdin is not None
    assert process.stdout is not None
    with process:
        assert b"hello" in process.stdout.readline()
        assert b"ready" in process.stdout.readline()
        process.stdin.write(json.dumps({"number": 1, "request": request}).encode() + b"\n")
        process.stdin.flush()
        reply = json.loads(process.stdout.readline())
        process.stdin.close()
    assert reply["answer"]["findings"]["dew_pressure"] > 0
    assert process.returncode == 0
    assert "NETWORK" not in log.read_text()


def test_the_app_and_its_helper_open_no_socket(tmp_path: Path) -> None:
    code = HOOK + caged() + RUN.replace("MODULE", "'gaugeside'")
    folder = tmp_path / "gaugeside"
    folder.mkdir()
    (folder / "settings.json").write_text('{"refrigerant": "R-134a"}')
    with Terminal([sys.executable, "-c", code], tmp_path, environ={"WATCH": "--local"}) as terminal:
        terminal.wait_for("suction pressure")
        terminal.send("2 bar g")
        terminal.wait_for("saturated suction")
        helpers = set(terminal.children())
        for key in ("\r", "\x1b[17~", "\x1b[18~", "\x1bOP", "\x1bOP"):
            terminal.send(key)
            terminal.settle()
        terminal.wait_for("Logbook:")
        assert set(terminal.children()) == helpers, "the helper is the one of the start"
        for process in terminal.processes():
            links = [os.readlink(f"/proc/{process}/fd/{fd}") for fd in os.listdir(f"/proc/{process}/fd")]
            inodes = {link[8:-1] for link in links if link.startswith("socket:[")}
            for table in ("tcp", "tcp6", "udp", "udp6", "raw"):
                lines = Path(f"/proc/{process}/net/{table}")
                known = {line.split()[9] for line in lines.read_text().splitlines()[1:]} if lines.exists() else set()
                assert not inodes & known
        terminal.send("\x1b[21~")
        assert terminal.wait_end() == 0
