"""The array problem: pack typed values into arrays, unpack solutions."""

from georoute.problem.arrays import Problem, Solution
from georoute.problem.eligibility import WhyNot
from georoute.problem.pack import Packed, pack

__all__ = ["Packed", "Problem", "Solution", "WhyNot", "pack"]
