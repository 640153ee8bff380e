"""One capture as read: immutable arrays, their units, where they came from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt


@dataclass(frozen=True, eq=False)
class Record:
    """Two channels on one even time base (or none, for a trace), in recorded units."""

    field: npt.NDArray[np.float64]
    """(sample,) in `field_unit`, integer samples already turned by their scale and offset."""
    induction: npt.NDArray[np.float64]
    """(sample,) in `induction_unit`."""
    field_unit: str
    """"V", "div", "A" or "A/m"."""
    induction_unit: str
    """"V", "div", "Wb" or "T"."""
    sample_rate: float
    """Hz; NaN where there is no time base (kind `trace`)."""
    sha256: str
    """Of the whole file."""
    field_step: float = 0.0
    """Smallest step the file can hold (one code, one printed digit), recorded unit; 0 unknown."""
    induction_step: float = 0.0

    def __len__(self) -> int:
        return len(self.field)
