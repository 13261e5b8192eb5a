"""Plan inspection visits: which sites on which day, by whom, in which order, by which way.

The names below are the public interface; each is imported from its stage when it is first
used, so that ``import georoute`` is fast.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

__version__ = "0.1.0"

if TYPE_CHECKING:
    from georoute.errors import GeorouteError
    from georoute.pipeline import plan
    from georoute.publishing import publish
    from georoute.register import read_programme, read_register
    from georoute.store import read_plan, to_geodataframes, write_plan

__all__ = [
    "GeorouteError",
    "__version__",
    "plan",
    "publish",
    "read_plan",
    "read_programme",
    "read_register",
    "to_geodataframes",
    "write_plan",
]

_HOMES = {
    "GeorouteError": "georoute.errors",
    "plan": "georoute.pipeline",
    "publish": "georoute.publishing",
    "read_plan": "georoute.store",
    "read_programme": "georoute.register",
    "read_register": "georoute.register",
    "to_geodataframes": "georoute.store",
    "write_plan": "georoute.store",
}


def __getattr__(name: str) -> object:
    """Import a public name from its home when it is first used (PEP 562)."""
    if name not in _HOMES:
        msg = f"module 'georoute' has no attribute {name!r}"
        raise AttributeError(msg)
    value = getattr(import_module(_HOMES[name]), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    """List the public names."""
    return sorted(__all__)
