"""Measures of a finished plan that its planners trust: pure sums over the plan, no words."""

from __future__ import annotations

from georoute.publishing.quality.changes import TourChanges, tour_changes
from georoute.publishing.quality.dates import DateRecord, PastDue, date_record
from georoute.publishing.quality.hours import (
    Balance,
    HoursSpent,
    InspectorHours,
    Spread,
    balance,
    hours_spent,
    spread_of,
)
from georoute.publishing.quality.money import CostPart, cost_parts
from georoute.publishing.quality.shape import NEAR_M, Shape, TourShape, crosses_itself, shape
from georoute.publishing.quality.weeks import Undated, WeekLoad, undated, week_loads

__all__ = [
    "NEAR_M",
    "Balance",
    "CostPart",
    "DateRecord",
    "HoursSpent",
    "InspectorHours",
    "PastDue",
    "Shape",
    "Spread",
    "TourChanges",
    "TourShape",
    "Undated",
    "WeekLoad",
    "balance",
    "cost_parts",
    "crosses_itself",
    "date_record",
    "hours_spent",
    "shape",
    "spread_of",
    "tour_changes",
    "undated",
    "week_loads",
]
