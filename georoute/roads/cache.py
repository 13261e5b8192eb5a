"""Keep a built network, so that the next run begins where this one would end.

A file of the cache holds the network with its table and its hierarchy. It is named after a hash of
all that it was made from: the bytes of the source, the settings that decide what is read, and the
form of the file. It is written aside and renamed; one that cannot be read is made anew.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import struct
import zipfile
import zlib
from dataclasses import asdict, dataclass, fields, is_dataclass, replace
from typing import TYPE_CHECKING, Any, TypeVar

import numpy as np

from georoute.domain.run import no_progress
from georoute.errors import OutputError
from georoute.files import atomic_path, cache_folder, sha256_of
from georoute.roads.hierarchy import Hierarchy, build_hierarchy
from georoute.roads.model import RoadRemark, RoadTable
from georoute.roads.network import RoadNetwork, build_network
from georoute.roads.shortest import ShortestPaths

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping
    from pathlib import Path

    from numpy.typing import NDArray

    from georoute.domain.run import Progress

__all__ = ["FORMAT", "BuiltRoads", "build_roads", "cached_roads", "settings_key"]

FORMAT = 1
"""Raised whenever the same source and settings would give another network, or another file."""

KEPT = 8
"""Networks kept; the oldest goes first."""

_DAMAGE = (
    OSError,
    ValueError,
    TypeError,
    LookupError,
    EOFError,
    MemoryError,  # a damaged header may ask for any amount
    NotImplementedError,
    zipfile.BadZipFile,
    struct.error,
    zlib.error,
)

_Rows = TypeVar("_Rows", RoadTable, RoadNetwork)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class BuiltRoads:
    """A network and its hierarchy.

    ``kept``: whether they came from the cache. ``file_name``: their file there; empty: none.
    """

    network: RoadNetwork
    hierarchy: Hierarchy
    kept: bool = False
    file_name: str = ""

    @property
    def search(self) -> ShortestPaths:
        """What finds the shortest paths of the network."""
        arcs = (self.network.tail, self.network.head, self.network.ms, self.network.mm)
        return ShortestPaths(*arcs, nodes=self.network.nodes, hierarchy=self.hierarchy)


def _plain(value: object) -> object:
    """Return a value that JSON can hold."""
    if is_dataclass(value) and not isinstance(value, type):
        return {field.name: _plain(getattr(value, field.name)) for field in fields(value)}
    if hasattr(value, "items"):
        return {str(key): _plain(part) for key, part in value.items()}
    if isinstance(value, (list, tuple)):
        return [_plain(part) for part in value]
    return value if isinstance(value, (str, int, float, bool, type(None))) else str(value)


def settings_key(*settings: object) -> str:
    """Return a hash of settings: dataclasses, mappings, sequences, numbers, texts.

    Parameters
    ----------
    *settings
        Everything besides the source that decides what the network is.

    Returns
    -------
    64 hexadecimal digits, the same for equal settings in every run.
    """
    text = json.dumps(_plain(settings), sort_keys=True)
    return hashlib.sha256(text.encode()).hexdigest()


def build_roads(table: RoadTable, *, progress: Progress = no_progress) -> BuiltRoads:
    """Return the network and the hierarchy of a table of roads.

    Raises
    ------
    RoadError
        There is no stretch that may be driven.
    """
    network = build_network(table, progress=progress)
    hierarchy = build_hierarchy(
        network.tail,
        network.head,
        network.ms,
        network.mm,
        nodes=network.nodes,
        progress=progress,
    )
    return BuiltRoads(network=network, hierarchy=hierarchy)


def cached_roads(
    source: Path,
    read: Callable[[], RoadTable],
    *,
    settings: str,
    folder: Path | None = None,
    progress: Progress = no_progress,
) -> BuiltRoads:
    """Return the roads of a source, from the cache where they are kept there.

    Parameters
    ----------
    source
        The file that the roads come from; its bytes are part of the name in the cache.
    read
        Reads the source; called only where the cache does not have it.
    settings
        From ``settings_key``: all else that decides what ``read`` returns.
    folder
        Where networks are kept; the user's cache folder when absent.
    progress
        Called during the work.

    Returns
    -------
    The roads. A damaged or unwritable cache is a remark of the network, not an error.

    Raises
    ------
    InputError
        The source cannot be read, or ``read`` raises it.
    """
    key = settings_key(FORMAT, np.__version__, sha256_of(source), settings)
    try:
        path = (cache_folder() / "roads" if folder is None else folder) / f"{key[:32]}.roads.npz"
    except OutputError as error:
        return _with_remark(build_roads(read(), progress=progress), "cache_missing", str(error))
    damage = None
    try:
        return replace(_load(path, key), file_name=path.name)
    except (FileNotFoundError, NotADirectoryError):
        pass
    except _DAMAGE as error:
        damage = f"{type(error).__name__}: {error}"
    built = build_roads(read(), progress=progress)
    try:
        _save(path, key, built)
        built = replace(built, file_name=path.name)
    except OutputError as error:
        built = _with_remark(built, "cache_missing", str(error))
    if damage is not None:
        text = f"{path}: the kept network was damaged and has been made anew"
        built = _with_remark(built, "cache_damaged", text, damage)
    return built


def _with_remark(built: BuiltRoads, code: str, text: str, example: str = "") -> BuiltRoads:
    remark = RoadRemark(code=code, count=1, text=text, example=example)
    network = replace(built.network, remarks=(*built.network.remarks, remark))
    return replace(built, network=network)


def _parts(
    rows: RoadTable | RoadNetwork, prefix: str
) -> tuple[dict[str, NDArray[Any]], dict[str, Any]]:
    """Return the arrays of a table or network, by name, and the rest as JSON can hold it."""
    arrays: dict[str, NDArray[Any]] = {}
    rest: dict[str, Any] = {}
    for field in fields(rows):
        value = getattr(rows, field.name)
        if isinstance(value, np.ndarray):
            arrays[f"{prefix}.{field.name}"] = value
        elif field.name == "remarks":
            rest[field.name] = [asdict(remark) for remark in value]
        elif not isinstance(value, RoadTable):
            rest[field.name] = value
    return arrays, rest


def _save(path: Path, key: str, built: BuiltRoads) -> None:
    table, about_table = _parts(built.network.table, "table")
    network, about_network = _parts(built.network, "network")
    hierarchy = {f"hierarchy.{k}": np.asarray(v) for k, v in built.hierarchy._asdict().items()}
    about = {"key": key, "table": about_table, "network": about_network}
    arrays = {**table, **network, **hierarchy}
    arrays["about"] = np.frombuffer(json.dumps(about).encode(), np.uint8)
    with (
        atomic_path(path, verify=lambda temporary: _load(temporary, key)) as temporary,
        temporary.open("wb") as stream,
    ):
        np.savez(stream, allow_pickle=False, **arrays)
    _forget(path)


def _forget(newest: Path) -> None:
    """Remove the oldest networks, so that the cache does not grow for ever."""
    with contextlib.suppress(OSError):  # another run may have removed one just now
        files = sorted(newest.parent.glob("*.roads.npz"), key=lambda file: file.stat().st_mtime_ns)
        for file in files[:-KEPT]:
            file.unlink(missing_ok=True)


def _load(path: Path, key: str) -> BuiltRoads:
    """Read what ``_save`` wrote; anything else raises one of ``_DAMAGE``.

    Raises
    ------
    ValueError
        The file is of other roads.
    """
    with path.open("rb") as stream, np.load(stream, allow_pickle=False) as file:
        arrays = {name: file[name] for name in file.files}  # each is checked against its sum
    about = json.loads(arrays["about"].tobytes())
    if about["key"] != key:
        msg = "it holds other roads"
        raise ValueError(msg)
    table = _made(RoadTable, arrays, "table", about["table"])
    network = _made(RoadNetwork, arrays, "network", {**about["network"], "table": table})
    hierarchy = Hierarchy(**{name: arrays[f"hierarchy.{name}"] for name in Hierarchy._fields})
    return BuiltRoads(network=network, hierarchy=hierarchy, kept=True)


def _made(
    kind: type[_Rows],
    arrays: Mapping[str, NDArray[Any]],
    prefix: str,
    rest: Mapping[str, Any],
) -> _Rows:
    """Make a table or a network of its parts."""
    values: dict[str, Any] = {}
    for field in fields(kind):
        if field.name == "remarks":
            values["remarks"] = tuple(RoadRemark(**remark) for remark in rest["remarks"])
        elif field.name in rest:
            value = rest[field.name]
            values[field.name] = tuple(value) if isinstance(value, list) else value
        else:
            values[field.name] = arrays[f"{prefix}.{field.name}"]
    return kind(**values)
