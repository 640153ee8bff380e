"""The notebook of a hand-off: plain xarray, nothing of this project.

No text of a campaign stands in its source: names and titles are printed as data, so that
nothing in a sheet can become markup or code.
"""

from __future__ import annotations

from typing import Any

from workbench.write.notebook import notebook_of

_ABOUT = """\
# Loops and figures of magnetic specimens, handed over

This folder stands on its own. `runs.nc` holds the loops, the figures with their uncertainties and the budgets behind
them; `campaign.toml` is the sheet of the bench as it was used; `versions.txt` says what evaluated the captures;
`SHA256SUMS` guards all of them (`sha256sum --check SHA256SUMS`).

The cells need numpy, xarray, h5netcdf, pandas and matplotlib. All is in SI units, temperatures in °C. `u_q` is the
standard uncertainty of `q`; tables show `q ± 2 u_q`."""

_OPEN = """\
%matplotlib inline
import hashlib
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np
import pandas as pd
import xarray as xr

plt.rcParams["text.parse_math"] = False  # names are text
runs = xr.load_dataset("runs.nc")
for key in ("title", "source", "history", "selection", "left_out"):
    print(f"{key}: {runs.attrs[key]}")
print(f"runs: {runs.sizes['run']}, specimens: {', '.join(sorted(set(runs.specimen.values)))}")"""

_GUARD = """\
# The figures belong to this sheet and no other.
assert hashlib.sha256(Path("campaign.toml").read_bytes()).hexdigest() == runs.attrs["sheet_sha256"]"""

_TABLE = """\
def plus_minus(value, expanded):
    # Two digits of U = 2 u, and the value rounded to match.
    if not np.isfinite(value):
        return "–"
    if not expanded > 0:
        return f"{value:.6g}"
    places = max(0, 1 - int(np.floor(np.log10(expanded))))
    return f"{value:.{places}f} ± {expanded:.{places}f}"


def with_u(name):
    return [plus_minus(value, 2 * u) for value, u in zip(runs[name].values, runs[f"u_{name}"].values)]


figures = ["field_tip", "induction_tip", "coercivity", "remanence", "amplitude_permeability", "specific_loss"]
table = pd.DataFrame({
    "specimen": runs.specimen.values, "f / Hz": runs.frequency.values, "T / degC": runs.temperature.values,
    **{f"{name} / {runs[name].attrs['units']}": with_u(name) for name in figures},
})
tips = pd.Series(runs.field_tip.values).dropna()
top = tips.groupby([table[name].loc[tips.index] for name in ("specimen", "f / Hz", "T / degC")]).idxmax()
print("The highest step of each ladder, the first 40 of them:")
print(table.loc[top].head(40).to_string(index=False))"""

_DOUBTS = """\
masks, words = runs.marks.attrs["flag_masks"], runs.marks.attrs["flag_meanings"].split()
for mask, word in zip(np.atleast_1d(masks), words):
    count = int((runs.marks.values & mask > 0).sum())
    if count:
        print(f"{word.replace('_', ' ')}: {count} of {runs.sizes['run']} runs")"""

_CHECK = """\
# The main figures once more from the loops themselves, by a few lines anybody can read.
loops = runs.isel(run=np.flatnonzero(runs.kind.values == "loop"))
h, b = loops.field.values, loops.induction.values
again = {
    "field_tip": np.ptp(h, axis=1) / 2,
    "induction_tip": np.ptp(b, axis=1) / 2,
    "loss_per_cycle": np.sum((h + np.roll(h, -1, 1)) / 2 * (np.roll(b, -1, 1) - b), axis=1),
}
for name, value in again.items():
    # The loop as drawn is smoother or rougher than the record by its noise: within its
    # uncertainty, or half a percent, the two must agree.
    allowed = 2 * loops[f"u_{name}"].values + 0.005 * np.abs(loops[name].values)
    difference = np.abs(value - loops[name].values)
    assert np.all(difference <= allowed), f"{name} does not follow from the loops"
    print(f"{name} of {len(value)} loops follows from the loops")"""

_LOOPS = """\
names = list(dict.fromkeys(loops.specimen.values))[:6]
figure, panes = plt.subplots(1, max(len(names), 1), figsize=(3 * max(len(names), 1), 3), squeeze=False)
for pane, name in zip(panes[0], names):
    own = loops.isel(run=np.flatnonzero(loops.specimen.values == name))
    slow = own.isel(run=np.flatnonzero(own.frequency.values == own.frequency.values.min()))
    for run in range(min(slow.sizes["run"], 30)):
        closed = np.append(np.arange(slow.sizes["phase"]), 0)
        pane.plot(slow.field.values[run, closed], slow.induction.values[run, closed], lw=0.8)
    pane.set(title=f"{name}, {slow.frequency.values[0]:g} Hz", xlabel="H / (A/m)", ylabel="B / T")
figure.tight_layout()"""

_LOSS = """\
figure, (left, right) = plt.subplots(1, 2, figsize=(9, 3.4))
for name in names:
    own = loops.isel(run=np.flatnonzero(loops.specimen.values == name))
    left.loglog(own.field_tip, own.amplitude_permeability, ".")
    right.loglog(own.induction_tip, own.loss_per_cycle.where(own.loss_per_cycle > 0), ".", label=name)
left.set(xlabel="field_tip / (A/m)", ylabel="amplitude_permeability")
right.set(xlabel="induction_tip / T", ylabel="loss_per_cycle / (J/m³)")
if names:
    right.legend(fontsize=8)
figure.tight_layout()"""


def handoff_notebook() -> Any:
    """The notebook, not yet executed; it stands in the folder of `runs.nc` and `campaign.toml`."""
    code = (_OPEN, _GUARD, _TABLE, _DOUBTS, _CHECK, _LOOPS, _LOSS)
    return notebook_of(("markdown", _ABOUT), *(("code", source) for source in code))
