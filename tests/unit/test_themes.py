"""Themes: legible as shipped, and a bad file of the user's is a sentence, never a stop."""

from __future__ import annotations

import re
import sys
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import settings as hypothesis_settings
from hypothesis import strategies as st
from textual.app import App, ComposeResult
from textual.color import Color
from textual.css.stylesheet import Stylesheet
from textual.theme import BUILTIN_THEMES, Theme
from textual.widgets import Input, OptionList, Static

from gaugeside.app import themes as module
from gaugeside.app.themes import ThemeFault, load_themes, pick_theme, read_theme
from gaugeside.settings import Settings
from terminal.harness import Terminal

SHIPPED = {
    "log sheet dark",
    "log sheet light",
    "high contrast",
    "terminal colours",
    "terminal colours light",
    "no colour",
}
GOOD = 'name = "mine"\n[colours]\nprimary = "#336699"\n'
TEXTS = ("foreground", "primary", "secondary", "accent", "warning", "error", "success", "text-muted")
PAIRS = (
    ("block-cursor-foreground", "block-cursor-background"),
    ("input-cursor-foreground", "input-cursor-background"),
    ("input-selection-foreground", "input-selection-background"),
    ("screen-selection-foreground", "screen-selection-background"),
)


def contrast(one: str, other: str) -> float:
    """Contrast ratio of two colours by WCAG 2.2, definitions of relative luminance and contrast ratio."""

    def luminance(text: str) -> float:
        parts = [channel / 255 for channel in Color.parse(text).rgb]
        red, green, blue = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
        return 0.2126 * red + 0.7152 * green + 0.0722 * blue

    darker, lighter = sorted([luminance(one), luminance(other)])
    return (lighter + 0.05) / (darker + 0.05)


def variables(theme: Theme) -> dict[str, str]:
    """What the style sheet sees of a theme."""
    return {**theme.to_color_system().generate(), **theme.variables}


def test_contrast_of_black_on_white_is_21() -> None:
    # WCAG 2.2, contrast ratio: from 1 to 21; the grey #767676 on white is its well-known 4.54 limit.
    assert contrast("#000000", "#ffffff") == pytest.approx(21)
    assert contrast("#767676", "#ffffff") == pytest.approx(4.54, abs=0.005)


def test_every_shipped_theme_loads() -> None:
    themes, faults = load_themes(None)
    assert set(themes) == SHIPPED
    assert faults == []
    assert Settings().theme in themes
    assert {name for name, theme in themes.items() if not theme.dark} == {"log sheet light", "terminal colours light"}


def test_shipped_themes_bear_names_of_their_own() -> None:
    assert SHIPPED.isdisjoint(BUILTIN_THEMES)
    assert all(name.isascii() and name == name.lower() for name in SHIPPED)


@pytest.mark.parametrize("name", ["log sheet dark", "log sheet light", "high contrast"])
def test_shipped_text_is_legible(name: str) -> None:
    theme = load_themes(None)[0][name]
    found = variables(theme)
    least = 7.0 if name == "high contrast" else 4.5  # WCAG 2.2, criteria 1.4.6 and 1.4.3
    for ground in ("background", "surface", "panel"):
        for text in TEXTS:
            assert contrast(found[text], found[ground]) >= least, f"{text} on {ground}"
        assert contrast(found["text-disabled"], found[ground]) >= 3.0, f"text-disabled on {ground}"
    for text, ground in PAIRS:
        assert contrast(found[text], found[ground]) >= least, f"{text} on {ground}"


@pytest.mark.parametrize("name", ["log sheet dark", "log sheet light", "high contrast"])
def test_one_accent_colour(name: str) -> None:
    theme = load_themes(None)[0][name]
    assert theme.accent == theme.primary == theme.variables["border"]


@pytest.mark.parametrize("name", ["terminal colours", "terminal colours light", "no colour"])
def test_plain_terminals_get_their_own_colours_only(name: str) -> None:
    theme = load_themes(None)[0][name]
    assert theme.ansi
    colours = [getattr(theme, key) for key in ("primary", "foreground", "background", "error", "warning")]
    assert all(colour.startswith("ansi_") for colour in colours)


def test_no_colour_has_none() -> None:
    theme = load_themes(None)[0]["no colour"]
    used = {value for key, value in theme.variables.items() if "-style" not in key}
    assert used == {"ansi_default"}
    assert theme.variables["block-cursor-text-style"] == "reverse"


class Everything(App[None]):
    """A field, a list and a line in the colours of a theme."""

    CSS = module.CURSOR_STYLE + "Static { color: $warning; background: $panel; border: ascii $border-blurred; }"

    def compose(self) -> ComposeResult:
        yield Input("12.4 bar g")
        yield OptionList("R-454C", "R-448A")
        yield Static("superheat 9.2 K")


async def test_every_shipped_theme_paints() -> None:
    app = Everything()
    async with app.run_test(size=(80, 24)) as pilot:
        for theme in load_themes(None)[0].values():
            app.register_theme(theme)
        for name in SHIPPED:
            app.theme = name
            await pilot.pause()
            assert app.current_theme.name == name
        await pilot.press("tab", "down")


@pytest.mark.parametrize(
    ("name", "environ", "allowed"),
    [
        ("terminal colours", {"TERM": "linux"}, r"3[0-7]|4[0-7]|9[0-7]|10[0-7]|39|49"),
        ("terminal colours", {"NO_COLOR": "1"}, r"39|49"),
        ("terminal colours light", {"NO_COLOR": "1", "TERM": "vt100"}, r"39|49"),
        ("no colour", {}, r"39|49"),
    ],
)
def test_bytes_on_a_plain_terminal(tmp_path: Path, name: str, environ: dict[str, str], allowed: str) -> None:
    program = (
        "import os; from unit.test_themes import Everything\n"
        "from gaugeside.app.themes import load_themes, without_colour\n"
        "app = Everything(ansi_color=without_colour(os.environ) or None)\n"
        f"app.register_theme(load_themes(None)[0][{name!r}]); app.theme = {name!r}; app.run()"
    )
    tests = str(Path(__file__).parent.parent)
    with Terminal([sys.executable, "-c", program], tmp_path, environ={"PYTHONPATH": tests, **environ}) as shown:
        shown.wait_for("superheat 9.2 K")
        shown.send("\t\x1b[B")
        shown.settle()
    styles = {code for codes in re.findall(rb"\x1b\[([0-9;]+)m", shown.raw) for code in codes.decode().split(";")}
    colours = {code for code in styles if int(code) >= 30}
    assert all(re.fullmatch(allowed, code) for code in colours), colours
    assert styles & {"1", "7"}, "what colour does not say, bold or reverse does"


def test_the_user_s_folder_adds_and_replaces(tmp_path: Path) -> None:
    (tmp_path / "a.toml").write_text(GOOD)
    (tmp_path / "b.toml").write_text(GOOD.replace("mine", "log sheet dark"))
    (tmp_path / "notes.txt").write_text("not a theme")
    themes, faults = load_themes(tmp_path)
    assert faults == []
    assert set(themes) == SHIPPED | {"mine"}
    assert themes["log sheet dark"].primary == "#336699"


def test_an_absent_folder_is_no_fault(tmp_path: Path) -> None:
    assert load_themes(tmp_path / "none")[1] == []
    (tmp_path / "file").write_text("")
    assert load_themes(tmp_path / "file")[1] == []


BAD = {
    "not TOML": ("x = = 1", "not readable as TOML"),
    "empty": ("", "needs a name"),
    "deep nesting": ("a = " + "[" * 9000, "not readable as TOML"),
    "unknown key": (GOOD.replace("[colours]", 'font = "x"\n[colours]'), 'unknown key "font"'),
    "unknown colour": (GOOD + 'sparkle = "#fff"', 'unknown colour "sparkle"'),
    "unknown variable": (GOOD + '[variables]\nnothing = "#fff"', 'unknown variable "nothing"'),
    "colour name": (GOOD.replace("#336699", "notacolor"), "bad colour primary"),
    "colour too long": (GOOD.replace("#336699", "#3366990000"), "bad colour primary"),
    "colour out of range": (GOOD.replace("#336699", "rgb(999,0,0)"), "bad colour primary"),
    "no such terminal colour": (GOOD.replace("#336699", "ansi_mauve"), "bad colour primary"),
    "colour of wrong kind": (GOOD.replace('"#336699"', "17"), "bad colour primary"),
    "variable injects style": (GOOD + '[variables]\nborder = "red; } * { display: none"', "bad colour border"),
    "bad style": (GOOD + '[variables]\nlink-style = "blink"', "bad style link-style"),
    "terminal colour among others": (GOOD + 'accent = "ansi_red"', "bad colour accent"),
    "other colour among the terminal's": (
        'name = "x"\nterminal_colours = true\n[colours]\nprimary = "#fff"',
        'such as "ansi_cyan"',
    ),
    "no primary": ('name = "x"\n[colours]\naccent = "#fff"', "colour primary"),
    "no table": ('name = "x"\ncolours = 3', "no table colours"),
    "dark of wrong kind": (GOOD.replace("[colours]", 'dark = "yes"\n[colours]'), "dark neither true nor false"),
    "name of wrong kind": (GOOD.replace('"mine"', "5"), "needs a name"),
    "control characters": (GOOD.replace("mine", "a\\u001b[31m"), "needs a name"),
    "reordering characters": (GOOD.replace("mine", "a\\u202eb"), "needs a name"),
    "markup": (GOOD.replace("mine", "a[b]"), "needs a name"),
    "path": (GOOD.replace("mine", "../../x"), "needs a name"),
    "long name": (GOOD.replace("mine", "m" * 41), "needs a name"),
    "huge": (GOOD + "#" * 20_000, "larger than 20000 bytes"),
    "control characters in a key": (GOOD + '"\\u001b]0;x" = "#fff"', 'unknown colour "]0;x"'),
    "terminal theme replaced by another kind": (GOOD.replace("mine", "terminal colours"), "terminal_colours = true"),
}


@pytest.mark.parametrize(("text", "words"), BAD.values(), ids=BAD.keys())
def test_a_bad_file_is_one_sentence_and_the_others_count(tmp_path: Path, text: str, words: str) -> None:
    (tmp_path / "bad.toml").write_text(text)
    (tmp_path / "good.toml").write_text(GOOD)
    themes, faults = load_themes(tmp_path)
    assert set(themes) == SHIPPED | {"mine"}
    assert len(faults) == 1
    assert faults[0].startswith("The theme file bad.toml is not used: it ")
    assert words in faults[0]
    assert faults[0].isprintable()


def test_what_is_not_a_file_of_the_folder(tmp_path: Path) -> None:
    outside = tmp_path / "outside.toml"
    outside.write_text(GOOD)
    folder = tmp_path / "themes"
    folder.mkdir()
    (folder / "a-folder.toml").mkdir()
    (folder / "b-link.toml").symlink_to(outside)
    (folder / "c-nowhere.toml").symlink_to(folder / "none")
    (folder / "d-loop.toml").symlink_to(folder / "d-loop.toml")
    (folder / "e-\x1b[2J.toml").write_bytes(b"\xff\xfe")
    themes, faults = load_themes(folder)
    assert set(themes) == SHIPPED
    reasons = ["not a file", "link out of its folder", "cannot be read", "cannot be read", "not UTF-8"]
    assert len(faults) == len(reasons)
    for fault, words in zip(faults, reasons, strict=True):
        assert words in fault
        assert fault.isprintable()


def test_a_link_inside_the_folder_is_followed(tmp_path: Path) -> None:
    (tmp_path / "a.toml").write_text(GOOD)
    (tmp_path / "b.toml").symlink_to(tmp_path / "a.toml")
    assert load_themes(tmp_path)[1] == []


def test_too_many_files(tmp_path: Path) -> None:
    for number in range(module.MOST_FILES + 5):
        (tmp_path / f"{number:03}.toml").write_text(GOOD)
    assert load_themes(tmp_path)[1] == [f"Only 100 theme files of {tmp_path} are used."]


def test_without_the_shipped_files_one_theme_is_left(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(module, "shipped_folder", lambda: tmp_path / "none")
    themes, faults = load_themes(None)
    assert list(themes) == ["terminal colours"]
    assert "missing" in faults[0]
    assert pick_theme("log sheet dark", {"TERM": "xterm-256color"}, themes) == "terminal colours"


@pytest.mark.parametrize(
    ("name", "environ", "picked"),
    [
        ("log sheet dark", {"TERM": "xterm-256color"}, "log sheet dark"),
        ("log sheet dark", {"TERM": "xterm", "COLORTERM": "truecolor"}, "log sheet dark"),
        ("log sheet dark", {"TERM": "xterm"}, "terminal colours"),
        ("log sheet dark", {"TERM": "linux"}, "terminal colours"),
        ("log sheet dark", {"TERM": "vt100"}, "terminal colours"),
        ("log sheet dark", {}, "terminal colours"),
        ("log sheet light", {"TERM": "screen"}, "terminal colours light"),
        ("log sheet dark", {"TERM": "xterm-256color", "COLORTERM": "truecolor", "NO_COLOR": "1"}, "terminal colours"),
        ("log sheet dark", {"TERM": "xterm-256color", "NO_COLOR": ""}, "log sheet dark"),
        ("no colour", {"TERM": "linux"}, "no colour"),
        ("no colour", {"TERM": "xterm-256color", "NO_COLOR": "1"}, "no colour"),
        ("gone", {"TERM": "xterm-256color"}, "log sheet dark"),
        ("gone", {"TERM": "linux"}, "terminal colours"),
    ],
)
def test_theme_for_the_terminal(name: str, environ: dict[str, str], picked: str) -> None:
    assert pick_theme(name, environ, load_themes(None)[0]) == picked


def test_theme_for_the_terminal_before_themes_are_known() -> None:
    assert pick_theme("log sheet light", {"TERM": "linux"}) == "terminal colours"
    assert pick_theme("anything", {"TERM": "tmux-256color"}) == "anything"


HEX = st.from_regex(r"\A#[0-9a-f]{6}\Z")
OF_THE_TERMINAL = st.sampled_from(["ansi_default", "ansi_red", "ansi_bright_white"])


@hypothesis_settings(max_examples=60, deadline=None)
@given(st.data(), st.booleans(), st.booleans())
def test_whatever_is_accepted_is_understood_by_the_style_sheet(data: st.DataObject, dark: bool, ansi: bool) -> None:
    colour = OF_THE_TERMINAL if ansi else HEX
    colours = data.draw(st.dictionaries(st.sampled_from(sorted(module._COLOURS)), colour))
    names = st.sampled_from(sorted(name for name in module._VARIABLES if "-style" not in name))
    more = data.draw(st.dictionaries(names, colour, max_size=4))
    colours.setdefault("primary", data.draw(colour))
    lines = [
        'name = "any"',
        f"dark = {str(dark).lower()}",
        f"terminal_colours = {str(ansi).lower()}",
        "[colours]",
        *(f'{name} = "{value}"' for name, value in colours.items()),
        "[variables]",
        *(f'{name} = "{value}"' for name, value in more.items()),
    ]
    found = variables(read_theme("\n".join(lines)))
    uses = [
        f"{'text-style' if '-style' in name else 'color'}: ${name};"
        for name, value in found.items()
        if value != "initial"  # a word of the screen library's own, for links alone
    ]
    sheet = Stylesheet(variables=found)
    sheet.add_source("A { " + " ".join(uses) + " }")
    sheet.parse()
    assert len(uses) >= len(module._VARIABLES) - 1


@hypothesis_settings(max_examples=150, deadline=None)
@given(st.text(max_size=200) | st.text(alphabet='name="mi[colurs]#0f\n. ', max_size=80))
def test_any_text_is_a_theme_or_a_fault(text: str) -> None:
    try:
        theme = read_theme(text)
    except ThemeFault:
        return
    assert theme.name
