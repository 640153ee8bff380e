"""Kernel work of a change of slider, and redraws of an act, at 48 loops of 512 points.

    python tests/benchmarks/slider.py

Aim: under 10 ms of processor time in the kernel, and one redraw of a pane an act.  The browser
is not in it.
"""

from __future__ import annotations

import tempfile
import time
from pathlib import Path

import numpy as np
from simulated import CIRCUITS, RING, SOFT

import workbench
from workbench.bench.forward import Digitiser, Timing, simulate
from workbench.bench.materials import alloy_loop, tip_at_field
from workbench.store.open import Store
from workbench.views.widgets.workbench import Workbench

PEAKS = np.geomspace(10.0, 1000.0, 48).round(1)
FREQUENCIES = (50.0, 100.0, 200.0, 400.0)
ROUNDS = 10
QUIET = Digitiser(noise=1e-6), Digitiser(noise=1e-5)
SHEET = """
sheet = 1
title = "Forty-eight loops"
[circuits.main.field]
sensor = "shunt"
resistance = "0.5000(5) ohm"
[circuits.main.induction]
sensor = "winding"
[specimens.R1]
alloy = "invented"
outer_diameter = "40.00(2) mm"
inner_diameter = "34.00(2) mm"
height = "5.00(2) mm"
density = "7480(15) kg/m^3"
primary_turns = 120
secondary_turns = 60
"""


def made_store(folder: Path) -> Store:
    """A campaign of 48 peak fields at four frequencies, written, read and reduced."""
    (folder / "captures").mkdir()
    (folder / "campaign.toml").write_text(SHEET, encoding="utf-8")
    lines = ["capture,specimen,frequency [Hz],temperature [degC],peak_field [A/m]"]
    for number, (frequency, peak) in enumerate((f, p) for f in FREQUENCIES for p in PEAKS):
        loop = alloy_loop(SOFT, tip_at_field(SOFT, peak, frequency), frequency)
        timing = Timing(200 * frequency, 1274)
        field, induction = simulate(*loop, RING, CIRCUITS["winding"], frequency, timing, *QUIET, seed=number)
        name = f"captures/{number:04d}.npz"
        channels = {"time [s]": timing.times, "field [V]": field.values, "induction [V]": induction.values}
        np.savez(folder / name, **channels)
        lines.append(f"{name},R1,{frequency:g},23,{peak:g}")
    (folder / "runs.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    return workbench.reduce(workbench.read_campaign(folder), into=folder / "made.store", progress=False)


def measured(bench: Workbench, trait: str, values: list[float]) -> tuple[list[float], int]:
    """Processor time of each act, s, and the most redraws of one pane in one act."""
    times, most = [], 0
    for value in values * ROUNDS:
        before = [pane.draws for pane in bench.panes]
        start = time.process_time()
        bench.selection.choose(**{trait: value})
        times.append(time.process_time() - start)
        most = max(most, *(pane.draws - drawn for pane, drawn in zip(bench.panes, before, strict=True)))
    return times, most


def main() -> None:
    """Print the work and the redraws of moving each slider."""
    with tempfile.TemporaryDirectory() as folder:
        bench = Workbench(made_store(Path(folder)))
        bench.selection.choose(along="peak")
        assert bench.page is not None
        loops = len(bench.page.loops.field)
        print(f"{loops} loops of 512 points, {len(bench.store.runs.run)} runs")
        for trait, values in (("frequency", list(FREQUENCIES)), ("peak", [float(peak) for peak in PEAKS[::6]])):
            times, most = measured(bench, trait, values)
            median, slow = np.median(times), np.percentile(times, 95)
            print(
                f"{trait:10} {1e3 * median:.1f} ms, 95 % below {1e3 * slow:.1f} ms; "
                f"aim 10 ms: {'met' if median < 0.01 else 'NOT met'}; redraws of a pane an act: {most}"
            )
        bench.close()


if __name__ == "__main__":
    main()
