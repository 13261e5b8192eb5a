"""The data island: the one way in which users' text reaches the scripts of a page."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

__all__ = ["differences", "island_json"]

_ESCAPES = {
    ord("<"): "\\u003c",  # no </script> and no <!-- can end or reopen the block
    ord(">"): "\\u003e",
    ord("&"): "\\u0026",
    0x2028: "\\u2028",  # line ends to older readers of JavaScript
    0x2029: "\\u2029",
}


def island_json(data: Mapping[str, object]) -> str:
    """Return ``data`` as JSON that is safe inside a ``<script type="application/json">``.

    Raises
    ------
    ValueError
        A number is not finite; pages never show such a figure.
    """
    text = json.dumps(data, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
    return text.translate(_ESCAPES)


def differences(rows: Iterable[tuple[int, ...]]) -> list[int]:
    """Return rows of whole numbers as one flat list: what each adds to the row before it."""
    flat: list[int] = []
    before: tuple[int, ...] = ()
    for row in rows:
        flat += [now - then for now, then in zip(row, before or (0,) * len(row), strict=True)]
        before = row
    return flat
