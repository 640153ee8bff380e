"""The two doors of this folder: a campaign folder read and checked, and one capture read and checked."""

from __future__ import annotations

import math
import os
from pathlib import Path

import numpy as np

# The readers enter themselves when they are imported.
import workbench.capture.read_hdf5
import workbench.capture.read_npz
import workbench.capture.read_text  # noqa: F401
from workbench.base.errors import Finding, SheetError
from workbench.capture.campaign import Campaign, Columns, RunLine
from workbench.capture.checks import check_cycles, check_samples, check_scale, in_kept_unit
from workbench.capture.files import locate, sha256_of
from workbench.capture.formats import Raw, no_time_base, reader_of
from workbench.capture.record import Record
from workbench.capture.runlist import read_runs
from workbench.capture.sheet import circuits_of, columns_of, limits_of, read_sheet, specimens_of
from workbench.capture.timebase import sample_rate


def read_campaign(folder: str | os.PathLike[str]) -> Campaign:
    """Read campaign.toml and runs.csv of a folder, and check everything in them.

    Parameters
    ----------
    folder : str or PathLike    the campaign's folder

    Returns
    -------
    Campaign                    frozen; SI units, temperatures in degC

    Raises
    ------
    SheetError                  with every finding of both files

    Examples
    --------
    >>> read_campaign("no such folder")
    Traceback (most recent call last):
    workbench.base.errors.SheetError: Reading the campaign 'no such folder': 1 finding
    - no such folder: wanted a folder with campaign.toml and runs.csv; found no folder of this name
    """
    place = Path(folder)
    doing = f"Reading the campaign '{place}'"
    if not place.is_dir():
        found = "a file" if place.exists() else "no folder of this name"
        raise SheetError(doing, [Finding(str(place), "a folder with campaign.toml and runs.csv", found)])
    read = read_sheet(place)
    runs, findings = read_runs(place, read)
    if read.sheet is None or read.findings or findings:
        raise SheetError(doing, [*read.findings, *findings])
    sheet = read.sheet
    return Campaign(
        folder=place,
        title=sheet.title,
        operator=sheet.operator,
        columns=columns_of(sheet),
        circuits=circuits_of(sheet),
        specimens=specimens_of(sheet),
        inductors={name: table.mutual_inductance for name, table in sheet.inductors.items()},
        limits=limits_of(sheet),
        runs=runs,
        sheet_text=read.text,
    )


def read_capture(campaign: Campaign, line: RunLine) -> Record:
    """Read one capture and check that it can be a measurement.

    Parameters
    ----------
    campaign : Campaign    gives the folder, the choice of columns and the circuit's scale
    line : RunLine         gives the path, the kind and the frequency

    Returns
    -------
    Record                 two channels in recorded units, on an even time base (none for a trace)

    Raises
    ------
    CaptureError           with the reason and what to do; no other exception for whatever is in the file
    """
    location = locate(campaign.folder, line.capture)
    wants_time = line.kind != "trace"
    raw = reader_of(location)(location, campaign.columns, wants_time)
    check_samples(raw)
    field, field_unit = in_kept_unit("field", raw.field)
    induction, induction_unit = in_kept_unit("induction", raw.induction)
    check_scale("field", field_unit, campaign.circuits[line.circuit])
    check_scale("induction", induction_unit, campaign.circuits[line.circuit])
    rate = _rate(raw, campaign.columns) if wants_time else math.nan
    if wants_time:
        check_cycles(len(field.values), rate, line)
    for values in (field.values, induction.values):
        np.asarray(values).setflags(write=False)
    return Record(
        field=field.values,
        induction=induction.values,
        field_unit=field_unit,
        induction_unit=induction_unit,
        sample_rate=rate,
        sha256=sha256_of(location),
        field_step=field.step,
        induction_step=induction.step,
    )


def _rate(raw: Raw, columns: Columns) -> float:
    """The time column's rate, or the sheet's, or the one that the file says."""
    if raw.time is not None:
        return sample_rate(raw.time, raw.where)
    rate = raw.sample_rate if math.isnan(columns.sample_rate) else columns.sample_rate
    if math.isnan(rate):
        raise no_time_base([raw.field.name, raw.induction.name])
    return rate


def capture_sha256(campaign: Campaign, line: RunLine) -> str:
    """SHA-256 of the whole file of a capture, kept for the process by path, size and modification time.

    Raises
    ------
    CaptureError    the file is not there, or its path leaves the campaign folder
    """
    return sha256_of(locate(campaign.folder, line.capture))
