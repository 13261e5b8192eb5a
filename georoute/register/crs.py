"""Choose the coordinate system of a register, and how to convert from it to WGS 84."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import pyproj
import pyproj.exceptions

from georoute.register.codes import Code, new_finding

if TYPE_CHECKING:
    from georoute.domain.findings import Finding

__all__ = ["Crs", "find_crs"]

_WGS84 = pyproj.CRS.from_epsg(4326)


@dataclass(frozen=True, slots=True, kw_only=True)
class Crs:
    """How to convert to WGS 84; without a ``transformer`` coordinates are such degrees already."""

    transformer: pyproj.Transformer | None
    name: str = ""
    findings: tuple[Finding, ...] = ()


def find_crs(*, stated: str, wanted: str | None, needed: bool) -> Crs:
    """Choose the coordinate system: what the file states wins over the setting.

    Parameters
    ----------
    stated
        What the file itself says; ``""`` where it says nothing.
    wanted
        The ``crs`` setting.
    needed
        Whether a file that states nothing needs the setting (geometries without a system).

    Returns
    -------
    Crs
        The system, with findings about the choice.
    """
    findings: list[Finding] = []
    system = _parse(stated) if stated else None
    if wanted is not None:
        asked = _parse(wanted)
        if asked is None:
            findings.append(_unknown_crs(f"`{wanted}` is no coordinate system", wanted))
        elif system is None:
            system = asked
        elif not system.equals(asked, ignore_axis_order=True):
            findings.append(
                new_finding(
                    Code.SETTING_NOT_USED,
                    f"the file states its own coordinate system, {system.name}; "
                    f"the setting {wanted} is not used",
                    "take the setting out, or correct the file's own statement in a GIS",
                    column="crs",
                    value=wanted,
                )
            )
    if system is None and needed and not findings:
        findings.append(_unknown_crs("the file does not state its coordinate system", ""))
    if system is None or system.equals(_WGS84, ignore_axis_order=True):
        return Crs(transformer=None, findings=tuple(findings))
    try:
        transformer = pyproj.Transformer.from_crs(system, _WGS84, always_xy=True)
    except pyproj.exceptions.ProjError:
        message = f"{system.name} cannot be converted to WGS 84"
        findings.append(_unknown_crs(message, wanted or stated))
        return Crs(transformer=None, findings=tuple(findings))
    findings.append(
        new_finding(
            Code.CONVERTED_TO_WGS84,
            f"coordinates were converted from {system.name} to WGS 84",
            "nothing to do if that is right",
            column="crs",
            value=system.to_string()[:40],
        )
    )
    return Crs(transformer=transformer, name=system.name, findings=tuple(findings))


def _unknown_crs(message: str, value: str) -> Finding:
    return new_finding(
        Code.UNKNOWN_CRS,
        message,
        'name it by its EPSG code in the programme, for instance [register] crs = "EPSG:32719"',
        column="crs",
        value=value,
    )


def _parse(text: str) -> pyproj.CRS | None:
    try:
        system = pyproj.CRS.from_user_input(text)
    except (pyproj.exceptions.CRSError, ValueError):
        return None
    if system.is_projected or system.is_geographic or system.is_bound:
        return system
    return system.sub_crs_list[0] if system.is_compound else None
