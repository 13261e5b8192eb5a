"""The array problem: pack typed values into arrays, unpack solutions."""

from georoute.problem.arrays import Problem, Solution

__all__ = ["Problem", "Solution"]
