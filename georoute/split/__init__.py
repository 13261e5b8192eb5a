"""Sites to days: clusters on the plane, balanced by work time, each on a shift of a near base."""

from georoute.split.days import split

__all__ = ["split"]
