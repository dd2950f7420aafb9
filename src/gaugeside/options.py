"""What the options of commands have in common, and the commands that work on whole lists."""

from __future__ import annotations

import argparse
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

Run = Callable[[argparse.Namespace], int]
_MINUS_READING = re.compile(r"[-−]\s*[.,]?[0-9]")

# Commands that may be typed as they stand.
EXAMPLES = {
    "saturation": ("saturation R-448A '12.4 bar g'",),
    "superheat": ("superheat R-134a --suction-pressure '29 psig'", "--suction-temperature '41 F'"),
    "component": (
        "component condenser R-134a --inlet '9.1 bar g, 68 C'",
        "--outlet '9 bar g, SC 4 K' --mass-flow '0.14 kg/s'",
    ),
    "stream": ("stream water --inlet '12 C' --outlet '7 C' --flow '3.2 L/s'",),
    "machine": (
        "machine R-134a",
        "--suction-pressure '1 bar g' --suction-temperature '8 C'",
        "--discharge-pressure '9.1 bar g' --discharge-temperature '68 C'",
        "--liquid-temperature '32 C' --electrical-power '6.2 kW' --drive hermetic",
    ),
    "convert": ("convert '12.4 bar g'",),
    "batch": ("batch superheat R-134a readings.csv --to superheats.csv",),
    "logbook export": ("logbook export --to logbook.json",),
    "logbook import": ("logbook import logbook.json",),
}


def shielded(word: str) -> str:
    """Return a reading that starts with a minus sign so that it is not taken for an option."""
    return f" {word}" if _MINUS_READING.match(word) else word


def as_typed(word: str) -> str:
    """Return a word as it was before it was `shielded`."""
    return word[1:] if word.startswith(" ") and _MINUS_READING.match(word[1:]) else word


def typed_path(word: str) -> Path:
    """Return the path that an option names."""
    return Path(as_typed(word))


def with_example(name: str) -> dict[str, Any]:
    """Return what a parser takes to end its help with a command that may be copied, its lines left as they are."""
    example = " \\\n      ".join(EXAMPLES[name])
    return {"epilog": f"example:\n  gaugeside {example}", "formatter_class": argparse.RawDescriptionHelpFormatter}


def in_short(check: Any) -> str:
    """Return what a check does without the list that may follow."""
    return f"{check.summary.split(': ')[0].removesuffix('.')}."


def plain(help_text: str) -> str:
    """Return a text in which the option parser sees no format."""
    return help_text.replace("%", "%%")


def add_common(command: argparse.ArgumentParser) -> None:
    """Add the options of every command that answers readings."""
    where = command.add_mutually_exclusive_group()
    where.add_argument("--altitude", metavar="READING", help="of the site, for example '1600 m'")
    where.add_argument("--barometer", metavar="READING", help="at the site, for example '83 kPa'")
    command.add_argument("--units", choices=("si", "ip"), help="units of the answer")
    command.add_argument("--json", action="store_true", help="SI values as JSON")
    command.add_argument("--logbook", type=typed_path, default=argparse.SUPPRESS, help=argparse.SUPPRESS)


def add_batch(commands: Any, run: Run) -> None:
    """Add the command that answers every row of a table."""
    from gaugeside.checks import CHECKS

    command = commands.add_parser("batch", help="one check on every row of a table", **with_example("batch"))
    checks = command.add_subparsers(title="checks", metavar="CHECK", required=True)
    for check in CHECKS.values():
        rows = checks.add_parser(check.name, help=plain(in_short(check)), description=_BATCH)
        words = [line for line in check.reading_lines() if line.positional and not line.kinds]
        for line in (line for line in words if line.choices):
            rows.add_argument(line.name, nargs="?", help=plain(f"{line.help} Unless a column says it."))
        if check.needs_refrigerant:
            rows.add_argument("refrigerant", help="designation or common name: R-134a, 134a, CO2")
        for line in (line for line in words if not line.choices):
            rows.add_argument(line.name, nargs="?", help=plain(f"{line.help} Unless a column says it."))
        rows.add_argument("file", metavar="FILE", help="a table with a header, as CSV; - for standard input")
        rows.add_argument("--decimal-comma", action="store_true", help="write findings with a decimal comma")
        _add_target(rows)
        add_common(rows)
        rows.add_argument("--datum", choices=("iir", "ashrae", "nbp"), help="zero of the enthalpies")
        rows.add_argument("--tag", default=None, help="which machine, for its compressor's polynomials")
        rows.set_defaults(run=run, check=check)


_BATCH = (
    "The first line names the columns after the readings, with the unit of their bare numbers in brackets: "
    "suction pressure [psig]. The answer has the same columns, then one for each finding, then cautions and refused. "
    "A text that a spreadsheet would run as a formula gets an apostrophe before it."
)
_EXPORT = (
    "Oldest first, as JSON, which import takes in again, or as CSV for a spreadsheet.\n"
    "In the CSV a text that would run as a formula gets an apostrophe before it."
)


def _add_target(command: argparse.ArgumentParser) -> None:
    command.add_argument("--to", metavar="FILE", help="write into this file, whole or not at all, for you alone")
    command.add_argument("--replace", action="store_true", help="replace the file when it is there already")


def add_logbook(commands: Any, list_: Run, show: Run, export_: Run, import_: Run) -> None:
    """Add the commands of the logbook."""
    command = commands.add_parser("logbook", help="what was kept, out and in")
    actions = command.add_subparsers(title="actions", metavar="ACTION", required=True)
    listing = actions.add_parser("list", help="entries, newest first")
    listing.add_argument("words", nargs="*", help="only entries that hold all these words")
    listing.add_argument("--most", type=int, default=200, help="how many at the most (200)")
    showing = actions.add_parser("show", help="one entry whole")
    showing.add_argument("number", type=int, help="of the entry, as the list shows it")
    export = actions.add_parser(
        "export", help="entries into a file or a pipe", description=_EXPORT, **with_example("logbook export")
    )
    export.add_argument("words", nargs="*", help="only entries that hold all these words")
    export.add_argument("--csv", action="store_true", help="comma-separated values, which cannot be taken in again")
    _add_target(export)
    taking = actions.add_parser("import", help="entries that export wrote", **with_example("logbook import"))
    taking.add_argument("file", metavar="FILE", help="JSON that export wrote; - for standard input")
    for action in (listing, showing, taking):
        action.add_argument("--json", action="store_true", help="the same as JSON")
    for action, run in (listing, list_), (showing, show), (export, export_), (taking, import_):
        action.add_argument("--logbook", type=typed_path, default=argparse.SUPPRESS, help=argparse.SUPPRESS)
        action.set_defaults(run=run)
