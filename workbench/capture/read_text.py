"""Text captures: CSV with any of the usual separators, decimal signs, preambles and encodings."""

from __future__ import annotations

import io
import math
from collections.abc import Iterator

import numpy as np
import pandas as pd

from workbench.base.errors import CaptureError
from workbench.capture.campaign import Columns
from workbench.capture.files import Location, read_bytes
from workbench.capture.formats import Column, Floats, Raw, choose, no_time_base, reader, smallest_step
from workbench.capture.layout import Layout, look
from workbench.capture.preamble import rate_in
from workbench.capture.text import COMMENTS, decode, is_remark, plain_number, printed_digit, split_cells, split_lines

_LOOKED_AT = 40
_REPEAT = "Repeat the export, or correct the file's copy in the campaign folder."


@reader(".csv", ".txt", ".tsv")
def read_text(location: Location, columns: Columns, wants_time: bool) -> Raw:
    """Read a text capture.

    Parameters
    ----------
    location : Location    the file
    columns : Columns      which column is what
    wants_time : bool      whether a time base is needed

    Raises
    ------
    CaptureError           anything that is not rows of numbers under a header
    """
    text = decode(read_bytes(location))
    if text is None:
        reason = f"'{location.path.name}' is no text (bytes that are no character in UTF-8, UTF-16 or Latin-1)"
        raise CaptureError(reason, "Export the capture as CSV again.")
    layout = look(text, columns)
    names = list(layout.names)
    places = {role: choose(role, getattr(columns, role), names) for role in ("time", "field", "induction")}
    needed = {role: at for role, at in places.items() if at is not None and (wants_time or role != "time")}
    rate = math.nan
    if wants_time and "time" not in needed and math.isnan(columns.sample_rate):
        rate = rate_in(layout.preamble, layout.separator)
        if math.isnan(rate):
            raise no_time_base(names)
    body = _Body(text[layout.start :], layout, sorted(needed.values()))
    parsed = body.numbers()
    made = {role: body.column(at, parsed[at], role == "time") for role, at in needed.items()}
    return Raw(made["field"], made["induction"], made.get("time"), rate, body.where)


class _Body:
    """The rows of numbers of one text."""

    def __init__(self, text: str, layout: Layout, needed: list[int]) -> None:
        self.text = text
        self.layout = layout
        self.needed = needed

    def numbers(self) -> dict[int, Floats]:
        """The needed columns as floats, by the C parser with everything explicit."""
        text = self.text
        if any(mark in text for mark in COMMENTS):
            text = "\n".join(line for line in split_lines(text) if not is_remark(line))
        try:
            frame = pd.read_csv(
                io.BytesIO(text.encode("utf-8")), sep=self.layout.separator, decimal=self.layout.decimal, header=None,
                dtype=dict.fromkeys(self.needed, np.float64), engine="c", encoding="utf-8", skipinitialspace=True,
                low_memory=False,
            )  # fmt: skip
        except (ValueError, OverflowError) as error:
            raise self._diagnosis(str(error)) from error
        beyond = frame.iloc[:, len(self.layout.names) :]
        if beyond.notna().any(axis=None) or frame.shape[1] <= max(self.needed):
            raise self._diagnosis("a number of cells that is not the header's")
        parsed: dict[int, Floats] = {at: frame[at].to_numpy() for at in self.needed}
        if not all(np.isfinite(values).all() for values in parsed.values()):
            raise self._diagnosis("a cell that is no finite number")
        return parsed

    def rows(self) -> Iterator[tuple[int, tuple[str, ...]]]:
        """Line number and cells of each row, the slow way: for messages."""
        for number, line in enumerate(split_lines(self.text), self.layout.first_line):
            if not is_remark(line):
                yield number, split_cells(line, self.layout.separator)

    def where(self, sample: int) -> str:
        """The line of a sample."""
        for at, (number, _) in enumerate(self.rows()):
            if at == sample:
                return f"line {number}"
        return f"sample {sample}"

    def column(self, at: int, values: Floats, is_time: bool) -> Column:
        """One column with its unit and the smallest step it can hold."""
        sizes = np.abs(values)
        if is_time:
            # Printed with some significant digits, late times are coarser than early ones.
            step = max(self._digit(at, 0.0), self._digit(at, 1.0), float(np.spacing(sizes.max())))
        else:
            # Likewise for a wave: the digit that counts is that of its tips.
            step = max(self._digit(at, float(sizes.argmax()) / len(sizes)), smallest_step(values))
        return Column(self.layout.names[at], values, self.layout.units[at], step)

    def _digit(self, at: int, part: float) -> float:
        """Finest printed digit among some rows at a part of the way through the text."""
        size = 50 * _LOOKED_AT
        middle = int(part * len(self.text))
        piece = self.text[max(0, min(middle, len(self.text) - size) - size) : middle + size]
        # The piece may begin or end inside a line: its outermost lines are left out.
        lines = split_lines(piece)[1:-1] or split_lines(piece)
        skip = max(0, (len(lines) - _LOOKED_AT) // 2)
        rows = [split_cells(line, self.layout.separator) for line in lines[skip : skip + _LOOKED_AT]]
        digits = [printed_digit(row[at], self.layout.decimal) for row in rows if len(row) > at]
        return min((digit for digit in digits if digit), default=0.0)

    def _diagnosis(self, otherwise: str) -> CaptureError:
        """The first row that cannot be used, and why."""
        names, decimal = self.layout.names, self.layout.decimal
        for number, cells in self.rows():
            extra = [cell for cell in cells[len(names) :] if cell]
            if len(cells) < len(names) or extra:
                reason = f"line {number} has {len(cells)} cells; wanted {len(names)}, as the header has"
                return CaptureError(reason, _REPEAT)
            for at in self.needed:
                value = plain_number(cells[at], decimal)
                if value is None or not math.isfinite(value):
                    found = f"'{cells[at][:40]}'" if cells[at] else "a blank cell"
                    reason = f"line {number}, column '{names[at]}': found {found}; wanted a finite number"
                    return CaptureError(reason, _REPEAT)
        return CaptureError(f"the rows cannot be read as numbers ({otherwise})", _REPEAT)
