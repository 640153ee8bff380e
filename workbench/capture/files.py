"""Where a capture lies: inside the campaign folder, links included; and the hash of its file."""

from __future__ import annotations

import hashlib
import os
import re
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

from workbench.base.errors import CaptureError
from workbench.capture.findings import few

_GROUP = re.compile(r"(?P<path>.*\.(?:h5|hdf5|hdf))#(?P<group>.*)", re.IGNORECASE | re.DOTALL)


@dataclass(frozen=True)
class Location:
    """A file that is there, and the group inside it ("" where none is named)."""

    path: Path
    group: str
    stamp: tuple[int, int, int]
    """Size, modification time and file number: another stamp is another content."""


def split_group(capture: str) -> tuple[str, str]:
    """Path and group of a capture's text: only an HDF5 file has groups.

    Examples
    --------
    >>> split_group("captures/r41.h5#0012"), split_group("captures/run#3.csv")
    (('captures/r41.h5', '0012'), ('captures/run#3.csv', ''))
    """
    match = _GROUP.fullmatch(capture)
    return (match["path"], match["group"]) if match else (capture, "")


def locate(folder: Path, capture: str) -> Location:
    """The file of a capture.

    Parameters
    ----------
    folder : Path     the campaign's folder
    capture : str     text of runs.csv

    Raises
    ------
    CaptureError      the path leaves the folder, or there is no such file
    """
    text, group = split_group(capture)
    inside = "Copy the file into the campaign folder, and write its path from there."
    if os.path.isabs(text) or re.match(r"[A-Za-z]:[\\/]", text):
        raise CaptureError(f"'{text}' is an absolute path; wanted one inside the campaign folder", inside)
    try:
        path = (folder / text).resolve()
        if not path.is_relative_to(folder.resolve()):
            raise CaptureError(f"'{text}' leads out of the campaign folder, to '{path}'", inside)
        if path.is_dir():
            raise CaptureError(f"'{text}' is a folder; wanted a file", "Write the path of the capture's file.")
        if not path.is_file():
            raise CaptureError(f"there is no file '{text}' in the campaign folder", _neighbours(path))
        status = path.stat()
    except (OSError, ValueError, RuntimeError) as error:
        # Names too long, with a zero byte, or links that run in a circle.
        raise CaptureError(f"'{text[:80]}' cannot be looked up ({error})", "Correct the path in runs.csv.") from error
    if status.st_size == 0:
        raise CaptureError(f"'{text}' is an empty file (0 bytes)", "Copy it from the instrument again.")
    return Location(path, group, (status.st_size, status.st_mtime_ns, status.st_ino))


def _neighbours(path: Path) -> str:
    remedy = "Copy the file there, or correct its path in runs.csv."
    if not path.parent.is_dir():
        return remedy
    names = [each.name for each in path.parent.iterdir()]
    sentence = few(path.name, names)
    return f"{sentence} {remedy}" if sentence.startswith("Did") else remedy


def read_bytes(location: Location) -> bytes:
    """All bytes of the file.

    Raises
    ------
    CaptureError      it cannot be read
    """
    try:
        return location.path.read_bytes()
    except OSError as error:
        raise unreadable(location.path, error) from error


def unreadable(path: Path, error: OSError) -> CaptureError:
    """The failure of a file that is there and cannot be read."""
    reason = f"'{path.name}' cannot be read ({error.strerror or error})"
    return CaptureError(reason, "Look at the permissions of the file, and at the disk it lies on.")


def sha256_of(location: Location) -> str:
    """Hash of the whole file, kept for the process by path, size and modification time."""
    return _sha256(location.path, location.stamp)


@lru_cache(maxsize=4096)
def _sha256(path: Path, stamp: tuple[int, int, int]) -> str:
    try:
        with path.open("rb") as file:
            return hashlib.file_digest(file, "sha256").hexdigest()
    except OSError as error:
        raise unreadable(path, error) from error
