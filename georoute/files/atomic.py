"""Write a file so that a reader sees the whole old one or the whole new one, never a half.

The new content goes to a temporary file in the same folder, is flushed to the disk, checked, and
then renamed over the old file in one step. A run that is killed leaves the old file as it was
and at most a temporary file behind, which the next write of the same file clears away.
"""

from __future__ import annotations

import contextlib
import errno
import hashlib
import os
import re
import secrets
import socket
from pathlib import Path
from typing import TYPE_CHECKING

from georoute.errors import OutputError

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

__all__ = ["TEMPORARY_PREFIX", "atomic_path", "atomic_write_bytes", "clear_stale"]

TEMPORARY_PREFIX = ".georoute-part"
"""Temporary files are ``.georoute-part.<target>.<machine>.<process>.<random><suffix>``."""

_SIDE_FILES = ("-journal", "-wal", "-shm")
"""What SQLite puts beside a file that it is writing."""

_FULL = frozenset({errno.ENOSPC, errno.EDQUOT})
_FORBIDDEN = frozenset({errno.EACCES, errno.EPERM, errno.EROFS})
_NO_SUCH_PROCESS_CHECK = os.name == "nt"


def _short_hash(text: str) -> str:
    return hashlib.sha256(text.encode("utf-8", "surrogateescape")).hexdigest()[:10]


def _stem(target: Path) -> str:
    """Return how the names of all temporary files of ``target`` begin."""
    return f"{TEMPORARY_PREFIX}.{_short_hash(target.name)}."


def _temporary(target: Path) -> Path:
    machine = _short_hash(socket.gethostname())
    name = f"{_stem(target)}{machine}.{os.getpid()}.{secrets.token_hex(4)}{target.suffix[:32]}"
    return target.parent / name


def _runs(pid: int) -> bool:
    """Tell whether a process of this machine runs; true where that cannot be asked safely."""
    if _NO_SUCH_PROCESS_CHECK:  # pragma: no cover - signal 0 would end the process there
        return True
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    except OSError:
        return True  # it runs, and belongs to somebody else
    return True


def clear_stale(path: Path | str) -> tuple[Path, ...]:
    """Remove temporary files of ``path`` whose writer was killed; return what was removed.

    A file is stale when it was made on this machine by a process that no longer runs. Files of
    another machine (a shared folder) and of running processes are left alone.
    """
    target = Path(path)
    machine = _short_hash(socket.gethostname())
    ours = re.compile(re.escape(f"{_stem(target)}{machine}.") + r"(\d+)\.[0-9a-f]{8}")
    removed = []
    with contextlib.suppress(OSError), os.scandir(target.parent) as entries:
        for entry in entries:
            match = ours.match(entry.name)
            if match is None or _runs(int(match[1])):
                continue
            with contextlib.suppress(OSError):
                Path(entry.path).unlink()
                removed.append(Path(entry.path))
    return tuple(removed)


def _output_error(target: Path, reason: OSError) -> OutputError:
    if reason.errno in _FULL:
        cause, remedy = "the disk is full", "free some space or choose another folder"
    elif reason.errno in _FORBIDDEN:
        cause = "the folder or the file may not be written to"
        remedy = "choose a folder you may write to, or close the program that holds the file"
    elif reason.errno == errno.ENAMETOOLONG:
        cause, remedy = "the name is too long", "choose a shorter name"
    elif isinstance(reason, (NotADirectoryError, FileExistsError)):
        cause, remedy = "a part of its folder's path is a file", "choose another folder"
    else:
        cause, remedy = reason.strerror or str(reason), "choose another folder"
    msg = f"{target}: could not be written: {cause}; the previous file is untouched; {remedy}"
    return OutputError(msg)


def _flush(path: Path) -> None:
    """Force the content of a file to the disk."""
    handle = os.open(path, os.O_RDWR)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _flush_folder(folder: Path) -> None:
    """Force the renaming to the disk, where the system can.

    Errors are passed over: the new file is in place already and whole; to report it as not
    written would be untrue.
    """
    if not hasattr(os, "O_DIRECTORY"):  # pragma: no cover - no handle on a folder there
        return
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _remove(temporary: Path) -> None:
    for suffix in ("", *_SIDE_FILES):
        with contextlib.suppress(OSError):
            temporary.with_name(temporary.name + suffix).unlink(missing_ok=True)


def _prepare(target: Path) -> None:
    try:
        is_folder = target.is_dir()
        target.parent.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise _output_error(target, error) from error
    if is_folder:
        msg = f"{target}: is a folder, a file was expected; add a file name"
        raise OutputError(msg)
    clear_stale(target)


def _commit(temporary: Path, target: Path) -> None:
    if not temporary.is_file():
        msg = f"{target}: nothing was written; the previous file is untouched"
        raise OutputError(msg)
    if target.exists():
        temporary.chmod(target.stat().st_mode & 0o777)
    temporary.replace(target)
    _flush_folder(target.parent)


@contextlib.contextmanager
def atomic_path(
    path: Path | str, *, verify: Callable[[Path], object] | None = None
) -> Iterator[Path]:
    """Give a temporary path to write to; rename it to ``path`` when the block ends well.

    Missing folders are made. A symbolic link is followed, not replaced. Permissions of an
    existing file are kept. When the block, or ``verify``, raises (also on Ctrl-C), the temporary
    file is removed and the old file stays as it was.

    Parameters
    ----------
    path
        Where the file shall be.
    verify
        Called with the temporary path after the block; raises to refuse the file.

    Yields
    ------
    Path
        A path in the same folder, with the same suffix, where no file exists yet.

    Raises
    ------
    OutputError
        The file could not be written: full disk, forbidden or missing folder, a folder at
        ``path``, or a block that wrote nothing.
    """
    target = Path(os.path.realpath(path))
    _prepare(target)
    temporary = _temporary(target)
    try:
        yield temporary
        if temporary.is_file():
            _flush(temporary)
            if verify is not None:
                verify(temporary)
        _commit(temporary, target)
    except OSError as error:
        # An error about some other file (an input read inside the block) is not ours to explain.
        if error.filename not in (None, str(temporary), temporary):
            raise
        raise _output_error(target, error) from error
    finally:
        _remove(temporary)


def atomic_write_bytes(path: Path | str, data: bytes) -> None:
    """Write ``data`` to ``path``, wholly or not at all.

    Parameters
    ----------
    path
        Where the file shall be; missing folders are made.
    data
        The whole content.

    Raises
    ------
    OutputError
        The file could not be written; the previous one is untouched.
    """
    with atomic_path(path) as temporary:
        temporary.write_bytes(data)
