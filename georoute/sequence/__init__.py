"""Order within a day."""

from georoute.sequence.result import SequencedTour, SequenceResult, Step
from georoute.sequence.stage import sequence, sequence_tour

__all__ = ["SequenceResult", "SequencedTour", "Step", "sequence", "sequence_tour"]
