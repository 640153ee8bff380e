"""Lines of equal loss against a closed form."""

from dataclasses import replace

import numpy as np

from workbench.views.derived.contours import equal_lines
from workbench.views.derived.lossmap import loss_map
from workbench.views.derived.settle import start


def test_lines_of_a_power_law_are_straight_in_the_logarithm():
    """P = f**1.5 * B**2 is a plane in log-log: between runs the line lies on it exactly (closed form)."""
    f, b = np.meshgrid([50.0, 100.0, 400.0, 1000.0], [0.1, 0.3, 1.0], indexing="ij")
    b = b * (1 - 0.05 * np.log10(f / 50))  # no rectangular grid
    lines = equal_lines(f, b, f**1.5 * b**2)
    assert len(lines.texts) >= 3
    for x, y, text in zip(lines.x, lines.y, lines.texts, strict=True):
        level = float(text.replace(" ", "").replace("10\u2074", "1e4").replace("10\u2075", "1e5"))
        assert np.allclose(x**1.5 * y**2, level, rtol=1e-9)


def test_no_line_where_there_is_no_figure():
    f, b = np.meshgrid([50.0, 100.0, 400.0, 1000.0], [0.1, 0.3, 1.0], indexing="ij")
    values = f * b**2
    values[2:] = np.nan
    lines = equal_lines(f, b, values)
    assert lines.texts
    assert max(x.max() for x in lines.x) <= 100.0 * (1 + 1e-9)
    assert equal_lines(f, b, np.full_like(f, np.nan)).texts == ()
    assert equal_lines(f[:1], b[:1], b[:1]).texts == ()


def test_only_losses_have_lines(index):
    choice = start(index)
    assert loss_map(index, choice).lines.texts
    assert loss_map(index, replace(choice, quantity="coercivity")).lines.texts == ()
