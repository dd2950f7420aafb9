"""The command as a process of its own: what reaches standard output, in any locale and whoever reads it."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

COMMAND = [sys.executable, "-m", "gaugeside"]


def environment(home: Path, **changes: str) -> dict[str, str]:
    """An environment that owes nothing to the machine but its PATH."""
    return {
        "PATH": os.environ.get("PATH", os.defpath), "HOME": str(home), "GAUGESIDE_HOME": str(home / "kept"),
        "LANG": "C.UTF-8", **changes,
    }  # fmt: skip


def run(home: Path, *words: str, **changes: str) -> subprocess.CompletedProcess[bytes]:
    return subprocess.run(
        [*COMMAND, *words], env=environment(home, **changes), capture_output=True, stdin=subprocess.DEVNULL, check=False
    )


@pytest.mark.parametrize("refrigerant", ["R-448A", "R-134a"])
def test_standard_output_is_json_and_nothing_else(tmp_path: Path, refrigerant: str) -> None:
    """The property library prints a line of its own from C++; it must not meet the answer."""
    done = run(tmp_path, "saturation", refrigerant, "12.4 bar g", "--json")
    assert (done.returncode, done.stderr) == (0, b"")
    assert json.loads(done.stdout)["refrigerant"] == refrigerant
    assert done.stdout.isascii()
    assert done.stdout.count(b"\n") == 1
    assert list(tmp_path.iterdir()) == []


def test_refusal_as_json_is_the_only_output(tmp_path: Path) -> None:
    done = run(tmp_path, "saturation", "R-448A", "12.4 brg", "--json")
    assert (done.returncode, done.stderr) == (2, b"")
    assert json.loads(done.stdout)["error"]["field"] == "reading"
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    "changes",
    [{"LC_ALL": "C"}, {"LANG": "C"}, {"PYTHONIOENCODING": "ascii"}, {"PYTHONIOENCODING": "latin-1"}],
)
@pytest.mark.parametrize(
    "words",
    [
        ["saturation", "R-448A", "12.4 bar g"], ["saturation", "R-4544", "−5 °C"], ["component", "--help"],
        ["refrigerants", "R-4544", "--json"],
    ],
)  # fmt: skip
def test_a_poor_locale_gets_ascii(tmp_path: Path, words: list[str], changes: dict[str, str]) -> None:
    done = run(tmp_path, *words, **changes)
    assert done.returncode in (0, 2)
    assert done.stdout.isascii()
    assert done.stderr.isascii()
    assert b"Traceback" not in done.stderr
    # Every character of our own has a spelling; none falls back to a question mark.
    written = done.stdout + done.stderr
    assert written.count(b"?") == (1 if b"Did you mean" in written else 0)


def test_a_rich_locale_gets_degree_signs(tmp_path: Path) -> None:
    assert "26.5 °C" in run(tmp_path, "saturation", "R-448A", "12.4 bar g").stdout.decode("utf-8")
    assert "26.5 C" in run(tmp_path, "--ascii", "saturation", "R-448A", "12.4 bar g").stdout.decode("ascii")
    assert run(tmp_path, "--ascii", "convert", "5 C").stdout.isascii()


@pytest.mark.parametrize("words", [["convert", "12 bar"], ["refrigerants"], ["--help"]])
def test_a_reader_that_went_away_is_no_fault(tmp_path: Path, words: list[str]) -> None:
    reader, writer = os.pipe()
    os.close(reader)
    try:
        done = subprocess.run(
            [*COMMAND, *words], env=environment(tmp_path), stdout=writer, stderr=subprocess.PIPE, check=False
        )
    finally:
        os.close(writer)
    assert (done.returncode, done.stderr) == (0, b"")


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="only some systems have a device that is always full")
def test_an_output_that_takes_no_more_is_said_in_a_sentence(tmp_path: Path) -> None:
    for words in (["convert", "12 bar"], ["refrigerants"], ["--help"]):
        with open("/dev/full", "wb") as full:
            done = subprocess.run(
                [*COMMAND, *words], env=environment(tmp_path), stdout=full, stderr=subprocess.PIPE, check=False
            )
        assert done.returncode == 1
        assert done.stderr == b"The answer cannot be written: no space left on device.\n"


def test_bytes_that_are_no_text_are_refused(tmp_path: Path) -> None:
    for words in (["convert", b"5 \xff bar"], ["saturation", b"R-\xff", "5 C"], [b"--\xff"], ["refrigerants", b"\xff"]):
        done = subprocess.run(
            [*COMMAND, *words, "--json"], env=environment(tmp_path), capture_output=True, check=False
        )  # fmt: skip
        assert done.returncode == 2
        assert done.stderr == b""
        assert json.loads(done.stdout)["error"]["message"]


def test_two_processes_that_keep_at_once_lose_nothing(tmp_path: Path) -> None:
    running = [
        subprocess.Popen(
            [*COMMAND, "saturation", "R-134a", f"{celsius} C", "--keep", "--json"],
            env=environment(tmp_path), stdout=subprocess.PIPE, stderr=subprocess.PIPE,
        )
        for celsius in (1, 2, 3)
    ]  # fmt: skip
    kept = sorted(json.loads(process.communicate()[0])["kept"] for process in running)
    assert kept == ["kept as entry 1", "kept as entry 2", "kept as entry 3"]
    listed = json.loads(run(tmp_path, "logbook", "list", "--json").stdout)["entries"]
    assert {entry["readings"]["reading"] for entry in listed} == {"1 C", "2 C", "3 C"}
