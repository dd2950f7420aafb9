"""One request in plain JSON types, one reply in plain JSON types: the same in a helper process and outside."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from gaugeside.checks import CHECKS
from gaugeside.checks.compressor_map import CompressorMap
from gaugeside.checks.picture import picture
from gaugeside.checks.sheet import Conditions, Surroundings, answer
from gaugeside.errors import NotModelled, Refusal
from gaugeside.quantities import Dress, Kind, Site
from gaugeside.refrigerants import Datum, find


def request(
    check: str,
    refrigerant: str,
    values: Mapping[str, Any],
    *,
    site: Site,
    datum: str,
    dress: Dress,
    compressor: CompressorMap | None = None,
    drawn: bool = False,
) -> dict[str, Any]:
    """Return the request that asks for `check` on SI `values`, and for its picture when it is to be `drawn`.

    compressor: the machine's polynomials.
    """
    fahrenheit = dress.unit(Kind.TEMPERATURE).label == "°F"
    return {
        "check": check,
        "refrigerant": refrigerant,
        "values": dict(values),
        "atmosphere": site.atmosphere,
        "site": site.source,
        "datum": datum,
        "compressor": None if compressor is None else compressor.plain(),
        "picture": drawn,
        # Origin and step of the whole degrees in which the reader counts.
        "grid": [459.67 * 5 / 9, 10 / 9] if fahrenheit else [273.15, 1.0],
    }


def perform(asked: Mapping[str, Any]) -> dict[str, Any]:
    """Return {"answer": ...} or, refused, {"error": {"field", "message", "hint"}}; other exceptions are faults.

    Asked for a picture, the reply has {"picture": ...} beside the answer, None where there is nothing to draw.
    """
    # Imported here: they bring the property library, which the screen's process never loads.
    from gaugeside.refrigerants import open_fluid
    from gaugeside.refrigerants.library import VERSION

    try:
        check = CHECKS[asked["check"]]
        datum, (origin, step) = Datum(asked["datum"]), asked["grid"]
        site = Site(asked["atmosphere"], asked["site"])
        where = Surroundings(datum, site, (origin, step))
        if check.needs_refrigerant:
            found = find(asked["refrigerant"])
            plain = asked.get("compressor")
            where = Conditions(
                datum,
                site,
                (origin, step),
                fluid=open_fluid(found, datum),
                refrigerant=found,
                compressor=None if plain is None else CompressorMap.from_plain(plain),
            )
        found_out = answer(check, where, asked["values"], VERSION)
        reply: dict[str, Any] = {"answer": found_out.plain()}
        if asked.get("picture"):
            drawn = picture(where.fluid, found_out, asked["values"]) if isinstance(where, Conditions) else None
            reply["picture"] = None if drawn is None else drawn.plain()
        return reply
    except NotModelled as refusal:
        return _refused(refusal.about("refrigerant"))
    except Refusal as refusal:
        return _refused(refusal)


def _refused(refusal: Refusal) -> dict[str, Any]:
    return {"error": {"field": refusal.field, "message": refusal.message, "hint": refusal.hint}}
