"""Tables with rules and wrapped cells, for a terminal that somebody looks at."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Console
from rich.table import Table
from rich.text import Text

from workbench.write.plain import printable


def ruled(head: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """Print a table to standard output, as wide as the terminal."""
    table = Table()
    for cell in head:
        table.add_column(Text(cell))
    for row in rows:
        # As Text, so that "[red]" in a name stays those letters.
        table.add_row(*(Text(printable(cell)) for cell in row))
    Console().print(table)
