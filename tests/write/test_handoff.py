"""The hand-off folder: whole or not there, opened by plain xarray, executed, and its text harmless."""

from __future__ import annotations

import hashlib
import json
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import nbformat
import numpy as np
import pytest
import xarray as xr

from workbench.base.errors import HandoffError
from workbench.write import handoff
from workbench.write.handoff import hand_off
from workbench.write.handoff_notebook import handoff_notebook
from workbench.write.verify import verify


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """One hand-off for the tests that only look at it: its notebook takes seconds to execute."""
    from importlib.util import module_from_spec, spec_from_file_location

    spec = spec_from_file_location("ellipses", Path(__file__).parent / "conftest.py")
    assert spec is not None
    assert spec.loader is not None
    module = module_from_spec(spec)
    sys.modules["ellipses"] = module
    spec.loader.exec_module(module)
    place = tmp_path_factory.mktemp("handed over")
    return hand_off(module.EllipseStore(place / "ellipses.store"), place / "for a colleague", frequency=400)


@pytest.fixture
def unexecuted(monkeypatch: pytest.MonkeyPatch) -> None:
    """Leave the notebook's execution out where it is not what is tested."""
    monkeypatch.setattr(handoff.NotebookClient, "execute", lambda self: None)


def test_folder_is_whole_and_as_its_list_says(folder: Path) -> None:
    names = {"SHA256SUMS", "campaign.toml", "hand-off.ipynb", "runs.nc", "versions.txt"}
    assert {each.name for each in folder.iterdir()} == names
    assert verify(folder) == []
    assert [each.name for each in folder.parent.iterdir()] == [folder.name], "something was left beside it"


def test_slice_is_what_was_asked_for_and_names_its_source(folder: Path, hostile: str) -> None:
    runs = xr.load_dataset(folder / "runs.nc")
    assert set(runs.frequency.values) == {400.0}
    assert set(runs.standing.values) == {"kept"}
    assert runs.attrs["Conventions"] == "CF-1.10"
    assert runs.attrs["selection"] == "frequency 400 Hz"
    assert runs.attrs["title"] == hostile
    assert "ellipses.store, revision 3" in runs.attrs["history"]
    assert runs.attrs["left_out"] == "1 runs set aside in the whole store, 1 captures that failed"
    assert runs.attrs["sheet_sha256"] == hashlib.sha256((folder / "campaign.toml").read_bytes()).hexdigest()
    assert set(runs.capture_sha256.values) == {"0" * 64}


def test_notebook_ran_and_shows_figures(folder: Path) -> None:
    book = nbformat.read(folder / "hand-off.ipynb", as_version=4)
    code = [cell for cell in book.cells if cell.cell_type == "code"]
    assert all(cell.execution_count for cell in code)
    outputs = [output for cell in code for output in cell.outputs]
    assert not [output for output in outputs if output.output_type == "error"]
    assert sum("image/png" in output.get("data", {}) for output in outputs) == 2
    text = "".join(output.get("text", "") for output in outputs)
    assert "loss_per_cycle of 5 loops follows from the loops" in text
    assert "1.200 ± 0.024" in text  # B̂ = 1.2 T with u = 1 %, k = 2


def test_text_of_a_sheet_is_data_in_the_notebook(folder: Path, hostile: str) -> None:
    book = nbformat.read(folder / "hand-off.ipynb", as_version=4)
    assert not [cell for cell in book.cells if "onerror" in cell.source]
    assert hostile.split("\x1b")[0] in json.dumps(book, ensure_ascii=False)
    for cell in book.cells:
        for output in cell.get("outputs", []):
            assert "onerror" not in str(output.get("data", {}).get("text/html", ""))


def test_nothing_of_the_machine_is_handed_over(folder: Path) -> None:
    for name in ("hand-off.ipynb", "versions.txt", "SHA256SUMS"):
        assert not re.search(str(folder.parent.parent), (folder / name).read_text(encoding="utf-8"))
    assert str(folder.parent).encode() not in (folder / "runs.nc").read_bytes()


def test_it_needs_nothing_of_this_project(folder: Path) -> None:
    book = handoff_notebook()
    source = "\n".join(cell.source for cell in book.cells if cell.cell_type == "code").replace("%matplotlib inline", "")
    program = "import sys, matplotlib; matplotlib.use('Agg'); sys.modules['workbench'] = None\n" + source
    subprocess.run([sys.executable, "-c", program], cwd=folder, check=True, capture_output=True)


def test_a_figure_that_does_not_follow_from_its_loop_is_found(folder: Path, tmp_path: Path) -> None:
    """The notebook's own check can fail: it is run on a slice with one wrong loss."""
    runs = xr.load_dataset(folder / "runs.nc")
    runs["loss_per_cycle"][0] *= 1.1
    source = next(cell.source for cell in handoff_notebook().cells if "follows from the loops" in cell.source)
    scope: dict[str, Any] = {"runs": runs, "np": np}
    with pytest.raises(AssertionError, match="loss_per_cycle does not follow"):
        exec(source, scope)


@pytest.mark.parametrize("kind", ["air", "initial"])
def test_runs_without_a_closed_loop_are_handed_over_too(store: Any, tmp_path: Path, kind: str) -> None:
    store.runs["kind"] = ("run", [kind] * store.runs.sizes["run"])
    for name in ("field_tip", "induction_tip", "loss_per_cycle"):
        store.runs[name][:] = np.nan
    folder = hand_off(store, tmp_path / "out")
    assert set(xr.load_dataset(folder / "runs.nc").kind.values) == {kind}


def test_an_empty_folder_may_be_there_and_parents_are_made(unexecuted: None, store: Any, tmp_path: Path) -> None:
    (tmp_path / "a").mkdir()
    hand_off(store, tmp_path / "a", specimen="R1")
    hand_off(store, tmp_path / "b" / "c", specimen=["R1", "R2"], peak_field=50.0, temperature=[23.0])
    assert verify(tmp_path / "a") == verify(tmp_path / "b" / "c") == []


def test_nothing_is_overwritten(store: Any, tmp_path: Path) -> None:
    (tmp_path / "taken").mkdir()
    (tmp_path / "taken" / "notes.txt").write_text("mine", encoding="utf-8")
    (tmp_path / "file").touch()
    (tmp_path / "link").symlink_to(tmp_path / "nowhere")
    for name in ("taken", "file", "link"):
        with pytest.raises(HandoffError, match="nothing is overwritten"):
            hand_off(store, tmp_path / name)
    assert (tmp_path / "taken" / "notes.txt").read_text(encoding="utf-8") == "mine"


def test_what_fails_half_way_leaves_nothing(store: Any, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(*arguments: Any) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(handoff, "write_runs", full)
    with pytest.raises(HandoffError, match="No space left"):
        hand_off(store, tmp_path / "out")
    assert list(tmp_path.iterdir()) == []


def test_a_notebook_that_fails_leaves_nothing(store: Any, tmp_path: Path) -> None:
    store.runs["loss_per_cycle"][0] *= 2
    with pytest.raises(HandoffError, match="loss_per_cycle does not follow from the loops"):
        hand_off(store, tmp_path / "out")
    assert list(tmp_path.iterdir()) == []
