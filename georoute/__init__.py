"""Plan inspection visits: which sites on which day, by whom, in which order, by which way."""

__version__ = "0.1.0"
