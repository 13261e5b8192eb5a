"""Days together: move visits between tours until every limit holds and the money is least."""

from georoute.improve.moves import Move, RelocateResult
from georoute.improve.relocation import relocate

__all__ = ["Move", "RelocateResult", "relocate"]
