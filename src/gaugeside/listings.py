"""The commands that list, and that carry lists out and in: refrigerants of the catalogue, entries of the logbook."""

from __future__ import annotations

import json
from argparse import Namespace
from collections.abc import Callable, Sequence
from typing import Any

from gaugeside.files import OR_REPLACE, STANDARD, content
from gaugeside.logbook import Entry as LogbookEntry
from gaugeside.logbook import Logbook
from gaugeside.logbook.exchange import FEWER, LARGEST, entry_json, read_document
from gaugeside.logbook.links import linked_first, relinked
from gaugeside.logbook.outgoing import lines_of, write_file
from gaugeside.refrigerants import find, load_own, search
from gaugeside.settings import places

Printer = Callable[[str], None]
# Columns of a list of entries [characters]; the note stands last and has no end.
_MOST = (9, 16, 10, 12, 16, 60, 0)
_MOST_NAMED = 10  # entries in one sentence


def list_refrigerants(arguments: Namespace, say: Printer) -> int:
    """Print the catalogue, or what of it matches a part of a name."""
    home = places()
    troubles = load_own(home.settings_folder)
    found = search(arguments.part)
    if not found:
        find(arguments.part)
    if arguments.json:
        documents = [
            {
                "designation": r.designation, "names": list(r.names), "nature": r.nature, "modelled": r.modelled,
                "reason": r.reason, "safety_class": r.safety_class, "gwp": r.gwp, "gwp_source": r.gwp_source,
                "composition": dict(r.composition),
                "critical_temperature": {"value": r.critical_temperature, "unit": "K"},
                "critical_pressure": {"value": r.critical_pressure, "unit": "Pa"},
                "model_uncertainty": {"value": r.model_uncertainty, "unit": "K"},
            }
            for r in found
        ]  # fmt: skip
        say(json.dumps({"refrigerants": documents, "notes": troubles}))
        return 0
    for r in found:
        say(refrigerant_line(r))
    for source in sorted({r.gwp_source for r in found if r.gwp is not None}):
        say(f"GWP: {source}.")
    for trouble in troubles:
        say(f"Note: {trouble}")
    return 0


def refrigerant_line(r: Any) -> str:
    """Return one line about a refrigerant: designation, class, nature, GWP, composition or names."""
    gwp = "GWP -" if r.gwp is None else f"GWP {r.gwp:.0f}"
    mass = " ".join(f"{name.removeprefix('R-')} {100 * fraction:.4g} %" for name, fraction in r.composition)
    what = ", ".join(r.names) if len(r.composition) < 2 else mass
    tail = what if r.modelled else f"NOT MODELLED: {r.reason}"
    return f"{r.designation:<12}{r.safety_class or '-':<5}{r.nature:<10}{gwp:<11}{tail}".rstrip()


def list_logbook(arguments: Namespace, say: Printer) -> int:
    """Print the logbook's entries, newest first."""
    logbook = Logbook(places(logbook=arguments.logbook).logbook_file)
    found = logbook.entries(" ".join(arguments.words), limit=max(1, arguments.most))
    if arguments.json:
        say(json.dumps({"entries": [entry_json(entry) for entry in found]}))
        return 0
    for line in entry_lines(found):
        say(line)
    if not found:
        say("No entry." if arguments.words else "The logbook is empty.")
    return 0


def show_entry(arguments: Namespace, say: Printer) -> int:
    """Print one entry whole."""
    entry = Logbook(places(logbook=arguments.logbook).logbook_file).entry(arguments.number)
    if arguments.json:
        say(json.dumps(entry_json(entry)))
        return 0
    say(*entry_lines([entry]))
    for name, text in entry.readings.items():
        say(f"  {name.replace('_', ' '):<24}{text}")
    if entry.options.get("site"):
        say(f"  {'site':<24}{entry.options['site']}")
    say(f"  {entry.headline}")
    for text in (*entry.cautions, *entry.notes):
        say(f"  {text}")
    return 0


def entry_lines(entries: Sequence[LogbookEntry]) -> list[str]:
    """Return each entry as one line, in columns; what an entry lacks is a dash."""
    rows = [
        [
            f"{entry.number:>4}",
            entry.kept_at.astimezone().strftime("%Y-%m-%d %H:%M"),
            *(text or "-" for text in (entry.check, entry.refrigerant, entry.tag, entry.headline, entry.note)),
        ]
        for entry in entries
    ]
    # One long text pushes on what stands behind it in its own line, not in all others.
    columns = zip(*rows, strict=True)
    widths = [min(max(map(len, column)), most) for column, most in zip(columns, _MOST, strict=False)]
    return ["  ".join(map(str.ljust, row, widths)).rstrip() for row in rows]


def export_logbook(arguments: Namespace, put: Printer, tell: Printer) -> int:
    """Put the logbook's entries, oldest first, out as JSON or CSV: to `put` line by line, or into a file.

    tell: takes a sentence where a part of some could not be read back.
    """
    logbook, words = Logbook(places(logbook=arguments.logbook).logbook_file), " ".join(arguments.words)
    unread: set[int | None] = set()
    if arguments.to not in (None, STANDARD):
        how = {"as_csv": arguments.csv, "replace": arguments.replace}
        write_file(logbook, words, arguments.to, **how, hint=OR_REPLACE, unread=unread)
    else:
        for line in lines_of(logbook, words, arguments.csv, unread):
            put(line)
    if unread:
        which = ", ".join(map(str, sorted(unread, key=lambda number: number or 0)[:_MOST_NAMED]))
        more = f" and {len(unread) - _MOST_NAMED} more" if len(unread) > _MOST_NAMED else ""
        tell(f"Of {'entry' if len(unread) == 1 else 'entries'} {which}{more} a part could not be read and is left out.")
    return 0


def import_logbook(arguments: Namespace, say: Printer, tell: Printer) -> int:
    """Take in the entries that a file holds; return 0 when none was refused, else 2.

    say: takes the answer. tell: takes the reasons of those refused.
    """
    document = read_document(content(arguments.file, LARGEST, FEWER))
    logbook = Logbook(places(logbook=arguments.logbook).logbook_file)
    taken = logbook.take(linked_first(document.entries), relinked) if document.entries else 0
    already = len(document.entries) - taken
    if arguments.json:
        counts = {"taken": taken, "already": already, "refused": document.refused}
        say(json.dumps({**counts, "reasons": document.reasons, "notes": logbook.messages}))
    else:
        for words in (*logbook.messages, *document.reasons):
            tell(words[:1].upper() + words[1:])
        if document.refused > len(document.reasons):
            tell(f"And {document.refused - len(document.reasons)} more.")
        entries = "entry" if taken == 1 else "entries"
        say(f"{taken} {entries} taken, {already} were there already, {document.refused} refused.")
    return 2 if document.refused else 0
