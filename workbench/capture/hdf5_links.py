"""Walking an HDF5 file without ever leaving it: hard and soft links only."""

from __future__ import annotations

from typing import Any

import h5py

from workbench.base.errors import CaptureError
from workbench.capture.findings import few

_HOPS = 16


def reach(file: h5py.File, path: str) -> h5py.Group:
    """The group at `path`, every link on the way looked at before it is followed.

    Raises
    ------
    CaptureError    no such group, a dataset, or a link to another file
    """
    found = follow(file, file, path)
    if found is None:
        raise CaptureError(f"there is no group '{path}' in the file", _near(file, path))
    if not isinstance(found, h5py.Group):
        raise CaptureError(f"'{path}' is a dataset; wanted a group with field and induction", _near(file, path))
    return found


def _near(file: h5py.File, path: str) -> str:
    parent, _, last = path.strip("/").rpartition("/")
    group = follow(file, file, parent)
    if not isinstance(group, h5py.Group):
        group, last = file, path.strip("/")
    known = [name for name in group if isinstance(follow(file, group, name), h5py.Group)]
    if not known:
        return "The file has no groups: repeat the run, or correct the path in runs.csv."
    return f"{few(last, known)} Correct the group in runs.csv, or repeat the run."


def follow(file: h5py.File, start: h5py.Group, path: str, hops: int = 0) -> Any:
    """The object at `path` from `start`, or None where there is none.

    Raises
    ------
    CaptureError    a link to another file, or soft links in a circle
    """
    here: Any = file if path.startswith("/") else start
    for part in (each for each in path.split("/") if each not in ("", ".")):
        if not isinstance(here, h5py.Group):
            return None
        link = here.get(part, getlink=True)
        if isinstance(link, h5py.ExternalLink):
            reason = f"'{path}' is a link to another file ('{link.filename}')"
            raise CaptureError(reason, "Copy the samples into the capture file itself.")
        if isinstance(link, h5py.SoftLink):
            if hops >= _HOPS:
                raise CaptureError(f"'{path}' is a link that runs in a circle", "Name the group itself in runs.csv.")
            here = follow(file, here, link.path, hops + 1)
        elif link is None:
            return None
        else:
            here = here[part]
    return here
