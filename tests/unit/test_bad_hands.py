"""Whatever comes in by a field, a word of the command line or a file: harmless, or refused in a sentence.

Nothing is executed, nothing takes all memory or all time.
"""

from __future__ import annotations

import json
import resource
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from bench import fault_inputs
from gaugeside.checks import CHECKS
from gaugeside.checks.compressor_map import load_maps
from gaugeside.checks.typed import read_form
from gaugeside.cli import main
from gaugeside.disk import parse_toml
from gaugeside.errors import Refusal
from gaugeside.preferences import dress_of, read_site, site_of, site_source
from gaugeside.quantities import SEA_LEVEL, Dress, Kind, checked_single
from gaugeside.refrigerants import find, load_own, search
from gaugeside.settings import load_draft, load_settings, save_draft
from terminal.harness import clean_environ
from unit.hostile import HOSTILE, JSON_FILES, SHORT, TOML_FILES, is_sentence, obeyed

each_hostile = pytest.mark.parametrize("text", HOSTILE.values(), ids=HOSTILE)


@pytest.fixture
def home(isolated: Path) -> Path:
    isolated.mkdir()
    return isolated


# Fields and words


@each_hostile
def test_no_field_takes_it_or_breaks(text: str) -> None:
    for check in CHECKS.values():
        for line in read_form(check, {r.name: text for r in check.reading_lines()}, {}, Dress(), SEA_LEVEL).values():
            if line.refusal is not None:
                assert is_sentence(line.refusal.sentence())
                continue
            # Only a form's words and its blanks may take some of it.
            assert not obeyed("".join(line.understood) + line.complete)
            assert isinstance(line.value, str | None)
    asks: list[Callable[[], object]] = [
        lambda: find(text), lambda: site_source(text), lambda: read_site(text, "altitude", Dress()),
        lambda: read_site(text, "barometer", Dress()), lambda: checked_single(Kind.PRESSURE, text[:200]),
    ]  # fmt: skip
    told = []
    for ask in asks:
        try:
            ask()
        except Refusal as refusal:
            told.append(refusal.sentence())
    assert all(map(is_sentence, told))
    assert len(search(text)) < 300


@pytest.mark.parametrize("text", SHORT.values(), ids=SHORT)
def test_every_word_of_the_command_line(text: str, home: Path, capfd: pytest.CaptureFixture[str]) -> None:
    state = "9 bar g, SC 4 K"
    for words in (
        ["convert", text], ["saturation", text, "5 C"], ["saturation", "R-134a", text], [text],
        ["superheat", "R-134a", "--suction-pressure", text], ["stream", text, "--inlet", "5 C", "--outlet", "7 C"],
        ["component", text, "R-134a"], ["component", "condenser", "R-134a", "--inlet", text, "--outlet", state],
        ["convert", "5 bar g", "--altitude", text], ["convert", "5 bar g", "--units", text], ["refrigerants", text],
        ["table", "R-134a", "--from", text, "--to", "5 C"], ["logbook", "show", text], ["logbook", "list", text],
        ["logbook", "list", "--most", text], ["convert", "5 bar g", text],
    ):  # fmt: skip
        # What begins with a dash, a brace or a digit may be an option or a number; the answer is then an answer.
        code = main(words)
        said, complaint = capfd.readouterr()
        assert code in (0, 2), words
        assert not obeyed(said + complaint), words
        assert "Traceback" not in complaint
        assert len(complaint) < 1500
        assert (code == 2) == bool(complaint), words
    for words in (
        ["convert", text],
        ["saturation", text, "5 C"],
        ["logbook", "show", text],
        ["convert", "5 bar", text],
    ):
        code = main([*words, "--json"])
        said, complaint = capfd.readouterr()
        assert complaint == ""
        assert ("error" in json.loads(said)) == (code == 2), words
    assert not list(home.iterdir())


def test_random_and_mutated_input(tmp_path: Path) -> None:
    """A small part of what the benchmark of faults puts to the same doors."""
    for name, tally in fault_inputs.put(2500, 20260314, tmp_path).items():
        assert (tally.crashes, tally.misreadings) == (0, 0), (name, tally.examples)
        assert tally.taken, name
        assert tally.refused or name in ("state", "logbook_row"), name


# Files


@pytest.mark.parametrize("content", JSON_FILES.values(), ids=JSON_FILES)
def test_settings_and_draft_of_any_content(content: bytes, home: Path) -> None:
    path = home / "settings.json"
    path.write_bytes(content)
    settings, faults = load_settings(path)
    assert all(map(is_sentence, faults))
    assert not obeyed(settings.tag + settings.theme)
    dress_of(settings)
    site_of(settings)
    draft, faults = load_draft(path)
    assert all(map(is_sentence, faults))
    save_draft(path, draft)
    assert load_draft(path) == (draft, [])


def test_no_content_of_a_file_takes_all_memory_or_all_time(home: Path) -> None:
    """Every file as every content, read by the program with little memory and a time limit."""

    def little_memory() -> None:
        resource.setrlimit(resource.RLIMIT_AS, (700_000_000, 700_000_000))

    (home / "themes").mkdir()
    code = (
        "import sys, pathlib\n"
        "from gaugeside.app.themes import load_themes\n"
        "from gaugeside.checks.compressor_map import load_maps\n"
        "from gaugeside.refrigerants import load_own\n"
        "folder = pathlib.Path(sys.argv[1])\n"
        "for content in sorted((folder / 'contents').iterdir()):\n"
        "    for name in ('refrigerants.toml', 'compressors.toml', 'themes/mine.toml'):\n"
        "        (folder / name).write_bytes(content.read_bytes())\n"
        "    told = [*load_own(folder), *load_maps(folder)[1], *load_themes(folder / 'themes')[1]]\n"
        "    assert len(told) >= 3, (content, told)\n"
        "    assert all(0 < len(t) < 700 and t.isprintable() for t in told), (content, told)\n"
        "print('all read')\n"
    )
    (home / "contents").mkdir()
    for name, content in TOML_FILES.items():
        (home / "contents" / name).write_bytes(content)
    done = subprocess.run(
        [sys.executable, "-c", code, str(home)], env=clean_environ(home), preexec_fn=little_memory,
        capture_output=True, timeout=30, check=False,
    )  # fmt: skip
    assert (done.stdout, done.returncode) == (b"all read\n", 0), done.stderr[-1500:]


def test_a_line_of_ordinary_coefficients_is_no_bomb() -> None:
    terms = ", ".join(f"{n}.25" for n in range(20))
    assert parse_toml(f"mass_flow = [{terms}]")["mass_flow"][1] == 1.25


def test_the_map_of_a_compressor_says_what_is_wrong_with_it(tmp_path: Path) -> None:
    sound = 'refrigerant = "R-134a"\ntemperature = "F"\n'
    path = tmp_path / "compressors.toml"
    for text, words in (
        ('["a\\u001b[31m"]\ntemperature = "F"\nrefrigerant = "gas"', "“gas” is not in the catalogue"),
        ('[a]\ntemperature = "F"', "No refrigerant is named"),
        (f"[a]\n{sound}rated_superheat = 0x{'f' * 9000}", "rated_superheat is not a reading"),
        (f"[a]\n{sound}rated_superheat = nan", "rated_superheat is not a reading"),
        (f"[a]\n{sound}mass_flow = [{', '.join(['true'] * 10)}]", "mass_flow is not a list of numbers"),
        (f"[a]\n{sound}mass_flow = [{', '.join(['inf'] * 10)}]", "mass_flow is not a list of numbers"),
        ("a = 5", "A machine is a table of its own"),
    ):
        path.write_text(text)
        maps, (told,) = load_maps(tmp_path)
        assert maps == {}
        assert words in told
        assert is_sentence(told)


def test_names_of_one_s_own_are_no_format_and_no_markup(home: Path, capfd: pytest.CaptureFixture[str]) -> None:
    (home / "refrigerants.toml").write_text(
        '[blends."a{b}{0}[red]%s"]\ncomposition = { "R-32" = 0.5, "R-125" = 0.5 }\nclass = "A2L"\n'
    )
    name = "a{b}{0}[red]%s"
    for words in (["saturation", name, "5 C"], ["saturation", name, "90 C"], ["saturation", name, "-150 C"],
                  ["superheat", name, "--suction-pressure", "6 bar g", "--suction-temperature", "5 C"],
                  ["machine", name, "--suction-pressure", "6 bar g", "--discharge-pressure", "20 bar g",
                   "--suction-temperature", "9 C", "--discharge-temperature", "70 C"]):  # fmt: skip
        assert main(words) in (0, 2)
        assert name in "".join(capfd.readouterr())
    load_own(home / "none")
