"""The one-shot commands: the same declarations as the panes, answered once, as text or as JSON."""

from __future__ import annotations

import json
from argparse import Namespace
from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

from gaugeside.answering import answer_json, answered, terms
from gaugeside.checks.picture import Picture
from gaugeside.checks.sheet import Answer, Check, Remark
from gaugeside.checks.typed import TypedLine, read_form
from gaugeside.checks.view import (
    FOOTNOTE,
    TableText,
    every_pressure,
    every_unit,
    findings,
    sentence,
    site_line,
    table,
    wrapped,
)
from gaugeside.drawing import draw
from gaugeside.errors import Refusal
from gaugeside.keeping import entry_of
from gaugeside.logbook import Logbook
from gaugeside.preferences import dress_of, overridden, site_of
from gaugeside.quantities import (
    SI_UNIT,
    Dress,
    Kind,
    Site,
    example,
    fold,
    guard,
    nearest_kind,
    quoted,
    read,
    spellings,
    split_number,
    understood,
    unit,
    write,
)
from gaugeside.refrigerants import find
from gaugeside.settings import load_settings, places

Printer = Callable[[str], None]
_WIDTH = 100
_PICTURE = (80, 18)


def run_check(arguments: Namespace, say: Printer) -> int:
    """Run one check on what the command line gives, print its sheet or its JSON, keep it when asked."""
    check: Check = arguments.check
    under = terms(check, arguments)
    settings, dress, site = under.settings, under.dress, under.site
    logbook = Logbook(under.home.logbook_file)
    typed = read_form(check, _texts(check, arguments), {}, dress, site)
    answer, reply = answered(check, typed, under, logbook, drawn=getattr(arguments, "picture", False))
    kept = not_kept = ""
    if arguments.keep:
        entry = entry_of(check, answer, typed, settings, dress, site, arguments.note)
        try:
            result = logbook.keep(entry)
            kept = f"{'already kept' if result.already else 'kept'} as entry {result.entry.number}"
        except Refusal as refusal:
            not_kept = refusal.sentence()
    answer = replace(answer, notes=(*answer.notes, *map(Remark, under.troubles)))
    if arguments.json:
        document = answer_json(check, answer, typed, under)
        document |= {name: said for name, said in (("kept", kept), ("not_kept", not_kept)) if said}
        say(json.dumps(document | {name: reply[name] for name in ("picture",) if name in reply}))
    else:
        say("\n".join(_as_text(check, answer, typed, dress, site)))
        if "picture" in reply:
            say("\n".join(_drawn(reply["picture"], dress, site, arguments.ascii)))
        if kept:
            say(f"Logbook: {kept}.")
        if not_kept:
            say(f"NOT KEPT: {not_kept}")
    # The answer stands although it could not be kept.
    return 1 if not_kept else 0


def _drawn(plain: Mapping[str, Any] | None, dress: Dress, site: Site, ascii_alone: bool) -> list[str]:
    """Return the lines of a picture below its sheet."""
    if plain is None:
        return ["", "No picture: no point has both its coordinates."]
    return ["", *draw(Picture.from_plain(plain), *_PICTURE, dress, site, ascii_alone=ascii_alone).lines()]


def _texts(check: Check, arguments: Namespace) -> dict[str, str]:
    """Return what was typed for every reading; an option that is given but empty is refused."""
    given = {line.name: getattr(arguments, line.name) for line in check.reading_lines()}
    for name, text in given.items():
        if text is not None and not text.strip():
            raise Refusal("It is given, but empty.", "Write a reading, or leave it out.", name)
    return {name: text or "" for name, text in given.items()}


def _as_text(check: Check, answer: Answer, typed: Mapping[str, TypedLine], dress: Dress, site: Site) -> list[str]:
    head = check.label
    if answer.refrigerant:
        refrigerant = find(answer.refrigerant)
        head = f"{refrigerant.designation}  {refrigerant.safety_class}  {refrigerant.nature}"
    lines = [f"{head}   site {site_line(site)}", "-" * 78]
    for declared in check.reading_lines():
        line = typed[declared.name]
        if line.value is not None:
            first, second = line.understood
            lines.append(f"{declared.label:<24}{line.text.strip():<18}  {first:<14} {second}".rstrip())
    lines.append("-" * 78)
    for found in findings(check, answer, dress, site):
        wide, narrow = (21, 18) if found.paired else (14, 13)
        lines.append(f"{found.label:<23} {found.first:<{wide}} {found.second:<{narrow}} {found.remark}".rstrip())
    pressures = every_pressure(answer, dress, site) if check.name == "saturation" else None
    for shown_table in [*([pressures] if pressures else []), *(table(raw, dress, site) for raw in answer.tables)]:
        lines += ["", *table_lines(shown_table)]
    lines.append("-" * 78)
    for word, remarks in (("Caution: ", answer.cautions), ("Note: ", answer.notes)):
        for remark in remarks:
            lines += wrapped(word + sentence(remark, dress, site), _WIDTH, "  ")
    return [*lines, FOOTNOTE]


def table_lines(shown_table: TableText) -> list[str]:
    """Return a table as lines of text with columns flush right; the row that is the reading has a mark."""
    widths = [
        max(len(row[place]) for row in (shown_table.headings, *shown_table.rows))
        for place in range(len(shown_table.headings))
    ]
    lines = [shown_table.title]
    for number, row in enumerate((shown_table.headings, *shown_table.rows), -1):
        cells = "  ".join(f"{cell:>{width}}" for cell, width in zip(row, widths, strict=True))
        lines.append(f"{'>' if number == shown_table.marked else ' '} {cells}")
    return lines


def convert(arguments: Namespace, say: Printer) -> int:
    """Print one reading in every unit of its kind."""
    home = places(logbook=arguments.logbook)
    remembered, notes = load_settings(home.settings_file)
    settings = overridden(remembered, arguments.altitude, arguments.barometer, arguments.units)
    dress, site = dress_of(settings), site_of(settings)
    try:
        kind = _kind_of(arguments.reading)
        reading = read(arguments.reading, kind, dress.default(kind), dress, site)
    except Refusal as refusal:
        raise refusal.about("reading") from None
    found: dict[str, dict[str, Any]]
    if kind is Kind.PRESSURE:
        found = {
            "absolute_pressure": {"value": reading.value, "unit": "Pa"},
            "gauge_pressure": {"value": reading.value - site.atmosphere, "unit": "Pa"},
        }
    else:
        found = {kind.value.replace(" ", "_"): {"value": reading.value, "unit": SI_UNIT[kind]}}
    if kind is Kind.TEMPERATURE:
        difference = read(arguments.reading, Kind.TEMPERATURE_DIFFERENCE, unit(Kind.TEMPERATURE_DIFFERENCE, "K"),
                          dress, site)  # fmt: skip
        texts = [write(difference.value, unit(difference.kind, label), difference.kind, site) for label in ("K", "°F")]
        notes.append(f"Read as a temperature. As a temperature difference it would be {texts[0]} = {texts[1]}.")
    if arguments.json:
        say(
            json.dumps(
                {
                    "check": "convert",
                    "refrigerant": None,
                    "site": {"atmosphere": {"value": site.atmosphere, "unit": "Pa"}, "source": site.source},
                    "readings": {"reading": {"value": reading.value, "unit": SI_UNIT[kind], "kind": kind.value,
                                             "typed": arguments.reading.strip()}},
                    "findings": found,
                    "notes": notes,
                    "cautions": [],
                }
            )
        )  # fmt: skip
        return 0
    first, second = understood(reading, dress, site)
    say(f"{arguments.reading.strip()}   {kind.value}: {first}{' = ' + second if second else ''}")
    if kind is Kind.PRESSURE:
        say(f"site {site_line(site)}")
    for text in every_unit(reading.value, kind, site):
        say(f"  {text}")
    for note in notes:
        say(f"Note: {note}")
    return 0


def _kind_of(text: str) -> Kind:
    """Return the kind whose unit the text carries, a temperature before a difference; Refusal without a unit."""
    _, unit_text = split_number(guard(text))
    if not unit_text:
        raise Refusal(f"{quoted(text)} has no unit.", "Type the unit too, for example 12.4 bar g or 185 psig.")
    folded = fold(unit_text)
    for kind in Kind:
        if kind in (Kind.ABSOLUTE_PRESSURE, Kind.PRESSURE_DIFFERENCE, Kind.WORDS, Kind.RATIO):
            continue
        if folded in spellings(kind):
            return kind
    if folded in spellings(Kind.PRESSURE_DIFFERENCE):
        return Kind.PRESSURE_DIFFERENCE
    # Not a unit of any kind: the refusal of the likeliest kind offers the nearest spelling.
    kind = nearest_kind(unit_text, [kind for kind in Kind if kind is not Kind.WORDS])
    read(text, kind, unit(Kind.PRESSURE, "bar g"), Dress(), Site())
    raise Refusal(f"{quoted(text)} is not understood.", f"Write for example {example(Kind.PRESSURE)}.")
