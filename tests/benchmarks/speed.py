"""Time and error from a capture of 20,000 samples to loop and W, as ratios measured in one run.

    python tests/benchmarks/speed.py

Against the usual script (time and error), and against the floor: one rFFT of each channel.  Reading
the file is not in it.  Aim: more accurate than the script, and within 5 times the floor.
"""

from __future__ import annotations

import time
from collections.abc import Callable

import numpy as np
from accuracy import NAMES
from simulated import RING, SHUNT, Case, case, loops
from usual_script import usual_script

from workbench.loop.assemble import Loop, assemble, waves
from workbench.quantities.power import area
from workbench.quantities.reduction import reduce_record
from workbench.quantities.result import PHASE_POINTS

ROUNDS = 60


def loop_and_loss(found: Case) -> tuple[Loop, float]:
    """The loop on its phase grid, and W."""
    loop = assemble(found.record, RING, found.circuit, found.line.frequency)
    waves(loop.harmonics, PHASE_POINTS, loop.single)
    return loop, float(area(loop.harmonics.field, loop.harmonics.induction)[0])


def floor(found: Case) -> None:
    """The least that any method with a spectrum does."""
    np.fft.rfft(found.record.field)
    np.fft.rfft(found.record.induction)


def script(found: Case) -> dict[str, float]:
    """The usual script on the same capture."""
    return usual_script(found.record, RING, SHUNT.scalars["resistance"].value)


def full(found: Case) -> dict[str, float]:
    """All quantities, budgets and marks."""
    return dict(reduce_record(found.record, found.line, RING, found.circuit, {}).values)


def medians(found: Case, *tasks: Callable[[Case], object]) -> list[float]:
    """Median time of each task, s; taken in turns, so that a slow moment of the machine hits all."""
    times: list[list[float]] = [[] for _ in tasks]
    for _ in range(ROUNDS):
        for task, taken in zip(tasks, times, strict=True):
            start = time.perf_counter()
            task(found)
            taken.append(time.perf_counter() - start)
    return [float(np.median(taken)) for taken in times]


def main() -> None:
    """Print times, ratios and errors."""
    found = case("silicon iron 1.45 T", "winding", 5e-4, 14)
    ours, usual, least, everything = medians(found, loop_and_loss, script, floor, full)
    print(f"one capture, ms: loop and W {1e3 * ours:.2f}, usual script {1e3 * usual:.2f}, two rFFTs {1e3 * least:.2f}")
    print(f"  usual script / ours  {usual / ours:.2f}")
    print(f"  ours / floor         {ours / least:.2f}   aim 5: {'met' if ours <= 5 * least else 'NOT met'}")
    print(f"  all quantities, budgets and marks: {1e3 * everything:.1f} ms, {everything / ours:.1f} times loop and W")
    print("\nerror of the usual script over ours (root mean square of 20 noisy captures; above 1 ours is better)")
    print(f"{'loop':22}" + "".join(f"{name:>16}" for name in NAMES))
    for name in loops():
        ratio = _error_ratio(name)
        print(f"{name:22}" + "".join(f"{ratio[each]:16.1f}" for each in NAMES))


def _error_ratio(name: str) -> dict[str, float]:
    ours, usual = [], []
    for seed in range(20):
        found = case(name, "winding", 5e-4, 14, seed)
        for method, errors in ((full, ours), (script, usual)):
            values = method(found)
            errors.append([values[each] / found.truth[each] - 1 for each in NAMES])
    root_mean_square = [np.sqrt(np.mean(np.square(errors), axis=0)) for errors in (usual, ours)]
    return dict(zip(NAMES, root_mean_square[0] / root_mean_square[1], strict=True))


if __name__ == "__main__":
    main()
