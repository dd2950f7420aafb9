"""The lines of the help screen: what each field accepts, then units, then keys."""

from __future__ import annotations

from collections.abc import Sequence

from gaugeside.app.widgets.lines import CAUTION, MAIN, MUTED, Styled
from gaugeside.checks.sheet import Check, Entry
from gaugeside.checks.typed import FieldUnits, takes
from gaugeside.checks.view import wrapped
from gaugeside.quantities import Dress, Kind, bare_labels, example

_WIDEST = 80
_KINDS = (
    Kind.PRESSURE,
    Kind.TEMPERATURE,
    Kind.TEMPERATURE_DIFFERENCE,
    Kind.MASS_FLOW,
    Kind.POWER,
    Kind.SPECIFIC_ENTHALPY,
    Kind.FRACTION,
    Kind.LENGTH,
)
CAUTIONS = (
    "Refrigerant circuits are under pressure; escaping liquid freezes skin and eyes.",
    "Some refrigerants burn, some are poisonous: see the class beside the name. All displace air in closed rooms.",
    "Results are estimates from the readings typed. They replace neither the maker's data, nor local codes, "
    "nor a licensed person's judgement.",
)
KEYS = (
    ("Tab, Down / Up", "next / previous field"),
    ("Enter", "keep the calculation in the logbook; in the logbook, open the entry"),
    ("PageDown / PageUp", "scroll, where a rule says that there is more"),
    ("F2 F3 F4 F5", "saturation, superheat, component, whole machine"),
    ("F12", "stream: secondary side of water, brine or air"),
    ("F6 F7", "logbook, site and units"),
    ("F8", "pick the refrigerant"),
    ("F9", "machine and note for what is kept next, or of the entry selected"),
    ("F10, Ctrl+Q", "leave; what is typed comes back at the next start"),
    ("Ctrl+O", "menu with every action under a letter, if function keys get lost"),
    ("Delete, Ctrl+Z", "in the logbook: delete the entry selected, bring it back"),
    ("Ctrl+G", "the readings as a picture, and back"),
    ("Ctrl+L", "paint the screen again;  Ctrl+U clear the field"),
    ("End", "write on behind what stands in a field; typing at once replaces it"),
)
# What belongs into each setting, under its label.
SITE = {
    "site_pressure": (
        "altitude/barometer",
        "640 m, 2100 ft, or a barometer reading such as 94.1 kPa, absolute and not reduced to sea level; "
        "empty: sea level.",
    ),
    "dress": ("units", "SI or inch-pound; single units below may differ. What was typed keeps its unit."),
    "bare_pressure": ("bare pressure is", "What a pressure typed without g or abs is taken for."),
    "datum": ("enthalpy datum", "Where enthalpies count from; only differences mean anything."),
    "theme": ("theme", "Colours; files in the themes folder of the settings add to the list."),
}
# What there is to do on the panes that are no sheet.
OTHER_PANES = {
    "logbook": (
        ("show entries with", "Words that all occur: refrigerant, machine, note, a reading, a day: 2026-12-01."),
        ("Up, Down, Enter", "Another entry; its readings back onto their sheet."),
        ("F9", "Machine and note of the entry with the mark."),
        ("Delete, Ctrl+Z", "Out of the logbook, and back, until the program ends."),
        ("Ctrl+O W", "The entries shown into a file: .csv for a spreadsheet, .json for another logbook."),
    ),
    "site": tuple(SITE.values()),
}
WRITING = (
    "A number, then its unit: 185 psig, 12,4 bar g, -5 °C, 23 inHg vac, 0.14 kg/s, 6 TR. Point or comma for "
    "decimals; 1,234 is refused, as it can be read two ways. A number alone takes the unit the field shows; a "
    "unit once typed stays the field's own. Upper and lower case do not matter.",
    "Pressures: g is gauge, abs or a is absolute, vac counts down from the atmosphere. Without one of them the "
    "field takes it as {bare} (site pane). micron is absolute. A bare inHg or mmHg above zero is never taken as "
    "gauge: some mean a vacuum.",
)


def help_lines(
    pane: str,
    check: Check | None,
    units: dict[str, dict[str, str]],
    dress: Dress,
    messages: Sequence[str],
    care: Sequence[str],
    width: int,
) -> list[Styled]:
    """Return the help for a pane; `check` is None for the logbook and the site, which are no sheets.

    messages: what the program had to tell since its start. care: what there is to know of the refrigerant picked.
    width: of the window [characters].
    """
    width = min(width, _WIDEST) - 2
    back = "F1, Enter or Space goes back. Up, Down, PageUp, PageDown scroll."
    lines: list[Styled] = [*_wrapped("", back, 0, width, MUTED), ("", "")]
    for message in messages:
        lines += _wrapped("", f"! {message}", 2, width, CAUTION)
    if check is not None:
        lines += _fields(check, units, dress, width)
    for label, what in OTHER_PANES.get(pane, ()):
        lines += _wrapped(label, what, 25, width)
    if pane in OTHER_PANES:
        lines.append(("", ""))
    lines.append(("Keys", MAIN))
    for keys, what in KEYS:
        lines += _wrapped(keys, what, 21, width)
    lines += [("", ""), ("How a reading is written", MAIN)]
    for text in WRITING:
        lines += _wrapped("", text.format(bare=dress.bare.value), 2, width)
    lines += [("", ""), ("Units", MAIN)]
    for kind in _KINDS:
        lines += _wrapped(kind.value, " · ".join(bare_labels(kind)), 25, width)
    lines += [("", ""), ("Care", MAIN)]
    for text in (*care, *CAUTIONS):
        lines += _wrapped("", text, 2, width)
    return lines


def _wrapped(label: str, text: str, column: int, width: int, style: str = "") -> list[Styled]:
    """Return `text` from a column on, the label before it; under the label in a window too narrow for both."""
    if width - column < 20:
        head, column = ([(f"  {label}", style)] if label else []), 4 if label else min(column, 2)
    else:
        head = []
    parts = wrapped(text, max(10, width - column))
    first = "" if head else f"  {label}"
    return [*head, *((f"{first if not n else '':<{column}}{part}", style) for n, part in enumerate(parts))]


def _fields(check: Check, units: dict[str, dict[str, str]], dress: Dress, width: int) -> list[Styled]:
    lines: list[Styled] = _wrapped("", f"{check.label.capitalize()}: {check.summary}", 2, width, MAIN)
    for line in check.reading_lines():
        known: FieldUnits = units.get(line.name, {})
        lines += _wrapped(line.label, line.help, 25, width)
        if line.entry is Entry.QUANTITY:
            lines += _wrapped("", f"{example(line.kind)}; alone: {takes(line, known, dress)}", 25, width, MUTED)
        elif line.entry in (Entry.EITHER, Entry.STATE):
            lines += _wrapped("", f"a number alone: {takes(line, known, dress)}", 25, width, MUTED)
    return [*lines, ("", "")]
