"""What the tests of readings share: the usual dresses, and a reading with its field's default unit."""

from __future__ import annotations

import pytest

from gaugeside.errors import Refusal
from gaugeside.quantities import SEA_LEVEL, Dress, Kind, Reading, Sense, Site, read

SI, IP, ABSOLUTE = Dress(), Dress("ip"), Dress(bare=Sense.ABSOLUTE)
ATMOSPHERE = 101325.0
READ_KINDS = [kind for kind in Kind if kind not in (Kind.RATIO, Kind.WORDS)]


def understand(text: str, kind: Kind = Kind.PRESSURE, dress: Dress = SI, site: Site = SEA_LEVEL) -> Reading:
    return read(text, kind, dress.default(kind), dress, site)


def refused(text: str, kind: Kind = Kind.PRESSURE, dress: Dress = SI, site: Site = SEA_LEVEL) -> str:
    """Return the whole sentence with which a text is refused."""
    with pytest.raises(Refusal) as refusal:
        understand(text, kind, dress, site)
    assert refusal.value.message
    assert refusal.value.hint
    return refusal.value.sentence()
