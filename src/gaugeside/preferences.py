"""From remembered settings to what a calculation needs: the reader's dress and the site."""

from __future__ import annotations

from dataclasses import replace
from typing import Literal

from gaugeside.errors import Refusal
from gaugeside.quantities import (
    CHOOSABLE,
    Dress,
    Kind,
    Sense,
    Site,
    checked_single,
    example,
    fold,
    guard,
    quoted,
    read,
    site_at_altitude,
    site_with_barometer,
    spellings,
    split_number,
)
from gaugeside.quantities.site import SEA_LEVEL
from gaugeside.settings import Settings

Source = Literal["sea level", "altitude", "barometer"]


def dress_of(settings: Settings) -> Dress:
    """Return the units the settings ask for; a single unit that is not known is left to the system."""
    singles: dict[Kind, str] = {}
    for kind in CHOOSABLE:
        wanted = settings.units.get(kind.value)
        if wanted:
            try:
                singles[kind] = checked_single(kind, wanted)
            except Refusal:
                continue
    return Dress(settings.dress, singles, Sense(settings.bare_pressure))


def site_of(settings: Settings) -> Site:
    """Return the site the settings describe; Refusal when their text does not give one."""
    text = settings.site_pressure_text.strip()
    if settings.site_pressure_from == "sea level" or not text:
        return SEA_LEVEL
    return read_site(text, settings.site_pressure_from, dress_of(settings))


def site_source(text: str) -> Source:
    """Return whether a text without further word is an altitude or a barometer reading, by its unit.

    An empty text is sea level. Raises Refusal for a number without a unit, which could be either.
    """
    if not text.strip():
        return "sea level"
    _, unit_text = split_number(guard(text))
    if not unit_text:
        raise Refusal(
            f"{quoted(text)} could be an altitude or a barometer reading.",
            "Add the unit: 640 m, 2100 ft, 94.1 kPa or 27.8 inHg.",
        )
    return "altitude" if fold(unit_text) in spellings(Kind.LENGTH) else "barometer"


def read_site(text: str, source: str, dress: Dress) -> Site:
    """Return the site from an altitude or a barometer reading as typed; Refusal naming the field."""
    kind = Kind.LENGTH if source == "altitude" else Kind.ABSOLUTE_PRESSURE
    try:
        reading = read(text, kind, dress.default(kind), dress, SEA_LEVEL)
        if reading.bare_number:
            raise _without_unit(" ".join(text.split()), source)
        make = site_at_altitude if source == "altitude" else site_with_barometer
        return make(reading.value, reading.complete())
    except Refusal as refusal:
        raise refusal.about(source) from None


def _without_unit(text: str, source: str) -> Refusal:
    if source == "barometer":
        # 29.92 is the weather in inHg, and a mountain top in kPa.
        return Refusal(
            f"{quoted(text)} has no unit: a barometer may show kPa, mbar, mmHg or inHg.",
            f"Type the unit too: {example(Kind.ABSOLUTE_PRESSURE)}.",
        )
    number = text if len(text) <= 20 and text.isprintable() else "2100"
    return Refusal(
        f"{quoted(text)} has no unit: an altitude may be in metres or in feet.", f"Write {number} m or {number} ft."
    )


def overridden(settings: Settings, altitude: str | None, barometer: str | None, units: str | None) -> Settings:
    """Return the settings with what one command line says instead; Refusal for an empty reading."""
    for name, text in (("altitude", altitude), ("barometer", barometer)):
        if text is not None and not text.strip():
            raise Refusal("It is given, but empty.", "Write for example 640 m, or 94.1 kPa.", name)
    if altitude is not None:
        settings = replace(settings, site_pressure_text=altitude, site_pressure_from="altitude")
    if barometer is not None:
        settings = replace(settings, site_pressure_text=barometer, site_pressure_from="barometer")
    if units is not None:
        # A dress asked for by name is that dress, without the single units kept for the other.
        settings = replace(settings, dress="ip" if units == "ip" else "si", units={})
    return settings
