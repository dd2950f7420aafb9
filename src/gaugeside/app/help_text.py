"""The lines of the help screen: what each field accepts, then units, then keys."""

from __future__ import annotations

import textwrap

from gaugeside.app.widgets.lines import MAIN, MUTED, Styled
from gaugeside.checks.sheet import Check, Entry
from gaugeside.checks.typed import FieldUnits, takes
from gaugeside.quantities import Dress, Kind, bare_labels, example

CAUTIONS = (
    "Refrigerant circuits are under pressure; escaping liquid freezes skin and eyes.",
    "Refrigerants displace air in closed rooms; some burn, some are poisonous: see the class beside the name.",
    "Results are estimates from the readings typed. They replace neither the maker's data nor local codes",
    "nor a licensed person's judgement.",
)
KEYS = (
    ("Tab, Down / Up", "next / previous field"),
    ("Enter", "keep the calculation in the logbook; on a choice too"),
    ("PageDown / PageUp", "scroll, when the window is low"),
    ("F2 F3 F4 F6 F7", "saturation, superheat, component, logbook, site"),
    ("F8", "pick the refrigerant"),
    ("F9", "machine and note for what is kept next, or of the entry selected"),
    ("F10, Ctrl+Q", "leave; what is typed comes back at the next start"),
    ("Ctrl+O", "menu with every action under a letter, if function keys get lost"),
    ("Ctrl+L", "paint the screen again;  Ctrl+U clear the field"),
)


def help_lines(check: Check | None, units: dict[str, dict[str, str]], dress: Dress) -> list[Styled]:
    """Return the help for a pane; `check` is None for the logbook and the site."""
    lines: list[Styled] = [("F1, Enter or Space goes back. Up, Down, PageUp, PageDown scroll.", MUTED), ("", "")]
    if check is not None:
        lines += _fields(check, units, dress)
    lines += [("Keys", MAIN), *((f"  {keys:<19}{what}", "") for keys, what in KEYS), ("", "")]
    lines += [("How a reading is written", MAIN)]
    for text in (
        "A number, then its unit: 185 psig, 12,4 bar g, -5 °C, 23 inHg vac, 0.14 kg/s, 6 TR. Point or comma for "
        "decimals; 1,234 is refused, as it can be read two ways. A number alone takes the unit the field shows; a "
        "unit once typed stays the field's own. Upper and lower case do not matter.",
        "Pressures: g is gauge, abs or a is absolute, vac counts down from the atmosphere. Without one of them the "
        f"field takes it as {dress.bare.value} (site pane). micron is absolute.",
    ):
        lines += [(f"  {line}", "") for line in textwrap.wrap(text, 76)]
    lines += [("", ""), ("Units", MAIN)]
    for kind in (Kind.PRESSURE, Kind.TEMPERATURE, Kind.TEMPERATURE_DIFFERENCE, Kind.MASS_FLOW, Kind.POWER,
                 Kind.SPECIFIC_ENTHALPY, Kind.FRACTION, Kind.LENGTH):  # fmt: skip
        wrapped = textwrap.wrap(" · ".join(bare_labels(kind)), 52)
        lines += [(f"  {kind.value if not n else '':<23}{text}", "") for n, text in enumerate(wrapped)]
    lines += [("", ""), ("Care", MAIN), *((f"  {text}", "") for text in CAUTIONS)]
    return lines


def _fields(check: Check, units: dict[str, dict[str, str]], dress: Dress) -> list[Styled]:
    lines: list[Styled] = [(f"{check.label.capitalize()}: {check.summary}", MAIN)]
    for line in check.reading_lines():
        known: FieldUnits = units.get(line.name, {})
        lines += [(f"  {line.label:<23}{text}", "") for text in textwrap.wrap(line.help, 55)[:1]]
        lines += [(f"  {'':<23}{text}", "") for text in textwrap.wrap(line.help, 55)[1:]]
        if line.entry is Entry.QUANTITY:
            lines.append((f"  {'':<23}{example(line.kind)}; alone: {takes(line, known, dress)}", MUTED))
        elif line.entry is not Entry.CHOICE:
            lines.append((f"  {'':<23}a number alone: {takes(line, known, dress)}", MUTED))
    return [*lines, ("", "")]
