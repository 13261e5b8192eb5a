"""Travel between places: straight lines, the detour model, and the user's own table."""

from georoute.measure.matrix import measure
from georoute.measure.straight import (
    geodesic_m,
    geodesic_matrix_m,
    great_circle_m,
    great_circle_matrix_m,
)
from georoute.measure.table import check_table, read_table

__all__ = [
    "check_table",
    "geodesic_m",
    "geodesic_matrix_m",
    "great_circle_m",
    "great_circle_matrix_m",
    "measure",
    "read_table",
]
