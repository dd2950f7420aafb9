"""What a command line is answered under, one answer, and that answer as JSON: the same for one and for many."""

from __future__ import annotations

from argparse import Namespace
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from gaugeside.checks.compressor_map import CompressorMap, load_maps
from gaugeside.checks.perform import perform, request
from gaugeside.checks.sheet import Answer, Check, Entry
from gaugeside.checks.typed import TypedLine
from gaugeside.checks.view import sentence
from gaugeside.errors import Refusal
from gaugeside.keeping import json_findings, with_linked_entries
from gaugeside.logbook import Logbook
from gaugeside.preferences import dress_of, overridden, site_of
from gaugeside.quantities import PROPERTIES, SI_UNIT, Dress, Kind, Site
from gaugeside.refrigerants import find, load_own
from gaugeside.settings import Places, Settings, load_settings, places


@dataclass(frozen=True)
class Terms:
    """What holds for every reading of one command line.

    troubles: what was wrong with settings and files, as sentences.
    """

    home: Places
    settings: Settings
    dress: Dress
    site: Site
    refrigerant: str
    compressor: CompressorMap | None
    troubles: list[str]


def terms(check: Check, arguments: Namespace) -> Terms:
    """Return what a command line and the settings behind it say; Refusal for what of it is not understood."""
    home = places(logbook=arguments.logbook)
    remembered, troubles = load_settings(home.settings_file)
    settings = overridden(remembered, arguments.altitude, arguments.barometer, arguments.units)
    settings = replace(settings, datum=arguments.datum or settings.datum)
    if arguments.tag is not None:
        settings = replace(settings, tag=arguments.tag)
    troubles += load_own(home.settings_folder)
    dress, site = dress_of(settings), site_of(settings)
    refrigerant = _named(arguments.refrigerant) if check.needs_refrigerant else ""
    compressor = _compressor(home, settings, refrigerant, troubles) if check.name == "machine" else None
    return Terms(home, settings, dress, site, refrigerant, compressor, troubles)


def _named(text: str) -> str:
    try:
        return find(text).designation
    except Refusal as refusal:
        raise refusal.about("refrigerant") from None


def _compressor(home: Places, settings: Settings, refrigerant: str, troubles: list[str]) -> CompressorMap | None:
    """Return the polynomials kept for the machine named, where they are for this refrigerant."""
    maps, more = load_maps(home.settings_folder)
    troubles += more
    found = maps.get(settings.tag.casefold())
    if found is not None and find(found.refrigerant).designation != refrigerant:
        troubles.append(f"The polynomials of {found.tag} are for {found.refrigerant} and are left out.")
        return None
    return found


def answered(
    check: Check, typed: Mapping[str, TypedLine], under: Terms, logbook: Logbook, *, drawn: bool = False
) -> tuple[Answer, Mapping[str, Any]]:
    """Return the answer to a form that is read, and the whole reply with its picture when it is to be `drawn`.

    Raises Refusal, naming the field, for a line that was not understood and for readings without an answer.
    """
    for line in typed.values():
        if line.refusal is not None:
            raise line.refusal
    values = {name: line.value for name, line in typed.items() if line.value is not None}
    reply = perform(
        request(
            check.name,
            under.refrigerant,
            with_linked_entries(values, logbook),
            site=under.site,
            datum=under.settings.datum,
            dress=under.dress,
            compressor=under.compressor,
            drawn=drawn,
        )
    )
    _raise_refused(reply.get("error"))
    answer = Answer.from_plain(reply["answer"])
    _raise_refused(answer.unresolved)
    return answer, reply


def _raise_refused(error: Mapping[str, Any] | None) -> None:
    if error is not None:
        raise Refusal(error["message"], error["hint"] or "", error["field"])


def answer_json(check: Check, answer: Answer, typed: Mapping[str, TypedLine], under: Terms) -> dict[str, Any]:
    """Return an answer as JSON types: SI values under full names."""
    return {
        "check": check.name,
        "refrigerant": answer.refrigerant,
        "site": {"atmosphere": {"value": under.site.atmosphere, "unit": "Pa"}, "source": under.site.source},
        "datum": under.settings.datum,
        "readings": {
            line.name: _reading_json(line.entry, line.kind, typed[line.name])
            for line in check.reading_lines()
            if typed[line.name].value is not None
        },
        "findings": json_findings(check, answer),
        "tables": [
            {
                "title": raw.title,
                "columns": [{"name": label, "unit": SI_UNIT[kind]} for label, kind in raw.columns],
                "rows": [list(row) for row in raw.rows],
            }
            for raw in answer.tables
        ],
        "notes": [sentence(remark, under.dress, under.site) for remark in answer.notes],
        "cautions": [sentence(remark, under.dress, under.site) for remark in answer.cautions],
        "library_version": answer.library_version,
    }


def _reading_json(entry: Entry, kind: Kind, line: TypedLine) -> dict[str, Any]:
    if entry is Entry.QUANTITY:
        return {"value": line.value, "unit": SI_UNIT[kind], "typed": line.text.strip()}
    if entry is Entry.CHOICE:
        return {"value": line.value, "unit": "", "typed": line.text.strip()}
    if entry is Entry.STATE:
        values = {name: {"value": value, "unit": SI_UNIT[PROPERTIES[name]]} for name, value in line.value.items()}
        return {"values": values, "typed": line.text.strip()}
    if entry is Entry.LOGBOOK_ENTRY:
        return {"value": int(line.value["entry"]), "unit": "", "typed": line.text.strip()}
    if entry is Entry.WORDS:
        return {"value": line.value, "unit": "", "typed": line.text.strip()}
    ((name, value),) = line.value.items()
    return {"value": value, "unit": SI_UNIT[Kind(name)], "kind": name, "typed": line.text.strip()}
