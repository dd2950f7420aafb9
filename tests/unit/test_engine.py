"""The helper process and its client: whatever the helper does, the newest question of each slot is answered or told."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import textwrap
import threading
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from gaugeside.engine import Engine, Reply

# Waits for a slow machine; nothing is measured with it.
PATIENCE = 20.0

# Answers each question with its own words after the seconds it names; a question may name another thing to do.
HELPER = """
import json, os, sys, time
count = open(sys.argv[1], "a")
count.write("start\\n"); count.flush()
def send(message):
    sys.stdout.write(json.dumps(message) + "\\n"); sys.stdout.flush()
send({"hello": os.getpid()})
send({"ready": os.getpid()})
for line in sys.stdin:
    asked = json.loads(line)
    question = asked["request"]
    count.write(question["word"] + "\\n"); count.flush()
    time.sleep(question.get("seconds", 0))
    first = open(sys.argv[1]).read().count("start") == 1
    act = question.get("act", "") if first or question.get("always") else ""
    if act == "crash":
        os._exit(3)
    if act == "garbage":
        sys.stdout.write("property library says hello\\n"); sys.stdout.flush()
    if act == "list":
        sys.stdout.write("[1, 2]\\n"); sys.stdout.flush()
    if act == "other":
        asked["number"] -= 1
    send({"number": asked["number"], "answer": {"word": question["word"]}})
    if act == "unasked":
        send({"number": asked["number"], "answer": {"word": "again"}})
"""


class Desk:
    """An engine with a helper of a few lines, and all it reported."""

    def __init__(self, folder: Path, time_limit: float = PATIENCE, helper: str = HELPER) -> None:
        self.folder = folder
        self.replies: list[Reply] = []
        self.words: list[str] = []
        (folder / "helper.py").write_text(helper)
        self.told = folder / "told"
        command = [sys.executable, "-S", str(folder / "helper.py"), str(self.told)]
        self.engine = Engine(self.replies.append, self.words.append, command=command, time_limit=time_limit)

    def wait(self, condition: Callable[[], object], what: str) -> None:
        deadline = time.monotonic() + PATIENCE
        while not condition():
            assert time.monotonic() < deadline, f"waited in vain for {what}; {self.words} {self.replies}"
            time.sleep(0.01)

    def answer(self, slot: str, word: str, **more: object) -> Reply:
        number = self.engine.ask(slot, {"word": word, **more})
        self.wait(lambda: any(reply.number == number for reply in self.replies), f"an answer to {word}")
        return next(reply for reply in self.replies if reply.number == number)

    def questions(self) -> list[str]:
        return [line for line in self.told.read_text().split() if line != "start"]


@pytest.fixture
def desk(tmp_path: Path) -> Iterator[Desk]:
    made = Desk(tmp_path)
    made.engine.start()
    yield made
    made.engine.close()


def is_alive(pid: int) -> bool:
    try:
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] != "Z"
    except OSError:
        return False


def test_an_answer_comes_back_to_its_question(desk: Desk) -> None:
    assert desk.answer("superheat", "one") == Reply("superheat", 1, answer={"word": "one"})
    assert desk.answer("saturation", "two") == Reply("saturation", 2, answer={"word": "two"})
    assert desk.words == [""]


def test_of_one_slot_only_the_newest_question_is_asked_and_answered(desk: Desk) -> None:
    desk.answer("other", "warm up")
    first = desk.engine.ask("superheat", {"word": "first", "seconds": 0.3})
    desk.wait(lambda: "first" in desk.questions(), "the first question to be under way")
    dropped = [desk.engine.ask("superheat", {"word": f"dropped{n}"}) for n in range(5)]
    other = desk.engine.ask("saturation", {"word": "beside"})
    newest = desk.engine.ask("superheat", {"word": "newest"})
    desk.wait(lambda: {other, newest} <= {reply.number for reply in desk.replies}, "both slots")
    answered = {reply.number for reply in desk.replies}
    assert first not in answered, "an answer to readings that are no longer on the form"
    assert not answered.intersection(dropped)
    assert not [word for word in desk.questions() if word.startswith("dropped")]


def test_what_is_forgotten_is_not_answered(desk: Desk) -> None:
    desk.answer("other", "warm up")
    forgotten = desk.engine.ask("superheat", {"word": "forgotten", "seconds": 0.2})
    desk.wait(lambda: "forgotten" in desk.questions(), "the question to be under way")
    desk.engine.forget("superheat")
    desk.answer("other", "after it")
    assert forgotten not in {reply.number for reply in desk.replies}


@pytest.mark.parametrize(
    ("act", "word"),
    [
        ("crash", "ended"),
        ("garbage", "sent garbage"),
        ("list", "sent garbage"),
        ("other", "answered something else"),
        ("unasked", "spoke unasked"),
    ],
)
def test_a_broken_helper_is_told_and_started_again(desk: Desk, act: str, word: str) -> None:
    reply = desk.answer("superheat", "question", act=act)
    assert reply.answer == {"word": "question"}
    assert desk.answer("superheat", "next").answer == {"word": "next"}
    desk.wait(lambda: any(word in said for said in desk.words), f"the word {word!r}")
    assert desk.told.read_text().count("start") == 2
    assert desk.words[-1] == "", "all is well again"


def test_a_question_that_breaks_every_helper_is_given_up_and_the_next_is_answered(desk: Desk) -> None:
    reply = desk.answer("superheat", "deadly", act="crash", always=True)
    assert reply.answer is None
    assert "twice on these readings" in reply.fault
    assert desk.questions() == ["deadly", "deadly"]
    assert desk.answer("superheat", "next").answer == {"word": "next"}


def test_a_hanging_helper_is_killed_after_the_time_limit(tmp_path: Path) -> None:
    desk = Desk(tmp_path, time_limit=0.3)
    desk.engine.start()
    try:
        desk.answer("superheat", "warm up")
        hanging = desk.engine.pid
        reply = desk.answer("superheat", "slow", seconds=600)
        assert "did not answer in time" in reply.fault
        assert hanging is not None
        assert not is_alive(hanging)
        assert desk.answer("superheat", "next").answer == {"word": "next"}
    finally:
        desk.engine.close()


def test_a_helper_killed_while_idle_is_there_for_the_next_question(desk: Desk) -> None:
    desk.answer("superheat", "first")
    killed = desk.engine.pid
    assert killed is not None
    os.kill(killed, signal.SIGKILL)
    desk.wait(lambda: any("ended" in word for word in desk.words), "a word about it")
    assert desk.answer("superheat", "next").answer == {"word": "next"}
    assert desk.engine.pid != killed


def test_a_helper_killed_while_it_loads_is_started_again(tmp_path: Path) -> None:
    slow = HELPER.replace(
        'send({"ready"', 'time.sleep(1 if open(sys.argv[1]).read().count("start") == 1 else 0)\nsend({"ready"'
    )
    assert slow != HELPER
    desk = Desk(tmp_path, helper=slow)
    desk.engine.start()
    try:
        desk.wait(lambda: desk.told.exists() and desk.told.read_text(), "the helper's start")
        number = desk.engine.ask("superheat", {"word": "early"})
        pid = desk.engine.pid
        assert pid is not None
        os.kill(pid, signal.SIGKILL)
        desk.wait(lambda: desk.replies, "the answer")
        assert desk.replies[0].number == number
        assert desk.replies[0].answer == {"word": "early"}
    finally:
        desk.engine.close()


def test_a_helper_that_cannot_be_started_is_told_and_does_not_spin(tmp_path: Path) -> None:
    words: list[str] = []
    engine = Engine(lambda _: None, words.append, command=[str(tmp_path / "absent")])
    before = time.process_time()
    engine.start()
    deadline = time.monotonic() + PATIENCE
    while not words and time.monotonic() < deadline:
        time.sleep(0.01)
    time.sleep(0.3)
    engine.close()
    assert "cannot be started" in words[0]
    assert time.process_time() - before < 0.25


def test_closing_kills_the_helper_and_ends_the_thread(desk: Desk) -> None:
    desk.answer("superheat", "first")
    pid = desk.engine.pid
    desk.engine.ask("superheat", {"word": "slow", "seconds": 600})
    desk.wait(lambda: "slow" in desk.questions(), "the question to be under way")
    desk.engine.close()
    desk.engine.close()
    assert pid is not None
    assert not is_alive(pid)
    assert not [thread for thread in threading.enumerate() if thread.name == "engine" and thread.is_alive()]


PARENT = """
import sys, threading, time
from gaugeside.engine import Engine
replies = []
engine = Engine(replies.append, lambda word: print("word", word, engine.pid, flush=True))
engine.start()
threading.Event().wait()
"""


def test_the_real_helper_ends_when_its_parent_is_killed() -> None:
    parent = subprocess.Popen([sys.executable, "-c", textwrap.dedent(PARENT)], stdout=subprocess.PIPE, text=True)
    assert parent.stdout is not None
    try:
        said = parent.stdout.readline().split()
        assert said[0] == "word"
        helper = int(said[1])
        assert is_alive(helper)
        assert "gaugeside.engine.worker" in Path(f"/proc/{helper}/cmdline").read_text()
    finally:
        parent.kill()
        parent.wait()
        parent.stdout.close()
    deadline = time.monotonic() + PATIENCE
    while is_alive(helper):
        assert time.monotonic() < deadline, "the helper outlives the program"
        time.sleep(0.02)


def test_noise_of_the_real_helper_goes_to_the_log_and_not_to_its_answers(tmp_path: Path) -> None:
    noisy = tmp_path / "noisy.py"
    noisy.write_text(
        "import os, sys\nfrom gaugeside.engine import worker\n"
        "load = worker._load\n"
        "worker._load = lambda own: (print('noise on stdout'), os.write(2, b'noise on stderr\\n'), load(own))\n"
        "worker.main()\n"
    )
    log = tmp_path / "folder" / "helper.log"
    replies: list[Reply] = []
    words: list[str] = []
    engine = Engine(replies.append, words.append, command=[sys.executable, str(noisy), str(log), ""])
    engine.start()
    try:
        engine.ask("superheat", {"check": "no such check"})
        deadline = time.monotonic() + PATIENCE
        while not replies and time.monotonic() < deadline:
            time.sleep(0.01)
    finally:
        engine.close()
    assert words == [""]
    assert "details are in its log" in replies[0].fault
    text = log.read_text()
    assert "noise on stdout" in text
    assert "noise on stderr" in text
    assert "Traceback" in text
    assert log.stat().st_mode & 0o777 == 0o600
