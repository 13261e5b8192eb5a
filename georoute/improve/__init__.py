"""Days together: until every limit holds, then until the money is least."""

from georoute.improve.moves import Move, RelocateResult
from georoute.improve.relocation import relocate
from georoute.improve.slack_induction import ImproveResult, improve

__all__ = ["ImproveResult", "Move", "RelocateResult", "improve", "relocate"]
