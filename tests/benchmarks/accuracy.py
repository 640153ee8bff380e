"""Errors of a reduction against the truth: 12.37 cycles of 20,000 samples, clean and as recorded.

    python tests/benchmarks/accuracy.py

Aims: 1e-4 without noise, 1e-3 with 0.05 % noise and 14 bit.
"""

from __future__ import annotations

from simulated import CIRCUITS, RING, Case, case, loops

from workbench.quantities.reduction import reduce_record

NAMES = ("loss_per_cycle", "induction_tip", "field_tip", "remanence", "coercivity")
STATES = {"without noise": (0.0, 0, 1e-4), "0.05 % noise, 14 bit": (5e-4, 14, 1e-3)}


def errors(found: Case) -> dict[str, float]:
    """Relative error by quantity."""
    values = reduce_record(found.record, found.line, RING, found.circuit, {}).values
    return {name: values[name] / found.truth[name] - 1 for name in NAMES}


def main() -> None:
    """Print the table and whether each aim is met."""
    for state, (noise, bits, aim) in STATES.items():
        print(f"\n{state}, aim {aim:g}; relative errors in units of 1e-6")
        print(f"{'loop':22}{'circuit':20}" + "".join(f"{name:>16}" for name in NAMES))
        worst = 0.0
        for circuit in CIRCUITS:
            for name in loops():
                found = errors(case(name, circuit, noise, bits))
                worst = max(worst, *(abs(error) for error in found.values()))
                print(f"{name:22}{circuit:20}" + "".join(f"{1e6 * found[each]:16.2f}" for each in NAMES))
        print(f"worst {worst:.2g}: aim {'met' if worst <= aim else 'NOT met'}")


if __name__ == "__main__":
    main()
