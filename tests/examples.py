"""How many examples a costly property gets: its own number, or fewer in a profile of few."""

from __future__ import annotations

from hypothesis import settings

__all__ = ["at_most"]


def at_most(examples: int) -> int:
    """Return ``examples``, or what the profile at hand allows if that is less."""
    profile = settings.default
    return examples if profile is None else min(examples, profile.max_examples)
