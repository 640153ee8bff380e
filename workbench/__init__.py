"""Evaluate magnetic alloys by the B-H loops of ring specimens.

The map, in the order in which data flow; a folder imports only from those above it:

- ``base``        what is true before any measurement: words, constants, quantities from text, errors
- ``bench``       the measuring bench: specimens, circuits, cautions, the forward model
- ``capture``     what came from the bench: sheet, run list, readers, records
- ``cycle``       waveform: whole cycles onto the phase grid, and their scatter
- ``loop``        H and B on phase: circuit undone, ring applied, polarity
- ``quantities``  numbers with uncertainty, marks, the reduction of one run
- ``store``       runs, curves and cube on disk; a campaign reduced into it
- ``theory``      why: laws that the runs of a store are held against
- ``views``       what one sees: selection, derived arrays, figures, widgets
- ``write``       what leaves the bench: hand-off folder, tables, notebooks
- ``cli``         the command line

Examples
--------
>>> import workbench
>>> sorted(set(workbench.__all__) - set(dir(workbench)))
[]
"""

from __future__ import annotations

import importlib
from importlib.metadata import version
from typing import TYPE_CHECKING, Any

from workbench.base.errors import (
    CaptureError,
    Finding,
    HandoffError,
    LoopError,
    QuantityError,
    SheetError,
    StoreError,
    WorkbenchError,
)

if TYPE_CHECKING:
    from workbench.capture.read import read_campaign
    from workbench.store.open import open_store
    from workbench.store.reduce import reduce
    from workbench.views.widgets.workbench import Workbench
    from workbench.write.trace_back import trace_back

__version__ = version("bh-loop-workbench")
__all__ = [
    "CaptureError",
    "Finding",
    "HandoffError",
    "LoopError",
    "QuantityError",
    "SheetError",
    "StoreError",
    "Workbench",
    "WorkbenchError",
    "open_store",
    "read_campaign",
    "reduce",
    "trace_back",
]

# Loaded when first asked for: the command line would otherwise wait a second for arrays and
# widgets before it could print its help.
_LATER = {
    "read_campaign": "workbench.capture.read",
    "reduce": "workbench.store.reduce",
    "open_store": "workbench.store.open",
    "trace_back": "workbench.write.trace_back",
    "Workbench": "workbench.views.widgets.workbench",
}


def __getattr__(name: str) -> Any:
    if name not in _LATER:
        raise AttributeError(f"workbench has no {name!r}; it has {', '.join(__all__)}")
    value = getattr(importlib.import_module(_LATER[name]), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
