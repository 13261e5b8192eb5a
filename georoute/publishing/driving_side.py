"""The side of the road that is driven on, so that cords lie on the driver's own side."""

from __future__ import annotations

import functools
from importlib import resources

__all__ = ["drives_on_left"]

_LEFT = (
    "AG AI AU BB BD BM BN BS BT BW CC CK CX CY DM FJ FK GB GD GG GY HK ID IE IM IN JE JM JP KE KI "
    "KN KY LC LK LS MO MS MT MU MV MW MY MZ NA NF NP NR NU NZ PG PK PN SB SC SG SH SR SZ TC TH TK "
    "TL TO TT TV TZ UG VC VG VI WS ZA ZM ZW"
)
"""Countries (ISO 3166-1) that drive on the left; from memory."""


@functools.cache
def _country_of() -> dict[str, str]:
    """Return the country of each time zone, from the table that comes with the zones."""
    table = resources.files("tzdata") / "zoneinfo" / "zone.tab"
    rows = [
        line.split("\t")
        for line in table.read_text(encoding="utf-8").splitlines()
        if line and not line.startswith("#")
    ]
    return {zone: country for country, _, zone, *_ in rows}


def drives_on_left(zone: str) -> bool:
    """Tell whether the country of an IANA time zone drives on the left; unknown zones do not."""
    return _country_of().get(zone, "none") in _LEFT.split()
