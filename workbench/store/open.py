"""A store as one opens it: the runs, the cube, failures and history; runs set aside and taken back."""

from __future__ import annotations

import difflib
import os
from collections.abc import Mapping, Sequence
from functools import cached_property
from pathlib import Path

import numpy as np
import pandas as pd
import xarray as xr

from workbench.base.errors import QuantityError, StoreError, nearest
from workbench.store.assemble import curves_dataset, runs_dataset
from workbench.store.catalog import insist_on_store
from workbench.store.cube import reached_cube, setting_cube
from workbench.store.pointers import Placement, PointerCube, place_loops, pointer_cube
from workbench.store.schema import KEPT, PEAKS, SET_ASIDE
from workbench.store.segments import Arrays, check_segments, damaged, read_rows
from workbench.store.snapshot import Snapshot, SpecimenFacts, found_folder, read_snapshot
from workbench.store.writer import Writer

TIPS = ("induction_tip", "field_tip", "polarization_tip")


def open_store(path: str | os.PathLike[str], at: int | None = None) -> Store:
    """Open a store.

    Parameters
    ----------
    path : str or PathLike    folder of the store
    at : int or None          number of an earlier state (index of `Store.history`), to look at only

    Raises
    ------
    StoreError                not a store, of a newer format, locked or damaged

    Examples
    --------
    >>> open_store("no such.store")
    Traceback (most recent call last):
    workbench.base.errors.StoreError: Opening the store no such.store: wanted a store, which is a folder; found \
nothing of this name. Give the folder that 'reduce' wrote, usually named like the campaign with '.store' at the end.
    """
    return Store(Path(path), at)


class Store:
    """One state of a store.  It stays as it is while others write; `refresh` shows their work.

    Numbers are read when they are first asked for and then kept.
    """

    def __init__(self, path: Path, at: int | None = None) -> None:
        insist_on_store(path)
        self.path = path
        self._earlier = at is not None
        self._arrays: tuple[tuple[int, ...], Arrays] | None = None
        self._placed: dict[tuple[str, bool], Placement] = {}
        self._load(at)

    def __repr__(self) -> str:
        counts = f"{len(self._snapshot.ids)} runs, {len(self.failures)} failures"
        return f"<Store '{self.path}': {self.title}, {counts}, state {self.revision}>"

    def _load(self, at: int | None = None) -> None:
        snapshot = read_snapshot(self.path, at)
        check_segments(self.path, snapshot.segments)
        self._snapshot: Snapshot = snapshot
        self._placed.clear()
        for kept in ("runs", "curves"):
            self.__dict__.pop(kept, None)

    def refresh(self) -> Store:
        """Show the last state of the store on disk, with what others have written; returns itself."""
        self._load()
        self._earlier = False
        return self

    @property
    def revision(self) -> int:
        """Number of the state shown; it grows with each committed change."""
        return self._snapshot.revision

    @property
    def title(self) -> str:
        """Title of the campaign."""
        return self._snapshot.title

    @property
    def sheet_text(self) -> str:
        """The campaign's sheet as it was when last reduced."""
        return self._snapshot.sheet_text

    @property
    def campaign_folder(self) -> Path:
        """Where the campaign was when last reduced, kept relative to the store; it may be gone."""
        return found_folder(self.path, self._snapshot.folder)

    @property
    def specimens(self) -> Mapping[str, SpecimenFacts]:
        """What the sheet says of each specimen, in its order: texts, factors, SI floats, NaN for nothing.

        Keys: alloy, condition, factors, material_class, primary_turns, secondary_turns, diameter_ratio,
        and each measured scalar with its ``u_``: density, thickness, resistivity, mass, ...
        """
        return self._snapshot.specimens

    @property
    def failures(self) -> pd.DataFrame:
        """Captures that could not be reduced: capture, reason, remedy."""
        return self._snapshot.failures

    @property
    def history(self) -> pd.DataFrame:
        """What happened: time (UTC), act, capture, text; the index is the number of the state."""
        return self._snapshot.history

    @cached_property
    def runs(self) -> xr.Dataset:
        """All live runs with loops, quantities, budgets; see `workbench.store.assemble.runs_dataset`."""
        return runs_dataset(self._snapshot, self._loaded())

    @cached_property
    def curves(self) -> xr.Dataset:
        """Curves of the specimens; see `workbench.store.assemble.curves_dataset`."""
        return curves_dataset(self.runs)

    def _loaded(self) -> Arrays:
        if self._arrays is None or self._arrays[0] != self._snapshot.ids:
            try:
                arrays = read_rows(self.path, self._snapshot.segment_of, self._snapshot.place_of)
            except FileNotFoundError:
                # A writer may have put small segments together since: the same rows lie elsewhere now.
                self._load(self.revision)
                try:
                    arrays = read_rows(self.path, self._snapshot.segment_of, self._snapshot.place_of)
                except FileNotFoundError as error:
                    raise damaged(Path(error.filename or self.path), "no such file") from error
            self._arrays = (self._snapshot.ids, arrays)
        return self._arrays[1]

    def pointers(self, include_set_aside: bool = False) -> PointerCube:
        """Rows of `runs` on specimen, peak, frequency, temperature: the first repeat of each loop."""
        return pointer_cube(self._place(self._snapshot.peak_name, include_set_aside))

    def cube(
        self, by: str | None = None, at: Sequence[float] | None = None, include_set_aside: bool = False
    ) -> xr.Dataset:
        """Loops on four axes, repeats averaged, holes NaN.

        Parameters
        ----------
        by : str or None            "peak_field" or "peak_induction" (None: by which the campaign was set);
                                    or a tip reached: "induction_tip", "field_tip", "polarization_tip"
        at : numbers                with a tip: where to read each ladder, T or A/m, > 0
        include_set_aside : bool    whether runs set aside count too

        Returns
        -------
        Dataset                     dims specimen, `by`, frequency, temperature (, phase for settings);
                                    alloy, condition and factors are coordinates on specimen

        Raises
        ------
        QuantityError               `by` or `at` is not as above
        """
        peak_name = self._snapshot.peak_name
        if by is None or by in PEAKS:
            if at is not None:
                raise QuantityError("'at' only together with a tip, e.g. by='induction_tip'", f"by={by!r}")
            return setting_cube(self._loaded(), self._place(by or peak_name, include_set_aside), self.specimens)
        if by not in TIPS:
            raise QuantityError(f"by as one of {', '.join((*PEAKS, *TIPS))}", f"{by!r}. {nearest(by, (*PEAKS, *TIPS))}")
        numbers = np.atleast_1d(np.asarray([] if at is None else at, float))
        if numbers.ndim != 1 or not len(numbers) or not (np.isfinite(numbers) & (numbers > 0)).all():
            raise QuantityError(f"at={by} in SI, one or more numbers above 0, e.g. [0.5, 1.0]", f"at={at!r}")
        placed = self._place(peak_name, include_set_aside)
        return reached_cube(self._loaded(), placed, self.specimens, by, numbers.tolist())

    def _place(self, peak_name: str, include_set_aside: bool) -> Placement:
        key = (peak_name, include_set_aside)
        if key not in self._placed:
            self._placed[key] = place_loops(self._snapshot.columns, peak_name, include_set_aside)
        return self._placed[key]

    def set_aside(self, capture: str, reason: str) -> None:
        """Leave a run out of cube and hand-off from now on, with a reason; the capture is not touched.

        Raises
        ------
        StoreError    no such run, no reason, an earlier state, or another process is writing
        """
        if not reason.strip():
            raise StoreError(f"Setting '{capture}' aside: wanted a reason in words; found an empty one. Say why.")
        # A command line that is not UTF-8 gives characters that no file can hold.
        self._stand(capture, SET_ASIDE, reason.strip().encode("utf-8", "backslashreplace").decode())

    def take_back(self, capture: str) -> None:
        """Take a run back that was set aside.

        Raises
        ------
        StoreError    no such run, one that is kept already, an earlier state, or another process is writing
        """
        self._stand(capture, KEPT, "")

    def _stand(self, capture: str, standing: str, reason: str) -> None:
        doing = f"Setting '{capture}' aside" if standing == SET_ASIDE else f"Taking '{capture}' back"
        if self._earlier:
            raise StoreError(
                f"{doing}: wanted the last state of {self.path}; found state {self.revision}. Open it without 'at'."
            )
        with Writer(self.path) as writer:
            # Looked up under the lock: another process may have just reduced it or taken it back.
            self._load()
            columns = self._snapshot.columns
            found = np.flatnonzero(columns["capture"] == capture)
            if not len(found):
                raise StoreError(
                    f"{doing}: wanted the capture of a run of {self.path}; found none of this name. "
                    f"{self._near(capture)}"
                )
            if standing == KEPT and columns["standing"][found[0]] == KEPT:
                raise StoreError(
                    f"{doing}: wanted a run that is set aside; found one that is kept. There is nothing to do."
                )
            with writer.change() as change:
                change.stand(capture, standing, reason)
                change.note("set aside" if standing == SET_ASIDE else "taken back", capture, reason)
        self._load()

    def _near(self, capture: str) -> str:
        failed = self.failures.loc[self.failures["capture"] == capture, "reason"]
        if len(failed):
            return f"This capture failed ({failed.iloc[0]}), so there is no run of it."
        close = difflib.get_close_matches(capture, self._snapshot.columns["capture"].tolist(), n=3)
        if close:
            return f"Did you mean {' or '.join(repr(str(each)) for each in close)}?"
        return "Write it as in runs.csv; store.runs.capture has them all."
