"""A first campaign.toml and runs.csv from file names: nobody types a thousand lines."""

from __future__ import annotations

import csv
import io
import json
import os
import re
from collections.abc import Iterable
from pathlib import Path

import h5py

# The readers enter themselves: their suffixes tell captures from other files.
import workbench.capture.read_hdf5
import workbench.capture.read_npz
import workbench.capture.read_text  # noqa: F401
from workbench.base.errors import WorkbenchError
from workbench.capture.formats import suffixes
from workbench.capture.names import compiled, natural_key, settings_in
from workbench.capture.run_row import COLUMNS, UNITS
from workbench.capture.runlist import LIST_NAME
from workbench.capture.sheet import SHEET_NAME

_ALWAYS = ("capture", "specimen", "frequency", "temperature")
_HDF5 = (".h5", ".hdf5", ".hdf")


def draft_campaign(folder: str | os.PathLike[str], pattern: str) -> list[Path]:
    """Write a first sheet and run list from the names of the captures in a folder.

    Parameters
    ----------
    folder : str or PathLike    searched with all folders in it
    pattern : str               e.g. ``"{specimen}_{peak_field}_{frequency}_{temperature}"``: the name
                                without its suffix; with a slash in it, the path from the folder or
                                from its ``captures``; with a ``#``, a group of an HDF5 file.  Numbers
                                are A/m, T, Hz, degC, or carry a unit (``400Hz``, ``-20degC``)

    Returns
    -------
    list of Path                the two files written; what has to be filled in is left blank there, and
                                captures that do not match stand as remarks at the end of the list

    Raises
    ------
    WorkbenchError              no such folder, a file that is there already, an unknown field, no match
    """
    place = Path(folder)
    if not place.is_dir():
        raise WorkbenchError(f"Drafting a campaign in '{place}': wanted a folder of captures; found none of this name")
    written = [place / SHEET_NAME, place / LIST_NAME]
    there = [path.name for path in written if path.exists() or path.is_symlink()]
    if there:
        names = " and ".join(there)
        raise WorkbenchError(f"Drafting a campaign in '{place}': {names} exists already; nothing is overwritten")
    compiled(pattern)
    captures = sorted(_captures(place, by_group="#" in pattern), key=natural_key)
    rows = [{"capture": name, **found} for name in captures if (found := _settings(name, pattern)) is not None]
    if not rows:
        some = ", ".join(f"'{name}'" for name in captures[:3]) or f"no file with a suffix of {', '.join(suffixes())}"
        reason = f"wanted names like '{pattern}'; found {some}"
        raise WorkbenchError(f"Drafting a campaign in '{place}': {reason}. Change the pattern, or rename the captures.")
    matched = {row["capture"] for row in rows}
    texts = (_sheet_text(rows), _list_text(rows, [name for name in captures if name not in matched]))
    for path, text in zip(written, texts, strict=True):
        with path.open("x", encoding="utf-8", newline="\n", errors="backslashreplace") as file:
            file.write(text)
    return written


def _captures(folder: Path, by_group: bool) -> Iterable[str]:
    """Texts for the run list's column `capture`: files of a kind that can be read, or their groups."""
    for path in folder.rglob("*"):
        name = path.relative_to(folder).as_posix()
        if path.suffix.lower() not in suffixes() or name == LIST_NAME or not path.is_file():
            continue
        if any(part.startswith(".") for part in name.split("/")):
            continue
        if by_group and path.suffix.lower() in _HDF5:
            yield from (f"{name}#{group}" for group in _groups(path))
        else:
            yield name


def _groups(path: Path) -> list[str]:
    """Groups that hold datasets; none for a file that cannot be opened: reading it will say why."""
    found: list[str] = []

    def visit(name: str, item: object) -> None:
        if isinstance(item, h5py.Dataset):
            found.append(name.rpartition("/")[0])

    try:
        with h5py.File(path, "r", locking=False) as file:
            file.visititems(visit)
    except (OSError, RuntimeError, KeyError):
        return []
    return sorted({name for name in found if name})


def _settings(capture: str, pattern: str) -> dict[str, str] | None:
    """What a capture's name says: the whole path, the path below ``captures``, or the bare name."""
    if not capture.isprintable():
        return None
    path, mark, group = capture.partition("#")
    bare = str(Path(path).with_suffix("").as_posix()) + mark + group
    names = [bare, bare.removeprefix("captures/")] if "/" in pattern else [f"{Path(path).stem}{mark}{group}"]
    for name in names:
        found = settings_in(name, pattern)
        if found is not None:
            return found
    return None


def _list_text(rows: list[dict[str, str]], others: list[str]) -> str:
    used = {key for row in rows for key in row}
    peaks = {"peak_field"} if not used & {"peak_field", "peak_induction"} else set()
    columns = [name for name in COLUMNS if name in used or name in _ALWAYS or name in peaks or name == "remark"]
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(f"{name} [{UNITS[name]}]" if name in UNITS else name for name in columns)
    for row in rows:
        # A line that begins with # would be a remark.
        capture = f"./{row['capture']}" if row["capture"].startswith("#") else row["capture"]
        writer.writerow({**row, "capture": capture}.get(name, "") for name in columns)
    out.writelines(f"# does not match the pattern: {name!r}\n" for name in others)
    return out.getvalue()


_SHEET = """\
# A first sheet, written from the names of the captures.  Fill in what is blank: number and unit in
# quotes, the standard uncertainty (k = 1) of the last digits in brackets, e.g. "40.02(2) mm".
sheet = 1
title = {title}
# operator = "bench 2"

# [columns]                   # which column of a capture is what: the name before the unit's bracket, or a number
# time = "time"               # or, without a time column: sample_rate = "200 kHz"
# field = "field"
# induction = "induction"
"""
_CIRCUIT = """
[circuits.{name}.field]
sensor = ""                   # "shunt": resistance, inductance; "current probe": sensitivity
# resistance = "0.4975(5) ohm"
# inductance = "12(5) nH"
# scale = "0.5 V/div"         # recorded unit to volt; "10" for a 10:1 divider
# delay = "0(3) ns"           # by how much this channel's record lags

[circuits.{name}.induction]
sensor = ""                   # "winding"; "passive integrator": resistance, capacitance, load;
                              # "electronic integrator": time_constant, droop
"""
_SPECIMEN = """
[specimens.{name}]
alloy = ""                    # e.g. "Fe-6.5Si, melt 41"
outer_diameter = ""           # e.g. "40.02(2) mm"
inner_diameter = ""           # e.g. "34.01(2) mm"
height = ""                   # e.g. "5.00(2) mm"; mass and density give the section better
# mass = "17.31(1) g"
# density = "7480(15) kg/m^3"
# resistivity = "82(1) uohm*cm"
# thickness = "0.30(1) mm"
# coil_area = "24(1) mm^2"
primary_turns = 0             # e.g. 120
secondary_turns = 0           # e.g. 60
"""


def _sheet_text(rows: list[dict[str, str]]) -> str:
    circuits = dict.fromkeys(row.get("circuit", "main") for row in rows)
    # An `air` run's specimen is an inductor, or whatever stood in its place: it has no dimensions.
    specimens = dict.fromkeys(row["specimen"] for row in rows if "specimen" in row and row.get("kind") != "air")
    inductors = dict.fromkeys(row["specimen"] for row in rows if "specimen" in row and row.get("kind") == "air")
    parts = [_SHEET.format(title='"A campaign"')]
    parts += [_CIRCUIT.format(name=_key(name)) for name in circuits]
    parts += [_SPECIMEN.format(name=_key(name)) for name in specimens]
    parts += [f'\n[inductors.{_key(name)}]\n# mutual_inductance = "10.00(1) uH"\n' for name in inductors]
    return "".join(parts)


def _key(name: str) -> str:
    """A name as a TOML key; JSON's escapes are TOML's too."""
    return name if re.fullmatch(r"[A-Za-z0-9_-]+", name) else json.dumps(name, ensure_ascii=False)
