"""What a run's figures depend on besides its capture: one hash a line, to find what has changed."""

from __future__ import annotations

import hashlib
from dataclasses import replace
from importlib.metadata import version

from workbench.capture.campaign import Campaign

PROGRAM = "bh-loop-workbench"


def program_version() -> str:
    """Version of this program."""
    return version(PROGRAM)


def settings_fingerprints(campaign: Campaign) -> dict[str, str]:
    """A hash for each capture of what the run list, the sheet and the program's version say about it.

    Returns
    -------
    {capture: hash}    the number of the line and the specimen's factors are left out: they change nothing

    Notes
    -----
    The version is in it because one store should hold figures of one way of evaluating.
    """
    # repr of a frozen dataclass names every field, and a float's repr is exact.
    specimens = {name: repr(replace(each, factors={})) for name, each in campaign.specimens.items()}
    inductors = {name: repr(each) for name, each in campaign.inductors.items()}
    circuits = {name: repr(each) for name, each in campaign.circuits.items()}
    common = repr((program_version(), campaign.columns, sorted(campaign.limits.items())))
    return {
        line.capture: _hash(
            common,
            repr(replace(line, line=0)),
            specimens.get(line.specimen) or inductors.get(line.specimen, ""),
            circuits[line.circuit],
        )
        for line in campaign.runs
    }


def _hash(*texts: str) -> str:
    return hashlib.sha256("\0".join(texts).encode()).hexdigest()
