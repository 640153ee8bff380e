"""A store made of closed forms, for tests of the views: no file, no reduction.

Every loop is a line of permeability with a lens added: H = Ĥ cos(θ) and B = B̂ sin-like by tanh,
with a lag that grows with frequency.  Invented; nothing is checked against these numbers.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from types import SimpleNamespace

import numpy as np
import pandas as pd
import xarray as xr

from workbench.base.errors import StoreError
from workbench.base.vocabulary import QUANTITIES
from workbench.quantities.mark_table import mark_bits
from workbench.quantities.result import SOURCES

HOSTILE = "<img src=x onerror=document.title='pwned'>"
PHASE = 2 * np.pi * np.arange(512) / 512
ALLOYS = {  # specimen: (alloy, knee A/m, saturation T, lag)
    "R41a": ("Fe-6.5Si, melt 41", 60.0, 1.30, 0.25),
    "R41b": ("Fe-6.5Si, melt 41", 66.0, 1.28, 0.3),
    "R52a": ("Fe-50Ni, melt 52", 25.0, 1.50, 0.15),
    "R60a": ("Fe-49Co-2V", 150.0, 2.20, 0.35),
    HOSTILE: ("Fe <b>bold</b> & co $x_1$", 40.0, 1.00, 0.4),
}
PEAKS = (20.0, 40.0, 80.0, 160.0, 320.0, 640.0)
FREQUENCIES = (50.0, 400.0, 1000.0, 5000.0)
TEMPERATURES = (23.0, 100.0)


@dataclass(eq=False)
class FakeStore:
    """Answers what the views ask of a store."""

    runs: xr.Dataset
    title: str = "Closed forms & <i>tags</i>"
    revision: int = 1
    path: str = "closed-forms.store"
    failures: pd.DataFrame = field(
        default_factory=lambda: pd.DataFrame(
            [("captures/bad.csv", "the file is empty <b>", "record it again")], columns=["capture", "reason", "remedy"]
        )
    )

    def set_aside(self, capture: str, reason: str) -> None:
        if not reason.strip():
            raise StoreError(f"Setting '{capture}' aside: wanted a reason in words; found an empty one. Say why.")
        self._stand(capture, "set aside", reason)

    def take_back(self, capture: str) -> None:
        self._stand(capture, "kept", "")

    def _stand(self, capture: str, standing: str, reason: str) -> None:
        at = list(self.runs["capture"].values).index(capture)
        self.runs["standing"].values[at], self.runs["reason"].values[at] = standing, reason
        self.revision += 1

    def pointers(self, include_set_aside: bool = False) -> SimpleNamespace:
        runs = self.runs
        good = np.array(runs.kind.values == "loop")
        if not include_set_aside:
            good &= np.array(runs.standing.values == "kept")
        names = ("specimen", "peak_field", "frequency", "temperature")
        axes = [tuple(dict.fromkeys(runs[name].values[good])) for name in names[:1]]
        axes += [tuple(np.unique(runs[name].values[good])) for name in names[1:]]  # one NaN for all
        rows = np.full([len(axis) for axis in axes], -1, np.int32)
        places = [[str(value) for value in axis] for axis in axes]
        for row in np.flatnonzero(good)[::-1]:
            setting = (str(runs[name].values[row]) for name in names)
            rows[tuple(place.index(value) for place, value in zip(places, setting, strict=True))] = row
        return SimpleNamespace(
            specimens=axes[0],
            peaks=np.array(axes[1], float),
            frequencies=np.array(axes[2], float),
            temperatures=np.array(axes[3], float),
            rows=rows,
            peak_name="peak_field",
        )


def one_run(specimen: str, peak: float, frequency: float, temperature: float) -> dict:
    alloy, knee, saturation, lag = ALLOYS[specimen]
    width = lag * (1 + (frequency / 800) ** 0.6) * (1 - (temperature - 23) / 600)
    h = peak * np.sin(PHASE + min(width, 1.2))
    b = saturation * np.tanh(peak * np.sin(PHASE) / knee / 1.4) * (1 - 0.03 * np.log10(frequency / 50))
    loss = abs(float(np.sum(h * (np.roll(b, -1) - np.roll(b, 1)) / 2)))
    tip = float(b.max())
    values = dict.fromkeys(QUANTITIES, float("nan"))
    values |= {
        "field_tip": peak, "induction_tip": tip, "polarization_tip": tip, "coercivity": peak * np.sin(width),
        "coercivity_j": peak * np.sin(width), "remanence": tip * 0.6, "remanence_ratio": 0.6,
        "amplitude_permeability": tip / (4e-7 * np.pi * peak), "loss_per_cycle": loss,
        "loss_per_volume": loss * frequency, "specific_loss": loss * frequency / 7500,
        "form_factor": 1.11, "measured_frequency": frequency * 1.0001,
    }  # fmt: skip
    return {"field": h, "induction": b, "alloy": alloy, "values": values}


def closed_form_store(specimens: tuple[str, ...] = tuple(ALLOYS), hostile: bool = True) -> FakeStore:
    """Five specimens by default; a block without runs, a doubtful, a set-aside and a NaN one."""
    specimens = tuple(name for name in specimens if hostile or name != HOSTILE)
    lines, keys = [], []
    for specimen in specimens:
        for peak in PEAKS:
            for frequency in FREQUENCIES:
                for temperature in TEMPERATURES:
                    if specimen == "R41a" and peak >= 320 and frequency >= 5000:
                        continue
                    keys.append((specimen, peak, frequency, temperature))
                    lines.append(one_run(specimen, peak, frequency, temperature))
    return FakeStore(_dataset(keys, lines))


def _dataset(keys: list, lines: list) -> xr.Dataset:
    count = len(keys)
    names = ("specimen", "peak_field", "frequency", "temperature")
    coords = {name: ("run", list(values)) for name, values in zip(names, zip(*keys, strict=True), strict=True)}
    texts = {
        name: np.full(count, text, dtype=object)
        for name, text in (
            ("kind", "loop"), ("circuit", "main"), ("remark", ""), ("standing", "kept"), ("reason", ""),
            ("seen", ""), ("cautions", ""), ("condition", "1100 degC 1 h"),
        )
    }  # fmt: skip
    texts["capture"] = np.array([f"captures/run-{number:04d}.csv" for number in range(count)], dtype=object)
    texts["alloy"] = np.array([line["alloy"] for line in lines], dtype=object)
    marks = np.zeros(count, int)
    data = {name: np.array([line["values"][name] for line in lines]) for name in QUANTITIES}
    place = {key: number for number, key in enumerate(keys)}
    _faults(place, texts, marks, data)
    variables = {name: ("run", values) for name, values in data.items()}
    variables |= {"u_" + name: ("run", 0.01 * np.abs(values)) for name, values in data.items()}
    variables["field"] = (("run", "phase"), np.array([line["field"] for line in lines], np.float32))
    variables["induction"] = (("run", "phase"), np.array([line["induction"] for line in lines], np.float32))
    names = list(QUANTITIES)
    budget = np.zeros((count, len(names), len(SOURCES)), np.float32)
    for source in ("area", "scatter"):
        budget[:, :, SOURCES.index(source)] = np.array([0.01 / 2**0.5 * np.abs(data[name]) for name in names]).T
    variables["budget"] = (("run", "quantity", "source"), np.nan_to_num(budget))
    coords |= {"quantity": names, "source": list(SOURCES)}
    coords |= {name: ("run", values) for name, values in texts.items()}
    coords |= {"marks": ("run", marks), "repeat": ("run", np.ones(count, int)), "phase": PHASE}
    return xr.Dataset(variables, coords)


def _faults(place: dict, texts: dict, marks: np.ndarray, data: dict) -> None:
    doubtful, aside, broken = (("R41a", 160.0, 400.0, 23.0), ("R41a", 640.0, 50.0, 23.0), ("R41a", 20.0, 50.0, 23.0))
    if doubtful in place:
        marks[place[doubtful]] = mark_bits(("clipped", "off setting"))
        texts["seen"][place[doubtful]] = "clipped: 14 equal extreme samples <script>\noff setting: 3 % above"
        texts["remark"][place[doubtful]] = "<b>range too small</b>"
    if aside in place:
        texts["standing"][place[aside]] = "set aside"
        texts["reason"][place[aside]] = "loose lead"
    if broken in place:
        for name in ("specific_loss", "loss_per_cycle", "loss_per_volume", "amplitude_permeability"):
            data[name][place[broken]] = np.nan
    texts["cautions"][0] = "captures/run-0000.csv: about 120 V peak on the secondary"
