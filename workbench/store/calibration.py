"""Air runs first: the delay that they find goes into their circuit before any other run is reduced."""

from __future__ import annotations

import math
from collections.abc import Collection
from dataclasses import dataclass, replace

import numpy as np

from workbench.base.errors import CaptureError
from workbench.base.vocabulary import QUANTITIES
from workbench.capture.campaign import Campaign, RunLine
from workbench.capture.read import read_capture
from workbench.quantities.air import AirRun, air_run, calibrated
from workbench.quantities.result import PHASE_POINTS, RunResult
from workbench.store.batch import Failed, Outcome, packed


@dataclass(frozen=True)
class Calibration:
    """A campaign whose circuits know their delay, and what each air run said."""

    campaign: Campaign
    outcomes: dict[str, Outcome]
    """By capture, of the air runs only."""


def calibrate(campaign: Campaign, left_out: Collection[str]) -> Calibration:
    """Reduce the air runs of a campaign, and put what they found into its circuits.

    Parameters
    ----------
    campaign : Campaign
    left_out : captures set aside: they are reduced, and nothing is taken from them
    """
    outcomes: dict[str, Outcome] = {}
    found: dict[str, list[AirRun]] = {}
    for line in campaign.runs:
        if line.kind != "air":
            continue
        outcomes[line.capture], run = _reduced(campaign, line)
        if run is not None and line.capture not in left_out:
            found.setdefault(line.circuit, []).append(run)
    circuits = {name: calibrated(circuit, found.get(name, [])) for name, circuit in campaign.circuits.items()}
    return Calibration(replace(campaign, circuits=circuits), outcomes)


def _reduced(campaign: Campaign, line: RunLine) -> tuple[Outcome, AirRun | None]:
    try:
        record = read_capture(campaign, line)
        inductance = campaign.inductors.get(line.specimen)
        run = air_run(record, line.capture, campaign.circuits[line.circuit], line.frequency, inductance)
    except CaptureError as error:
        return Failed(line, error.reason, error.remedy), None
    values = dict.fromkeys(QUANTITIES, math.nan) | {"measured_frequency": run.frequency}
    # An inductor has no loop: what it says stands in the sentence.
    nothing = np.full(PHASE_POINTS, np.nan)
    result = RunResult(nothing, nothing, values, {}, {}, {}, (), {"air": run.sentence()})
    return packed(line, record.sha256, result), run
