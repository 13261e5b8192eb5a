"""The one place that reads the wall clock: the issue time of a plan."""

from __future__ import annotations

import os
from datetime import UTC, datetime

__all__ = ["issue_time"]


def issue_time() -> datetime:
    """Return the time of issue in UTC.

    The variable ``SOURCE_DATE_EPOCH`` (reproducible-builds.org specification) overrides the
    clock, for byte-identical reruns.
    """
    fixed = os.environ.get("SOURCE_DATE_EPOCH")
    if fixed is not None and fixed.strip().isdigit():
        return datetime.fromtimestamp(int(fixed), UTC)
    return datetime.now(UTC).replace(microsecond=0)  # noqa: TID251 - the edge named by the ban
