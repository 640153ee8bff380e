"""A hand-off folder held against its list of SHA-256."""

from __future__ import annotations

import os
from pathlib import Path

from workbench.base.errors import Finding, HandoffError
from workbench.write.checksums import LIST_NAME, file_sha256, parse_list

_AGAIN = "Ask the sender for the folder again"


def verify(folder: str | os.PathLike[str]) -> list[Finding]:
    """What differs between a hand-off folder and what was handed over; empty if nothing does.

    Parameters
    ----------
    folder : path of a folder that `workbench.write.handoff.hand_off` wrote

    Raises
    ------
    HandoffError    not a hand-off folder, or its list is damaged

    Notes
    -----
    Checkpoints are left out: JupyterLab makes them when a notebook is merely opened.  Whoever
    can change the files can change the list as well: it guards against accidents, not forgery.
    """
    where = Path(folder)
    digests = parse_list(_list_text(where))
    findings = [found for name in sorted(digests) if (found := _check(where, name, digests[name]))]
    for name in sorted(_files(where) - set(digests) - {LIST_NAME}):
        findings.append(Finding(name, "no such file", "a file that was not handed over", "Move it elsewhere"))
    return findings


def _list_text(folder: Path) -> str:
    doing = f"Checking the hand-off folder {folder}"
    if not folder.is_dir():
        found = "a file" if folder.exists() else "nothing of that name"
        raise HandoffError(f"{doing}: wanted a folder; found {found}. Look at the path.")
    try:
        return (folder / LIST_NAME).read_text(encoding="utf-8")
    except FileNotFoundError:
        raise HandoffError(
            f"{doing}: wanted a list {LIST_NAME} in it; found none. Give a folder that `workbench handoff` wrote."
        ) from None
    except (OSError, UnicodeDecodeError) as error:
        raise HandoffError(f"{doing}: its list {LIST_NAME} cannot be read ({error}). {_AGAIN}.") from error


def _check(folder: Path, name: str, digest: str) -> Finding | None:
    path = folder / name
    # A link, be it the file or a folder on the way, may lead anywhere: what was handed over were files.
    if path.resolve() != folder.resolve() / name or not path.is_file():
        found = "something else of that name" if os.path.lexists(path) else "no file"
        return Finding(name, "the file that was handed over", found, _AGAIN)
    actual = file_sha256(path)
    if actual == digest:
        return None
    return Finding(name, f"SHA-256 {digest}", actual, f"The file was changed. {_AGAIN}, or accept the change")


def _files(folder: Path) -> set[str]:
    found: set[str] = set()
    for place, folders, names in os.walk(folder):
        folders[:] = [name for name in folders if name != ".ipynb_checkpoints"]
        links = [name for name in folders if (Path(place) / name).is_symlink()]
        found.update((Path(place) / name).relative_to(folder).as_posix() for name in [*names, *links])
    return found
