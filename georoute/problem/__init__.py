"""The array problem: pack typed values into arrays, unpack solutions."""

from georoute.problem.arrays import MICRO, Problem, Solution
from georoute.problem.eligibility import WhyNot
from georoute.problem.pack import Packed, pack

__all__ = ["MICRO", "Packed", "Problem", "Solution", "WhyNot", "pack"]
