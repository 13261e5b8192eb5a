"""Read the bytes of a file; what stands in the way becomes a finding."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.register.codes import Code, new_finding
from georoute.register.tables import UnreadableFileError

if TYPE_CHECKING:
    from pathlib import Path

__all__ = ["bytes_of"]

_FOLDERS = frozenset({".gdb"})


def bytes_of(path: Path) -> bytes:
    """Read a file whole; a folder is read only where a format is one.

    Parameters
    ----------
    path
        The file.

    Returns
    -------
    bytes
        Its content.

    Raises
    ------
    UnreadableFileError
        If there is no such file, or it cannot be read.
    """
    try:
        if path.is_dir() and path.suffix.casefold() in _FOLDERS:
            return b"".join(part.read_bytes() for part in sorted(path.iterdir()) if part.is_file())
        return path.read_bytes()
    except FileNotFoundError as error:
        fault = new_finding(
            Code.FILE_NOT_FOUND,
            "there is no such file",
            f"look at the path; it was looked for in the folder {_folder_words(path)}",
        )
        raise UnreadableFileError([fault]) from error
    except IsADirectoryError as error:
        fault = new_finding(Code.NOT_READABLE, "this is a folder", "name the file in it")
        raise UnreadableFileError([fault]) from error
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        fault = new_finding(
            Code.NOT_READABLE,
            f"the file cannot be read: {reason}",
            "close the program that holds it, or ask for the right to read it",
        )
        raise UnreadableFileError([fault]) from error


def _folder_words(path: Path) -> str:
    return "you are in" if str(path.parent) == "." else f"`{path.parent}`"
