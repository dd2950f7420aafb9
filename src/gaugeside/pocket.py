"""`gaugeside table`: the pocket table as text, CSV or JSON."""

from __future__ import annotations

import csv
import io
import json
from argparse import Namespace
from collections.abc import Callable
from dataclasses import replace

from gaugeside.checks.pocket_table import PocketTable, pocket_table
from gaugeside.checks.view import site_line
from gaugeside.errors import Refusal
from gaugeside.preferences import dress_of, overridden, site_of
from gaugeside.quantities import (
    Dress,
    Kind,
    Reading,
    Sense,
    Site,
    Unit,
    checked_single,
    fold,
    guard,
    in_unit,
    number,
    quoted,
    read,
    spellings,
    split_number,
    with_sense,
)
from gaugeside.refrigerants import find, load_own
from gaugeside.settings import load_settings, places


def print_table(arguments: Namespace, say: Callable[[str], None]) -> int:
    """Print the table that the command line asks for."""
    home = places()
    remembered, _ = load_settings(home.settings_file)
    settings = overridden(remembered, arguments.altitude, arguments.barometer, arguments.units)
    if arguments.sense is not None:
        settings = replace(settings, bare_pressure=arguments.sense)
    load_own(home.settings_folder)
    dress, site = dress_of(settings), site_of(settings)
    if arguments.pressure_unit is not None:
        dress = _with_pressure_unit(dress, arguments.pressure_unit)
    try:
        refrigerant = find(arguments.refrigerant).designation
    except Refusal as refusal:
        raise refusal.about("refrigerant") from None
    first, last = (_end(arguments, name, dress, site) for name in ("from", "to"))
    if first.kind is not last.kind:
        raise Refusal(
            f"The start is a {first.kind.value} and the end a {last.kind.value}.", "Give both of one kind.", "to"
        )
    step = _step(arguments.step, first.kind, dress, site)
    table = pocket_table(refrigerant, first.kind, first.value, last.value, step.value)
    if arguments.json:
        say(
            json.dumps(
                {"refrigerant": refrigerant, "rows": [dict(zip(table.names, row, strict=True)) for row in table.rows]}
            )
        )
    elif arguments.csv:
        say(_as_csv(table, dress, site))
    else:
        say("\n".join(_as_text(table, dress, site)))
    return 0


def _with_pressure_unit(dress: Dress, text: str) -> Dress:
    """Return the dress with pressures in the unit named, which may say gauge or absolute itself."""
    try:
        found = spellings(Kind.PRESSURE).get(fold(text))
        if found is None or found.sense is Sense.VACUUM:
            checked_single(Kind.PRESSURE, text)
            raise Refusal(f"{quoted(text)} does not suit a table.", "Write bar, bar abs, psi, psi abs or kPa.")
        bare = found.label.removesuffix(" g").removesuffix(" abs")
        singles = {**dress.singles, Kind.PRESSURE: checked_single(Kind.PRESSURE, bare)}
    except Refusal as refusal:
        raise refusal.about("pressure_unit") from None
    return replace(dress, singles=singles, bare=found.sense or dress.bare)


def _end(arguments: Namespace, name: str, dress: Dress, site: Site) -> Reading:
    text = getattr(arguments, f"{name}_")
    try:
        _, unit_text = split_number(guard(text))
        if not unit_text:
            raise Refusal(f"{quoted(text)} has no unit.", "Write for example -50 C or 0 bar g.")
        kind = Kind.TEMPERATURE if fold(unit_text) in spellings(Kind.TEMPERATURE) else Kind.PRESSURE
        return read(text, kind, dress.default(kind), dress, site)
    except Refusal as refusal:
        raise refusal.about(name) from None


def _step(text: str | None, kind: Kind, dress: Dress, site: Site) -> Reading:
    difference = Kind.TEMPERATURE_DIFFERENCE if kind is Kind.TEMPERATURE else Kind.PRESSURE_DIFFERENCE
    try:
        return read("1" if text is None else text, difference, dress.default(difference), dress, site)
    except Refusal as refusal:
        raise refusal.about("step") from None


def _units(table: PocketTable, dress: Dress) -> tuple[Unit, Unit]:
    units = {
        Kind.PRESSURE: with_sense(dress.unit(Kind.PRESSURE), dress.bare),
        Kind.TEMPERATURE: dress.unit(Kind.TEMPERATURE),
    }
    return units[table.by], units[table.other]


def _cells(table: PocketTable, dress: Dress, site: Site) -> list[tuple[str, ...]]:
    by, other = _units(table, dress)
    return [
        (
            number(in_unit(row[0], by, table.by, site), by.decimals, fixed=True),
            *(number(in_unit(value, other, table.other, site), other.decimals, fixed=True) for value in row[1:]),
        )
        for row in table.rows
    ]


def _as_csv(table: PocketTable, dress: Dress, site: Site) -> str:
    by, other = _units(table, dress)
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    labels = (by.label, other.label, other.label)
    writer.writerow([f"{name.replace('_', ' ')}, {label}" for name, label in zip(table.names, labels, strict=True)])
    writer.writerows(_cells(table, dress, site))
    return text.getvalue().removesuffix("\n")


def _as_text(table: PocketTable, dress: Dress, site: Site) -> list[str]:
    by, other = _units(table, dress)
    lines = [f"{table.refrigerant}   site {site_line(site)}", ""]
    lines.append(f"{table.by.value:>12}  {'bubble':>12}  {'dew':>12}")
    lines.append(f"{by.label:>12}  {other.label:>12}  {other.label:>12}")
    lines += [f"{first:>12}  {bubble:>12}  {dew:>12}" for first, bubble, dew in _cells(table, dress, site)]
    return lines
