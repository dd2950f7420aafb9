"""What stands around the panes: head, tabs, keys, menu; one place for their words."""

from __future__ import annotations

from gaugeside.checks.view import wrapped
from gaugeside.quantities import Site
from gaugeside.refrigerants import Refrigerant

# Pane -> its function key, in the order of the tabs.
PANES = {
    "saturation": "F2",
    "superheat": "F3",
    "component": "F4",
    "machine": "F5",
    "logbook": "F6",
    "site": "F7",
    "stream": "F12",
}
WIDE, HIGH = 80, 24
# Below this height [lines] the frame leaves its room to the form.
LOW = 10
# Below this width [characters] a label leaves half of its room to the field.
TINY = 40

_KEYS = "Enter keep F1 help F8 refrigerant F9 machine, note ^G picture ^O menu F10 leave"
_OTHER_KEYS = {
    "logbook": "Enter open F1 help F9 machine, note Del delete ^Z undo ^O menu ^O W to file",
    "site": "Left Right choose  F1 help  Ctrl+O menu  F10 leave",
}
# Letter, words, action.
MENU = (
    ("2", "saturation", "pane('saturation')"),
    ("3", "superheat and subcooling", "pane('superheat')"),
    ("4", "component", "pane('component')"),
    ("5", "whole machine", "pane('machine')"),
    ("6", "logbook", "pane('logbook')"),
    ("7", "site, units, theme", "pane('site')"),
    ("0", "stream: secondary side of water, brine or air", "pane('stream')"),
    ("8", "pick the refrigerant", "pick"),
    ("9", "machine and note", "words"),
    ("g", "picture on or off", "picture"),
    ("k", "keep in the logbook", "keep_here"),
    ("c", "clear this sheet", "clear_sheet"),
    ("d", "delete the logbook entry selected", "delete_entry"),
    ("u", "bring back the entry deleted last, or what stood on this sheet", "undo"),
    ("w", "write the entries shown into a file", "write_entries"),
    ("h", "help", "help"),
    ("l", "paint the screen again", "repaint"),
    ("q", "leave", "leave"),
)


def keys_line(pane: str, width: int, height: int) -> str:
    """Return the line of keys; in a window smaller than the sheet, its size and how to scroll."""
    if width >= WIDE and height >= HIGH:
        return _OTHER_KEYS.get(pane, _KEYS)
    forms = (f"{width}x{height}: PageUp PageDown scroll, Ctrl+O menu", f"{width}x{height} PgDn ^O menu", "^O menu")
    return next((form for form in forms if len(form) <= width), forms[-1])


def head_line(refrigerant: Refrigerant | str | None, site: Site, machine: str, width: int) -> str:
    """Return refrigerant, site and machine in one line.

    refrigerant: its designation alone while it has not been looked up.
    """
    if isinstance(refrigerant, str) or refrigerant is None:
        left = refrigerant or "no refrigerant: F8"
    else:
        left = f"{refrigerant.designation}  {refrigerant.safety_class}  {refrigerant.nature}"
    if width < WIDE:
        return f" {left}  {machine}".rstrip()
    source = site.source.split(",")[0].removeprefix("standard atmosphere at ")
    place = f"{site.atmosphere / 1000:.2f} kPa abs  {source}"
    head = f" {left:<22}  {place[:37]}   {machine}".rstrip()
    return head if len(head) < width else f"{head[: width - 4]}..."


def tabs_line(pane: str, width: int) -> str:
    """Return the panes with their keys, the one shown in capitals."""
    if width < WIDE:
        return f" {pane.upper()}   F2 to F7 or Ctrl+O"
    return " ".join(f"{key} {name.upper() if name == pane else name}" for name, key in PANES.items())


def rule_line(width: int, above: bool, below: bool) -> str:
    """Return the rule over a pane, which says what does not fit into the window."""
    words = {(False, True): "PageDown: more", (True, False): "PageUp: more", (True, True): "PageUp, PageDown: more"}
    mark = words.get((above, below), "")
    if not mark:
        return "-" * width
    return f"{'-' * max(0, width - len(mark) - 5)} {mark} ---"[-width:]


def word_lines(text: str, standing: str, width: int) -> list[str]:
    """Return a sentence in at most two lines; what stands there without it keeps the second where one is enough."""
    lines = wrapped(text, max(10, width - 1))
    if len(lines) > 2:
        lines = [lines[0], f"{lines[1][: max(1, width - 5)]} ..."]
    if not lines and len(standing) > width:
        lines = wrapped(standing, width)
    if len(lines) > 1:
        return lines[:2]
    return [*lines, *[""] * (1 - len(lines)), standing if len(standing) <= width else ""]
