"""Closing a tree of widgets to its last model, and the workbench that a cell showed before."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any
from weakref import WeakValueDictionary

import ipywidgets
from IPython import get_ipython

_SHOWN: WeakValueDictionary[tuple[str, str], ipywidgets.Widget] = WeakValueDictionary()


def close_tree(root: ipywidgets.Widget) -> None:
    """Close a widget and every widget it holds: children, layers, axes, scales, layouts and styles.

    ``VBox.close`` alone closes one model and leaves the others in kernel and browser.
    """
    for widget in list(_tree(root, set())):
        ipywidgets.Widget.close(widget)


def _tree(value: Any, seen: set[int]) -> Iterator[ipywidgets.Widget]:
    if isinstance(value, ipywidgets.Widget):
        if id(value) in seen:
            return
        seen.add(id(value))
        for name in value.keys:
            yield from _tree(getattr(value, name, None), seen)
        yield value
    elif isinstance(value, dict):
        for each in value.values():
            yield from _tree(each, seen)
    elif isinstance(value, list | tuple):
        for each in value:
            yield from _tree(each, seen)


def take_over_cell(path: str, widget: Any) -> None:
    """Close the workbench on the same store that the running notebook cell has shown before.

    Outside a notebook front end that names its cells nothing is closed: two workbenches on one
    store may be wanted.
    """
    cell = _running_cell()
    if not cell:
        return
    before = _SHOWN.get((path, cell))
    if before is not None:
        before.close()
    _SHOWN[path, cell] = widget


def _running_cell() -> str:
    shell = get_ipython()
    parent = getattr(shell, "parent_header", None) if shell is not None else None
    request = shell.get_parent() if parent is not None and hasattr(shell, "get_parent") else {}
    return str(request.get("metadata", {}).get("cellId", ""))
