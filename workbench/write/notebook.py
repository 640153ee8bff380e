"""The notebook that opens a store."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

import nbformat

from workbench.base.errors import StoreError
from workbench.store.open import Store
from workbench.views.derived.index import run_index
from workbench.views.derived.overview import overview
from workbench.views.derived.page import page
from workbench.views.derived.settle import start
from workbench.views.figures import fallback

_BEFORE = "Click the next cell and press **Shift+Enter** for the workbench; until then it shows a still picture."
_OPEN = """\
import workbench

store = workbench.open_store({name!r})
workbench.Workbench(store)"""
_AFTER = """\
`store.runs` and `store.cube()` are xarray Datasets of the same figures, `store.failures` lists the captures that could
not be used, `store.history` what was set aside and why. This notebook is yours: it is never overwritten."""
KERNEL = {
    "kernelspec": {"name": "python3", "display_name": "Python 3 (ipykernel)", "language": "python"},
    "language_info": {"name": "python"},
}
"""Metadata of a notebook that runs on the kernel of its own environment."""


def notebook_of(*cells: tuple[str, str]) -> Any:
    """A notebook of (kind, source) cells, kind "markdown" or "code", with ids that stay the same."""
    book = nbformat.v4.new_notebook(metadata=KERNEL)
    for number, (kind, source) in enumerate(cells, start=1):
        new_cell = nbformat.v4.new_markdown_cell if kind == "markdown" else nbformat.v4.new_code_cell
        book.cells.append(new_cell(source, id=f"cell-{number}"))
    return book


def opening_notebook(store: Store, path: str | os.PathLike[str]) -> Path:
    """Write the notebook that opens `store`, unless there is one already.

    Parameters
    ----------
    path : where the notebook stands; the store is named relative to it, so that both can move together

    Raises
    ------
    StoreError    the notebook cannot be written
    """
    where = Path(path)
    name = os.path.relpath(Path(store.path).resolve(), where.resolve().parent)
    if where.exists():
        return where
    opening = _OPEN.format(name=Path(name).as_posix())
    # Only one line stands before the cell: the workbench is to fit the first screen.
    book = notebook_of(("markdown", _BEFORE), ("code", opening), ("markdown", _AFTER))
    book.cells[1].outputs = _still_picture(store)
    try:
        # "x", although there was none a moment ago: two starts at once must not overwrite each other's.
        with where.open("x", encoding="utf-8") as file:
            nbformat.write(book, file)
    except FileExistsError:
        pass
    except OSError as error:
        raise StoreError(
            f"Writing the notebook {where}: {error.strerror}. Reduce into a folder where you may write (--into)."
        ) from error
    return where


def _still_picture(store: Store) -> list[Any]:
    # As the cell's own output, so that the workbench takes its place when the cell is run.
    index = run_index(store)
    choice = start(index)
    if not choice.specimens:
        return []
    html = fallback(page(index, choice), overview(store, index))
    plain = "The workbench; this is a still picture."
    return [nbformat.v4.new_output("display_data", {"text/html": html, "text/plain": plain})]
