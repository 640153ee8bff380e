"""A batch of captures reduced: a pure function that any worker can run, with an outcome a capture."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.errors import CaptureError
from workbench.capture.campaign import Campaign, RunLine
from workbench.capture.read import read_capture
from workbench.quantities.mark_table import MARKS, mark_bits
from workbench.quantities.reduction import reduce_record
from workbench.quantities.result import RunResult
from workbench.store.schema import NAMES, SOURCES

Floats = npt.NDArray[np.float64]
Singles = npt.NDArray[np.float32]


@dataclass(frozen=True, eq=False)
class Reduced:
    """A capture that became a run, in the types in which it is stored."""

    line: RunLine
    capture_sha256: str
    field: Singles
    """(phase,) A/m"""
    induction: Singles
    """(phase,) T"""
    figures: Floats
    """(part, quantity): values, standard uncertainties, degrees of freedom."""
    budget: Singles
    """(quantity, source): signed c*u."""
    marks: int
    seen: str
    cautions: str


@dataclass(frozen=True)
class Failed:
    """A capture that gave no run: why, and what to do."""

    line: RunLine
    reason: str
    remedy: str


Outcome = Reduced | Failed


def reduce_batch(campaign: Campaign, lines: Sequence[RunLine]) -> tuple[Outcome, ...]:
    """Reduce some captures of a campaign.

    Parameters
    ----------
    campaign : Campaign    its own list of runs is not looked at
    lines : lines of the run list

    Returns
    -------
    tuple of Reduced and Failed, one a line, in order; a bad capture raises nothing
    """
    return tuple(_reduce_one(campaign, line) for line in lines)


def _reduce_one(campaign: Campaign, line: RunLine) -> Outcome:
    try:
        record = read_capture(campaign, line)
        specimen, circuit = campaign.specimens[line.specimen], campaign.circuits[line.circuit]
        result = reduce_record(record, line, specimen, circuit, campaign.limits)
        return packed(line, record.sha256, result)
    except CaptureError as error:
        return Failed(line, error.reason, error.remedy)
    except Exception as error:
        # One capture that meets a fault of ours must not cost the person the other thousand.
        return Failed(
            line,
            f"unexpected: {type(error).__name__}: {error}",
            "This is a fault of the program, not yours: report it, with this capture. The other captures are reduced.",
        )


def packed(line: RunLine, sha256: str, result: RunResult) -> Reduced:
    """A result in the types in which it is stored."""
    parts = (result.values, result.uncertainties, result.dof)
    budget = [[result.budget.get(name, {}).get(source, 0.0) for source in SOURCES] for name in NAMES]
    return Reduced(
        line=line,
        capture_sha256=sha256,
        field=np.asarray(result.field, np.float32),
        induction=np.asarray(result.induction, np.float32),
        figures=np.array([[part.get(name, np.nan) for name in NAMES] for part in parts], float),
        budget=np.array(budget, np.float32),
        marks=mark_bits(tuple(name for name in result.marks if name in MARKS)),
        seen="\n".join(result.seen.values()),
        cautions="\n".join(result.cautions),
    )
