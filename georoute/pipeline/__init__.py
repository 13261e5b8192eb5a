"""The only place that chains the stages: a programme and a register in, an audited plan out."""

from georoute.kernels import compiled_before
from georoute.pipeline.planning import Prepared, compile_search, make_plan, plan, prepare

__all__ = ["Prepared", "compile_search", "compiled_before", "make_plan", "plan", "prepare"]
