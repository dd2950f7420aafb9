"""The command line: opens the app, or runs one check and prints."""

from __future__ import annotations

import argparse
import json
import os
import shutil
import sys
from collections.abc import Callable, Sequence
from typing import Any, NoReturn

from gaugeside import __version__
from gaugeside.errors import Refusal
from gaugeside.options import (
    add_batch,
    add_common,
    add_logbook,
    as_typed,
    in_short,
    plain,
    shielded,
    typed_path,
    with_example,
)

_LONGEST_MESSAGE = 500  # [characters]: a refused word may be of any length


class _Parser(argparse.ArgumentParser):
    """A parser whose complaints are refusals, so that --json can carry them; options are written whole."""

    def __init__(self, **settings: Any) -> None:
        super().__init__(allow_abbrev=False, **settings)

    def _print_message(self, message: str, file: Any = None) -> None:
        _print(message.removesuffix("\n"), file)

    def error(self, message: str) -> NoReturn:
        if len(message) > _LONGEST_MESSAGE:
            message = f"{message[: _LONGEST_MESSAGE // 2]} ... {message[-_LONGEST_MESSAGE // 2 :]}"
        quotes = "A reading with a blank in it needs quotes: '45 C'. " if message.startswith("unrecognized") else ""
        raise Refusal(f"{message[:1].upper()}{message[1:]}.", f"{quotes}See '{self.prog} --help'.")


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line; return 0 for an answer, 2 for refused input, 1 for trouble of our own."""
    words = [shielded(word) for word in (sys.argv[1:] if argv is None else argv)]
    try:
        try:
            code = _run(words)
        except Refusal as refusal:
            code = _refuse(refusal, "--json" in words)
        if sys.stdout is not None:
            # Here and not at the interpreter's end, where a reader that went away cannot be caught.
            sys.stdout.flush()
        return code
    except BrokenPipeError:
        # The reader went away, as `| head` does; nothing is left to say to it.
        _shut_output()
        return 0
    except OSError as fault:
        from gaugeside.disk import reason

        if fault.filename is not None:
            raise
        # Without a file's name it is the output itself that takes no more.
        _shut_output()
        _print(f"The answer cannot be written: {reason(fault)}.", sys.stderr)
        return 1
    except KeyboardInterrupt:
        return 130


def _shut_output() -> None:
    """Let what is still buffered for standard output go nowhere, so that the interpreter's end stays quiet."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), 1)


def _run(words: Sequence[str]) -> int:
    # The checks, of which the commands are made, are not waited for where none is given: the screen paints sooner.
    app_arguments, others = _app_parser(None).parse_known_args(words)
    if not others:
        return _open_app(app_arguments)
    try:
        arguments = _parser().parse_args(words)
    except SystemExit as leave:
        # After --help and --version.
        return int(leave.code or 0)
    for name, value in vars(arguments).items():
        setattr(arguments, name, as_typed(value) if isinstance(value, str) else value)
    if arguments.run is None:
        return _open_app(arguments)
    if sys.stdout is None and getattr(arguments, "to", None) in (None, "-"):
        _print("Standard output is closed, so nothing was done. Open it, or send it to a file.", sys.stderr)
        return 1
    return int(arguments.run(arguments))


def _refuse(refusal: Refusal, as_json: bool) -> int:
    if as_json:
        # JSON goes out in ASCII everywhere: no locale can spoil it.
        error = {"field": refusal.field, "message": refusal.message, "hint": refusal.hint}
        _print(json.dumps({"error": error}))
    else:
        field = f"{refusal.field.replace('_', ' ')}: " if refusal.field else ""
        _print(f"{field}{refusal.sentence()}", sys.stderr)
    return 2


def _print(text: str, stream: Any = None) -> None:
    from gaugeside.checks.view import ascii_only
    from gaugeside.text import plain_text

    stream = sys.stdout if stream is None else stream
    if stream is None:
        return
    # The last door: words of a command line, a path, a file of another hand end up here too.
    text = "\n".join(plain_text(line) for line in text.split("\n"))
    print(text if _has_unicode(stream) else ascii_only(text), file=stream)


def _tell(text: str) -> None:
    _print(text, sys.stderr)


def _row_printer(arguments: argparse.Namespace) -> Callable[[str], None]:
    """Return what prints the lines of a table, whose cells are plain already and whose delimiter may be a tab."""
    from gaugeside.checks.view import ascii_only

    ascii_alone = arguments.ascii or not _has_unicode(sys.stdout)
    # Whoever follows a growing table reads each row when it is answered.
    return lambda line: print(ascii_only(line) if ascii_alone else line, flush=True)


def _print_ascii(text: str) -> None:
    from gaugeside.checks.view import ascii_only

    _print(ascii_only(text))


def _has_unicode(stream: Any) -> bool:
    """Whether every character can be written to an output stream, by its encoding and by the locale."""
    from gaugeside.app.charset import first_environ, speaks_utf8

    environ = dict(os.environ)
    if "LC_CTYPE" not in first_environ():
        # The interpreter's own, put in the place of a C locale at its start.
        environ.pop("LC_CTYPE", None)
    return speaks_utf8(environ, getattr(stream, "encoding", None))


def _printer(arguments: argparse.Namespace) -> Callable[[str], None]:
    return _print_ascii if arguments.ascii else _print


def _app_parser(description: str | None) -> _Parser:
    """Return the parser of the app's own options; with a description also of --help and --version."""
    parser = _Parser(prog="gaugeside", description=description, add_help=description is not None)
    if description is not None:
        parser.add_argument("--version", action="version", version=f"gaugeside {__version__}")
    parser.add_argument("--logbook", type=typed_path, metavar="PATH", help="use this logbook file")
    parser.add_argument("--ascii", action="store_true", help="write ASCII characters alone, on the screen too")
    parser.add_argument(
        "--demo", action="store_true", help="open the app on an invented cold store, in a throw-away folder"
    )
    parser.set_defaults(run=None)
    return parser


def _parser() -> argparse.ArgumentParser:
    from gaugeside.checks import CHECKS

    parser = _app_parser(
        "Saturation, superheat and subcooling, and the heat and power of a component, from readings in any units. "
        "Without a command the app opens."
    )
    commands = parser.add_subparsers(title="commands", metavar="COMMAND")
    for check in CHECKS.values():
        _add_check(commands, check)
    convert = commands.add_parser("convert", help="one reading in every unit of its kind", **with_example("convert"))
    convert.add_argument("reading", help="a number and its unit, in quotes: '12.4 bar g', '23 inHg vac', '45 C'")
    add_common(convert)
    convert.set_defaults(run=_convert)
    refrigerants = commands.add_parser("refrigerants", help="the catalogue, or the part of it that matches")
    refrigerants.add_argument("part", nargs="?", default="", help="part of a designation, name or component")
    refrigerants.add_argument("--json", action="store_true", help="the same as JSON")
    refrigerants.set_defaults(run=_refrigerants)
    _add_table(commands)
    add_batch(commands, _batch)
    add_logbook(commands, _logbook_list, _logbook_show, _logbook_export, _logbook_import)
    return parser


def _add_check(commands: Any, check: Any) -> None:
    from gaugeside.checks.picture import DRAWN
    from gaugeside.checks.view import wrapped

    command = commands.add_parser(
        check.name,
        help=plain(in_short(check)),
        description=plain("\n".join(wrapped(check.summary, 78))),
        **with_example(check.name),
    )
    before = [line for line in check.reading_lines() if line.positional and line.choices]
    after = [line for line in check.reading_lines() if line.positional and not line.choices]
    for line in before:
        command.add_argument(line.name, help=plain(line.help))
    if check.needs_refrigerant:
        command.add_argument("refrigerant", help="designation or common name: R-134a, 134a, CO2")
    for line in after:
        command.add_argument(line.name, help=plain(line.help))
    for line in check.reading_lines():
        if not line.positional:
            said = f"{', '.join(line.choices)}. {line.help}" if line.choices else line.help
            metavar = "WORD" if line.choices else "READING"
            command.add_argument(f"--{line.name.replace('_', '-')}", metavar=metavar, help=plain(said))
    add_common(command)
    if check.name in DRAWN:
        command.add_argument("--picture", action="store_true", help="draw the readings among the refrigerant's curves")
    command.add_argument("--ascii", action="store_true", default=argparse.SUPPRESS, help=argparse.SUPPRESS)
    command.add_argument("--datum", choices=("iir", "ashrae", "nbp"), help="zero of the enthalpies")
    command.add_argument("--keep", action="store_true", help="keep the calculation in the logbook")
    command.add_argument("--tag", default=None, help="which machine, for the logbook")
    command.add_argument("--note", default="", help="a note for the logbook")
    command.set_defaults(run=_run_check, check=check)


def _add_table(commands: Any) -> None:
    command = commands.add_parser("table", help="the pocket table over a range of temperatures or pressures")
    command.add_argument("refrigerant", help="designation or common name: R-134a, 134a, CO2")
    command.add_argument("--from", dest="from_", required=True, metavar="READING", help="-50 C or 0 bar g")
    command.add_argument("--to", dest="to_", required=True, metavar="READING", help="65 C or 20 bar g")
    command.add_argument("--step", metavar="READING", help="0.5 K or 0.5 bar; 1 of the reader's unit when left out")
    command.add_argument("--pressure-unit", metavar="UNIT", help="bar, psi, kPa ..., with g or abs where wanted")
    command.add_argument("--sense", choices=("gauge", "absolute"), help="how pressures are written")
    command.add_argument("--csv", action="store_true", help="comma-separated values")
    add_common(command)
    command.set_defaults(run=_table)


def _open_app(arguments: argparse.Namespace) -> int:
    if not (os.isatty(0) and os.isatty(2)) or os.environ.get("TERM", "") in ("", "dumb"):
        raise Refusal(
            "The app needs a terminal that can place text, and this is none.",
            "Use the one-shot commands: gaugeside saturation R-134a '2.6 bar g', or gaugeside --help.",
        )
    from gaugeside.app.start import start

    if arguments.demo:
        from gaugeside.demo import demo_folder

        with demo_folder() as folder:
            os.environ["GAUGESIDE_HOME"] = str(folder)
            return start(None, arguments.ascii, lambda: shutil.rmtree(folder, ignore_errors=True))
    return start(arguments.logbook, ascii_alone=arguments.ascii)


def _run_check(arguments: argparse.Namespace) -> int:
    from gaugeside.oneshot import run_check

    arguments.ascii = arguments.ascii or not _has_unicode(sys.stdout)
    return run_check(arguments, _printer(arguments))


def _convert(arguments: argparse.Namespace) -> int:
    from gaugeside.oneshot import convert

    return convert(arguments, _printer(arguments))


def _table(arguments: argparse.Namespace) -> int:
    from gaugeside.pocket import print_table

    return print_table(arguments, _print)


def _refrigerants(arguments: argparse.Namespace) -> int:
    from gaugeside.listings import list_refrigerants

    return list_refrigerants(arguments, _printer(arguments))


def _logbook_list(arguments: argparse.Namespace) -> int:
    from gaugeside.listings import list_logbook

    return list_logbook(arguments, _printer(arguments))


def _logbook_show(arguments: argparse.Namespace) -> int:
    from gaugeside.listings import show_entry

    return show_entry(arguments, _printer(arguments))


def _logbook_export(arguments: argparse.Namespace) -> int:
    from gaugeside.listings import export_logbook

    return export_logbook(arguments, _row_printer(arguments), _tell)


def _logbook_import(arguments: argparse.Namespace) -> int:
    from gaugeside.listings import import_logbook

    return import_logbook(arguments, _printer(arguments), _tell)


def _batch(arguments: argparse.Namespace) -> int:
    from gaugeside.batch import run_batch

    return run_batch(arguments, _row_printer(arguments), _tell)
