"""The opening notebook, and what is said after reducing."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import nbformat
import pytest

from workbench.base.errors import StoreError
from workbench.write.notebook import opening_notebook
from workbench.write.summary import summary


def test_notebook_names_the_store_relative_to_itself(store: Any, tmp_path: Path) -> None:
    path = opening_notebook(store, tmp_path / "ellipses.ipynb")
    book = nbformat.read(path, as_version=4)
    nbformat.validate(book)
    assert 'open_store("ellipses.store")'.replace('"', "'") in book.cells[1].source
    assert book.metadata["kernelspec"]["name"] == "python3"


def test_notebook_shows_a_still_picture_before_it_is_run(store: Any, tmp_path: Path) -> None:
    book = nbformat.read(opening_notebook(store, tmp_path / "ellipses.ipynb"), as_version=4)
    (output,) = book.cells[1].outputs
    shown = output["data"]["text/html"]
    assert '<img src="data:image/svg+xml;base64,' in shown
    assert "onerror" in shown, "the hostile name is there"
    assert "<img src=x" not in shown, "as letters only"


def test_a_name_with_quotes_is_still_python(store: Any, tmp_path: Path) -> None:
    store.path = tmp_path / "a'b\".store"
    book = nbformat.read(opening_notebook(store, tmp_path / "a.ipynb"), as_version=4)
    compile(book.cells[1].source, "cell", "exec")
    assert repr("a'b\".store") in book.cells[1].source


def test_a_notebook_is_never_overwritten(store: Any, tmp_path: Path) -> None:
    path = tmp_path / "ellipses.ipynb"
    path.write_text("mine", encoding="utf-8")
    assert opening_notebook(store, path) == path
    assert path.read_text(encoding="utf-8") == "mine"


def test_a_notebook_that_cannot_be_written_is_said(store: Any, tmp_path: Path) -> None:
    with pytest.raises(StoreError, match="No such file or directory"):
        opening_notebook(store, tmp_path / "nowhere" / "a.ipynb")


def test_summary_counts_and_names_everything(store: Any) -> None:
    lines = [f"secondary of R1: {volts} V peak is above 42.4 V peak" for volts in ("99.5", "188")]
    store.runs["cautions"] = ("run", [*lines, *[""] * 9, "secondary of R2: 61 V dc is above 60 V dc"])
    lines = summary(store)
    assert "\x1b" not in "".join(lines)
    assert lines[0].endswith(": 12 runs of 3 specimens")
    assert "peak field: 50 to 100 A/m (2 settings)" in lines
    assert "frequency: 50 to 400 Hz (2 settings)" in lines
    assert "temperature: 23 °C" in lines
    assert "set aside: 1 run" in lines
    assert any(line.startswith("  clipped: 1 run (doubt): ") for line in lines)
    assert [line for line in lines if line.startswith("caution")] == [
        "caution: secondary of R1: 188 V peak is above 42.4 V peak (2 runs)",
        "caution: secondary of R2: 61 V dc is above 60 V dc (1 run)",
    ]
    assert lines[-2:] == ["failed: 1 capture", "  captures/bad.csv: the file is empty. Record it again"]


def test_summary_of_nothing(store: Any) -> None:
    store.runs = store.runs.isel(run=slice(0))
    failed = ["failed: 1 capture", "  captures/bad.csv: the file is empty. Record it again"]
    assert summary(store)[1:] == ["marks: none", *failed]
