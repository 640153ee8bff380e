"""SHA-256 of files, and the list of them that ``sha256sum --check`` reads."""

from __future__ import annotations

import hashlib
import re
from collections.abc import Iterable, Mapping
from pathlib import Path, PurePosixPath

from workbench.base.errors import HandoffError

LIST_NAME = "SHA256SUMS"
# Two blanks, or a blank and a star, stand between digest and name: text or binary mode.
_LINE = re.compile(r"(?P<digest>[0-9a-fA-F]{64}) [ *](?P<name>.+)")


def file_sha256(path: Path) -> str:
    """SHA-256 of a file's bytes, as 64 hexadecimal digits."""
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def write_list(folder: Path, names: Iterable[str]) -> None:
    """Write the list of the named files of `folder` into it."""
    lines = [f"{file_sha256(folder / name)}  {name}\n" for name in sorted(names)]
    (folder / LIST_NAME).write_text("".join(lines), encoding="utf-8", newline="\n")


def parse_list(text: str) -> Mapping[str, str]:
    """Names and their digests from the text of a list.

    Raises
    ------
    HandoffError    a line that is no line of such a list, a name twice, or one that leaves the folder

    Examples
    --------
    >>> list(parse_list("e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855  runs.nc"))
    ['runs.nc']
    """
    digests: dict[str, str] = {}
    for number, line in enumerate(text.splitlines(), start=1):
        match = _LINE.fullmatch(line)
        if match is None:
            raise _refused(number, "64 hexadecimal digits, two blanks, a file's name", line)
        name = match["name"]
        if _leaves(name):
            raise _refused(number, "a file inside the folder", name)
        if name in digests:
            raise _refused(number, "each file once", name)
        digests[name] = match["digest"].lower()
    if not digests:
        raise _refused(1, "at least one line", "an empty list")
    return digests


def _leaves(name: str) -> bool:
    path = PurePosixPath(name.replace("\\", "/"))
    return path.is_absolute() or ".." in path.parts or ":" in path.parts[0]


def _refused(number: int, wanted: str, found: str) -> HandoffError:
    return HandoffError(
        f"Reading {LIST_NAME}, line {number}: wanted {wanted}; found '{found}'. "
        "The list was changed after it was written: ask for the folder again."
    )
