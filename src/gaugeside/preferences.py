"""From remembered settings to what a calculation needs: the reader's dress and the site."""

from __future__ import annotations

from dataclasses import replace

from gaugeside.errors import Refusal
from gaugeside.quantities import (
    CHOOSABLE,
    Dress,
    Kind,
    Sense,
    Site,
    checked_single,
    read,
    site_at_altitude,
    site_with_barometer,
)
from gaugeside.quantities.site import SEA_LEVEL
from gaugeside.settings import Settings


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


def read_site(text: str, source: str, dress: Dress) -> Site:
    """Return the site from an altitude or a barometer reading as typed; Refusal naming the field."""
    kind = Kind.LENGTH if source == "altitude" else Kind.ABSOLUTE_PRESSURE
    try:
        reading = read(text, kind, dress.default(kind), dress, SEA_LEVEL)
        make = site_at_altitude if source == "altitude" else site_with_barometer
        return make(reading.value, reading.complete())
    except Refusal as refusal:
        raise refusal.about(source) from None


def overridden(settings: Settings, altitude: str | None, barometer: str | None, units: str | None) -> Settings:
    """Return the settings with what one command line says instead."""
    if altitude is not None:
        settings = replace(settings, site_pressure_text=altitude, site_pressure_from="altitude")
    if barometer is not None:
        settings = replace(settings, site_pressure_text=barometer, site_pressure_from="barometer")
    if units == "si" or units == "ip":
        # A dress asked for by name is that dress, without the single units kept for the other.
        settings = replace(settings, dress=units, units={})
    return settings
