"""Sites to days: the first split."""

from georoute.split.days import split

__all__ = ["split"]
