"""A campaign reduced into a store: only what is new or changed is worked on."""

from __future__ import annotations

import os
import signal
from collections.abc import Generator, Sequence
from concurrent.futures import ProcessPoolExecutor, as_completed
from concurrent.futures.process import BrokenProcessPool
from contextlib import closing
from dataclasses import replace
from multiprocessing import get_context
from pathlib import Path

from tqdm.auto import tqdm

from workbench.base.errors import CaptureError, StoreError
from workbench.capture.campaign import Campaign, RunLine
from workbench.capture.read import capture_sha256
from workbench.store.batch import Outcome, reduce_batch
from workbench.store.calibration import Calibration, calibrate
from workbench.store.campaign import prepare_store, update_campaign
from workbench.store.committer import Committer
from workbench.store.compaction import compact
from workbench.store.fingerprint import settings_fingerprints
from workbench.store.interrupts import Interrupts
from workbench.store.open import Store
from workbench.store.writer import Writer

BATCH = 64
"""Captures a batch: about a second of work, so that handing them over costs next to nothing."""


def reduce(campaign: Campaign, into: str | os.PathLike[str], workers: int = 1, progress: bool = True) -> Store:
    """Reduce what is new or changed in a campaign, and write it into a store.

    Parameters
    ----------
    campaign : Campaign       from `read_campaign`
    into : str or PathLike    folder of the store: a new one, or that of the same campaign
    workers : int             processes.  With more than one, a script needs the usual guard
                              ``if __name__ == "__main__":``, as for any program that starts processes
    progress : bool           a progress bar on a terminal (to standard error) or in a notebook

    Returns
    -------
    Store                     its ``failures`` lists the captures that could not be reduced

    Raises
    ------
    StoreError                `into` is something else, of another campaign, locked or damaged

    Notes
    -----
    A capture is worked on if it is not in the store, or its file, its line, its specimen, its circuit, the
    limits or the program's version has changed, or it failed before.  A run whose line is gone from the
    run list is retired, which the history says; a run set aside stays so, also when it is reduced again.
    A store belongs to one campaign, known by its title or by its folder.  What is done when the work is
    interrupted is kept.
    """
    store = Path(into)
    if workers < 1:
        raise StoreError(f"Reducing into {store}: wanted 1 or more workers; found {workers}. Give a number from 1.")
    prepare_store(store, campaign)
    with Writer(store) as writer:
        calibration = calibrate(campaign, writer.set_aside())
        fingerprints = _fingerprints(campaign, calibration)
        update_campaign(writer, campaign)
        lines = _to_do(campaign, writer, fingerprints)
        committer = Committer(writer, campaign, fingerprints)
        committer.take([calibration.outcomes[line.capture] for line in lines if line.kind == "air"])
        others = [line for line in lines if line.kind != "air"]
        with Interrupts() as interrupts:
            try:
                _work(calibration.campaign, others, workers, progress, committer, interrupts)
            finally:
                committer.finish()
        compact(writer, committer.about)
    return Store(store)


def _fingerprints(campaign: Campaign, calibration: Calibration) -> dict[str, str]:
    """Of air runs from the sheet's circuits, of all others from those that the air runs have put right."""
    found = settings_fingerprints(calibration.campaign)
    own = settings_fingerprints(campaign)
    return {capture: own[capture] if capture in calibration.outcomes else each for capture, each in found.items()}


def _to_do(campaign: Campaign, writer: Writer, fingerprints: dict[str, str]) -> list[RunLine]:
    live = {capture: known for capture, *known in writer.live_runs()}
    return [
        line for line in campaign.runs
        if live.get(line.capture) != [fingerprints[line.capture], _hash_or_nothing(campaign, line)]
    ]  # fmt: skip


def _hash_or_nothing(campaign: Campaign, line: RunLine) -> str:
    try:
        return capture_sha256(campaign, line)
    except CaptureError:
        return ""  # gone or unreadable: the reduction will say how


def _work(
    campaign: Campaign,
    lines: Sequence[RunLine],
    workers: int,
    progress: bool,
    committer: Committer,
    interrupts: Interrupts,
) -> None:
    # None: tqdm looks itself whether there is a terminal or a notebook.
    shown = None if progress else True
    with (
        closing(_outcomes(campaign, lines, workers)) as outcomes,
        tqdm(total=len(lines), desc="reducing", unit=" captures", disable=shown) as bar,
    ):
        for some in outcomes:
            committer.take(some)
            bar.update(len(some))
            interrupts.check()


def _outcomes(campaign: Campaign, lines: Sequence[RunLine], workers: int) -> Generator[tuple[Outcome, ...], None, None]:
    # The list of runs would go along with every batch.
    bare = replace(campaign, runs=())
    if workers == 1 or len(lines) <= BATCH:
        for line in lines:
            yield reduce_batch(bare, [line])
        return
    batches = [lines[start : start + BATCH] for start in range(0, len(lines), BATCH)]
    # spawn: a forked child would inherit locks of threads (JupyterLab's kernel has some) that nobody frees.
    pool = ProcessPoolExecutor(min(workers, len(batches)), get_context("spawn"), _leave_interrupts_to_the_parent)
    try:
        for future in as_completed([pool.submit(reduce_batch, bare, batch) for batch in batches]):
            yield future.result()
    except BrokenProcessPool as error:
        raise StoreError(
            f"Reducing '{campaign.title}' with {workers} workers: wanted each to finish its captures; found one that "
            "ended at once (in a script, 'if __name__ == \"__main__\":' may be missing; or the memory ran out). "
            "What was done is kept: reduce again, with workers=1 if it happens again."
        ) from error
    finally:
        pool.shutdown(wait=True, cancel_futures=True)


def _leave_interrupts_to_the_parent() -> None:
    signal.signal(signal.SIGINT, signal.SIG_IGN)
