"""Theme files (TOML) as Textual themes; one bad file is told in a sentence and never stops the start."""

from __future__ import annotations

import re
import stat
from collections.abc import Mapping
from contextlib import suppress
from itertools import islice
from pathlib import Path
from typing import Any

from textual.color import Color, ColorParseError
from textual.theme import Theme

from gaugeside.disk import parse_toml, reason
from gaugeside.settings import Settings
from gaugeside.text import plain_text

TERMINAL_COLOURS = "terminal colours"
TERMINAL_COLOURS_LIGHT = "terminal colours light"
# On a plain terminal the screen library colours the cursor of a field by itself; the theme is to do it.
CURSOR_STYLE = """
Input > .input--cursor {
    color: $input-cursor-foreground;
    background: $input-cursor-background;
    text-style: $input-cursor-text-style;
}
"""
LARGEST_FILE = 20_000  # [bytes]
MOST_FILES = 100

_KEYS = frozenset({"name", "dark", "terminal_colours", "colours", "variables"})
_COLOURS = frozenset(
    {
        "foreground",
        "background",
        "surface",
        "panel",
        "boost",
        "primary",
        "secondary",
        "accent",
        "warning",
        "error",
        "success",
    }
)
_NAME = re.compile(r"\w[\w .,+-]{0,39}")
_HEX = re.compile(r"#(?:[0-9a-fA-F]{3}|[0-9a-fA-F]{6})")
_STYLES = {"none", "bold", "underline", "reverse", "italic", "bold underline", "bold reverse"}
# Every name the style sheets may ask for, derived shades included.
_VARIABLES = frozenset(Theme(name="", primary="#808080").to_color_system().generate()) | frozenset(
    Theme(name="", primary="ansi_default", ansi=True).to_color_system().generate()
)


class ThemeFault(ValueError):
    """What is wrong with a theme file, told without its name."""


def shipped_folder() -> Path:
    """The folder of the themes that come with the program, in a wheel or in a checkout."""
    here = Path(__file__).resolve()
    packaged = here.parent / "shipped_themes"
    return packaged if packaged.is_dir() else here.parents[3] / "themes"


def load_themes(user_folder: Path | None) -> tuple[dict[str, Theme], list[str]]:
    """Return the themes by name and one sentence for each file that is not used; never raises.

    user_folder: the user's own theme files; one with the name of a shipped theme replaces it.

    The theme of the terminal's own 16 colours is always there.
    """
    themes, faults = {TERMINAL_COLOURS: _own_colours_of_the_terminal()}, []
    for folder in (shipped_folder(), user_folder):
        if folder is not None:
            found, more = _load_folder(folder)
            themes.update(found)
            faults.extend(more)
    if len(themes) == 1:
        faults.append("The themes that come with the program are missing; the terminal's own colours are used.")
    return themes, faults


def pick_theme(name: str, environ: Mapping[str, str], themes: Mapping[str, Theme] | None = None) -> str:
    """Return the name of the theme to use: `name`, unless this terminal cannot show it.

    environ: the environment as it was before the screen library took NO_COLOR out of it.
    themes: the themes there are, so that an unknown name gives the default and a theme that keeps to the
        terminal's own colours is used on every terminal; None when they are not known yet.
    """
    if themes is not None and name not in themes:
        default = Settings().theme
        name = default if default in themes else TERMINAL_COLOURS
    theme = themes[name] if themes is not None else None
    if theme is not None and theme.ansi:
        return name
    many_colours = bool(environ.get("COLORTERM")) or "256color" in environ.get("TERM", "")
    if many_colours and not without_colour(environ):
        return name
    is_light = theme is not None and not theme.dark
    return TERMINAL_COLOURS_LIGHT if is_light and TERMINAL_COLOURS_LIGHT in (themes or ()) else TERMINAL_COLOURS


def without_colour(environ: Mapping[str, str]) -> bool:
    """Tell whether the user asked for no colour at all (no-color.org: NO_COLOR present and not empty).

    The app must then be made with `ansi_color=True`: the screen library decides while it is made, before a
    theme is set, whether colour is left out or only turned to grey.
    """
    return bool(environ.get("NO_COLOR"))


def read_theme(text: str) -> Theme:
    """Return the theme that the TOML `text` describes; raises ThemeFault with the reason it is none."""
    try:
        content = parse_toml(text)
    except ValueError as fault:
        raise ThemeFault("is not readable as TOML") from fault
    _only(content, _KEYS, "key")
    name = content.get("name")
    if not isinstance(name, str) or not _NAME.fullmatch(name):
        raise ThemeFault("needs a name of at most 40 letters, digits, spaces and . , + -")
    ansi = _yes_or_no(content, "terminal_colours", False)
    if name in (TERMINAL_COLOURS, TERMINAL_COLOURS_LIGHT) and not ansi:
        raise ThemeFault(f"must set terminal_colours = true to be named {name}")
    colours: dict[str, Any] = {
        key: _colour(key, value, ansi) for key, value in _table(content, "colours", _COLOURS).items()
    }
    if "primary" not in colours:
        raise ThemeFault("needs at least the colour primary")
    given = _table(content, "variables", _VARIABLES)
    variables = {key: _variable(key, value, ansi) for key, value in given.items()}
    return _complete(
        Theme(
            name=name,
            **colours,
            dark=_yes_or_no(content, "dark", True),
            ansi=ansi,
            variables=variables,
        )
    )


def _complete(theme: Theme) -> Theme:
    """Give `theme` every variable that a style sheet may ask for, or raise ThemeFault."""
    try:
        made = theme.to_color_system().generate()
    except (ColorParseError, ValueError, TypeError, KeyError) as fault:
        raise ThemeFault("has colours that do not go together") from fault
    # The screen library leaves some out of a theme of terminal colours and then stops at their absence.
    for name in _VARIABLES.difference(made, theme.variables):
        theme.variables[name] = "none" if _is_style(name) else "ansi_default"
    return theme


def _own_colours_of_the_terminal() -> Theme:
    return _complete(
        Theme(
            name=TERMINAL_COLOURS,
            primary="ansi_cyan",
            foreground="ansi_default",
            background="ansi_default",
            ansi=True,
        )
    )


def _load_folder(folder: Path) -> tuple[dict[str, Theme], list[str]]:
    themes: dict[str, Theme] = {}
    faults: list[str] = []
    try:
        if not folder.is_dir():
            return themes, faults
        files = sorted(islice((path for path in folder.iterdir() if path.suffix == ".toml"), MOST_FILES + 1))
    except (OSError, ValueError) as fault:
        return themes, [f"The theme folder {plain_text(str(folder))} cannot be read: {reason(fault)}."]
    if len(files) > MOST_FILES:
        faults.append(f"Only {MOST_FILES} theme files of {plain_text(str(folder))} are used.")
    for path in files[:MOST_FILES]:
        try:
            theme = read_theme(_text_of(path, folder))
            themes[theme.name] = theme
        except ThemeFault as fault:
            faults.append(f"The theme file {plain_text(path.name, 60)} is not used: it {fault}.")
    return themes, faults


def _text_of(path: Path, folder: Path) -> str:
    try:
        real = path.resolve(strict=True)
        if not real.is_relative_to(folder.resolve()):
            raise ThemeFault("is a link out of its folder")
        if not stat.S_ISREG(real.stat().st_mode):
            raise ThemeFault("is not a file")
        with real.open("rb") as file:
            content = file.read(LARGEST_FILE + 1)
    except (OSError, RuntimeError) as fault:
        raise ThemeFault(f"cannot be read ({reason(fault)})") from fault
    if len(content) > LARGEST_FILE:
        raise ThemeFault(f"is larger than {LARGEST_FILE} bytes")
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        raise ThemeFault("is not UTF-8 text") from fault


def _only(content: Mapping[str, Any], known: frozenset[str], what: str) -> None:
    for key in content:
        if key not in known:
            raise ThemeFault(f'has an unknown {what} "{plain_text(key, 40)}"')


def _table(content: Mapping[str, Any], name: str, known: frozenset[str]) -> dict[str, Any]:
    table = content.get(name, {})
    if not isinstance(table, dict):
        raise ThemeFault(f"has no table {name}, but a single value of that name")
    _only(table, known, name.removesuffix("s"))
    return table


def _yes_or_no(content: Mapping[str, Any], name: str, default: bool) -> bool:
    value = content.get(name, default)
    if not isinstance(value, bool):
        raise ThemeFault(f"has {name} neither true nor false")
    return value


def _colour(name: str, value: object, ansi: bool) -> str:
    if isinstance(value, str):
        if not ansi and _HEX.fullmatch(value):
            return value
        if ansi and value.startswith("ansi_"):
            with suppress(ColorParseError):
                Color.parse(value)
                return value
    instead = 'one of the terminal\'s 16, such as "ansi_cyan"' if ansi else '"#rrggbb"'
    raise ThemeFault(f"has a bad colour {name}; write {instead}")


def _variable(name: str, value: object, ansi: bool) -> str:
    if not _is_style(name):
        return _colour(name, value, ansi)
    if not isinstance(value, str) or value not in _STYLES:
        raise ThemeFault(f"has a bad style {name}; write one of {', '.join(sorted(_STYLES))}")
    return value


def _is_style(name: str) -> bool:
    return name.endswith("-style") or "-style-" in name
