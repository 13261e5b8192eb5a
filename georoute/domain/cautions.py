"""The cautions that go with every plan, on screen and on paper: general words, no legal advice."""

from __future__ import annotations

__all__ = ["CAUTION", "CAUTIONS", "LAW_PREVAILS"]

LAW_PREVAILS = "Local law, your employer's rules and licensed practice prevail."

CAUTION = (
    "Times are estimates. Obey signs, closures and weight/height limits - they are not all in "
    f"this data. Read or change the plan only while parked. {LAW_PREVAILS}"
)

CAUTIONS: tuple[str, ...] = (
    "Times are estimates from the travel figures supplied; traffic, weather and closures differ.",
    "Road signs, site rules, police and the inspector's own judgement come before this plan.",
    "Do not read this sheet or handle a device while driving.",
    "Do not continue when tired; take your breaks; report an unsafe schedule.",
    "Breaks are not placed in this plan: keep time for them.",
    "Working-time, driving-time and lone-work limits are set by your law and employer.",
    "The limits and values entered here are yours to check.",
    "Statutory intervals and the authority's directions prevail over any date here.",
    "Only persons with the required licence, certificate or authorisation may inspect.",
    "Vehicle limits (height, weight, width) are not checked.",
    "Tell someone when you expect to finish, above all when you work alone.",
    "Not for emergency dispatch.",
    "May contain personal data: dispose of it securely.",
    "A bound or gap speaks of the travel figures supplied, not of the world.",
)
