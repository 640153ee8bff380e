"""The hand-off: a folder that a colleague opens without this project."""

from __future__ import annotations

import hashlib
import os
import shutil
import tempfile
from collections.abc import Iterable, Sequence
from datetime import UTC, datetime
from importlib.metadata import version
from pathlib import Path
from platform import python_version
from typing import Any

import nbformat
from nbclient import NotebookClient
from nbclient.exceptions import CellExecutionError

from workbench.base.errors import HandoffError
from workbench.store.open import Store
from workbench.write.checksums import write_list
from workbench.write.choice import Choice, chosen
from workbench.write.handoff_notebook import handoff_notebook
from workbench.write.netcdf import write_runs

_PACKAGES = ("bh-loop-workbench", "numpy", "scipy", "pandas", "xarray", "h5netcdf", "h5py", "uncertainties", "pint")
_FILES = ("hand-off.ipynb", "runs.nc", "campaign.toml", "versions.txt")
_CELL_SECONDS = 300

Names = str | Iterable[str] | None
Settings = float | Iterable[float] | None


def hand_off(
    store: Store,
    to: str | os.PathLike[str],
    specimen: Names = None,
    frequency: Settings = None,
    temperature: Settings = None,
    peak_field: Settings = None,
    peak_induction: Settings = None,
) -> Path:
    """Write a hand-off folder: runs, sheet, versions, executed notebook, and the list that guards them.

    Parameters
    ----------
    to : the new folder; there may be an empty one
    specimen : name or names; None for all
    frequency, temperature, peak_field, peak_induction : Hz, degC, A/m, T; one or several
                 settings; None for all.  Runs set aside stay behind, and the folder says so.

    Returns
    -------
    Path of the folder

    Raises
    ------
    HandoffError    `to` is not empty, no run is chosen, or the folder cannot be written
    """
    target = Path(to)
    _refuse_taken(target)
    choice = Choice(
        _names(specimen), _numbers(frequency), _numbers(temperature), _numbers(peak_field), _numbers(peak_induction)
    )
    runs = chosen(store.runs, choice)
    doing = f"Writing the hand-off folder {target}"
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        # Built beside and renamed at the end: a folder of that name is whole or not there.
        build = Path(tempfile.mkdtemp(prefix=f".{target.name}.", dir=target.parent))
        try:
            _fill(build, store, choice, runs)
            _put(build, target)
        finally:
            shutil.rmtree(build, ignore_errors=True)
    except OSError as error:
        raise HandoffError(f"{doing}: {error}. Choose a folder where you may write, with room to spare.") from error
    except CellExecutionError as error:
        raise HandoffError(
            f"{doing}: its notebook did not run: {error.ename}: {error.evalue}. "
            "Nothing was written; please report this."
        ) from error
    return target


def _refuse_taken(target: Path) -> None:
    if os.path.lexists(target) and not (target.is_dir() and not any(target.iterdir())):
        raise HandoffError(
            f"Writing the hand-off folder {target}: wanted a new or an empty folder; found something there already. "
            "Choose another name: nothing is overwritten."
        )


def _fill(build: Path, store: Store, choice: Choice, runs: Any) -> None:
    sheet = store.sheet_text.encode()
    (build / "campaign.toml").write_bytes(sheet)
    (build / "versions.txt").write_text(_versions(), encoding="utf-8", newline="\n")
    write_runs(runs, build / "runs.nc", _about(store, choice, hashlib.sha256(sheet).hexdigest()))
    book = handoff_notebook()
    NotebookClient(
        book, timeout=_CELL_SECONDS, kernel_name="python3", resources={"metadata": {"path": str(build)}},
        record_timing=False, extra_arguments=["--log-level=ERROR"],
    ).execute()  # fmt: skip
    with (build / "hand-off.ipynb").open("w", encoding="utf-8", newline="\n") as file:
        nbformat.write(book, file)
    write_list(build, _FILES)


def _put(build: Path, target: Path) -> None:
    # mkdtemp closes its folder to everybody else, which would follow the folder to the colleague.
    build.chmod(0o755)
    if target.is_dir():
        target.rmdir()
    build.rename(target)


def _about(store: Store, choice: Choice, sheet_sha256: str) -> dict[str, str]:
    aside = int((store.runs["standing"].values != "kept").sum())
    now = datetime.now(UTC).isoformat(timespec="seconds")
    return {
        "title": store.title,
        "source": f"captures of ring specimens reduced by bh-loop-workbench {version('bh-loop-workbench')}; "
        "capture_sha256 names the file of each run",
        "history": f"{now} handed over from store {Path(store.path).name}, revision {store.revision}",
        "references": "IEC 60050-221 for the terms",
        "selection": str(choice),
        "left_out": f"{aside} runs set aside in the whole store, {len(store.failures)} captures that failed",
        "sheet_sha256": sheet_sha256,
    }


def _versions() -> str:
    return "".join(f"{name} {number}\n" for name, number in [("python", python_version()), *_installed()])


def _installed() -> list[tuple[str, str]]:
    return [(name, version(name)) for name in _PACKAGES]


def _names(given: Names) -> Sequence[str] | None:
    return None if given is None else (given,) if isinstance(given, str) else tuple(given)


def _numbers(given: Settings) -> Sequence[float] | None:
    if given is None:
        return None
    return tuple(float(each) for each in given) if isinstance(given, Iterable) else (float(given),)
