"""The only place that chains the stages: a programme and a register in, an audited plan out."""

from georoute.pipeline.planning import Prepared, make_plan, plan, prepare

__all__ = ["Prepared", "make_plan", "plan", "prepare"]
