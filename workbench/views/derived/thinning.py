"""A loop thinned for the screen: figures are computed on all points, pictures drawn from few."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

DISPLAY_POINTS = 160
Drawn = npt.NDArray[np.float32]


def thinned(field: npt.ArrayLike, induction: npt.ArrayLike, count: int = DISPLAY_POINTS) -> tuple[Drawn, Drawn]:
    """A closed loop of at most ``count`` points, evenly spaced along the drawn line.

    Parameters
    ----------
    field, induction : array, dims (phase)    one cycle, not closed

    Returns
    -------
    two arrays, dims (count,)    samples of the loop: the extremes and the samples on both sides of
                                 each zero crossing among them; the first is repeated at the end

    Examples
    --------
    >>> phase = np.arange(512) * 2 * np.pi / 512
    >>> h, b = thinned(100 * np.cos(phase), np.sin(phase))
    >>> len(h), float(h.max()), bool(h[0] == h[-1])
    (160, 100.0, True)
    """
    h, b = np.asarray(field, float), np.asarray(induction, float)
    if len(h) < count:
        places = np.arange(len(h))
    else:
        must = np.concatenate([[h.argmax(), h.argmin(), b.argmax(), b.argmin()], _crossings(h), _crossings(b)])
        must = np.unique(must)[: count // 2]
        steps = np.hypot(np.diff(h) / (np.ptp(h) or 1.0), np.diff(b) / (np.ptp(b) or 1.0))
        run = np.concatenate([[0.0], np.cumsum(steps)])
        even = np.searchsorted(run, np.linspace(0.0, run[-1], count - 1 - len(must), endpoint=False))
        places = np.unique(np.concatenate([must, np.minimum(even, len(h) - 1)]))
    places = np.append(places, places[0])
    # Equal lengths, so that a family is one array: the closing point is repeated.
    places = np.pad(places, (0, max(0, count - len(places))), mode="edge")
    return h[places].astype(np.float32), b[places].astype(np.float32)


def _crossings(values: npt.NDArray[np.float64]) -> npt.NDArray[np.intp]:
    before = np.flatnonzero(np.signbit(values) != np.signbit(np.roll(values, -1)))
    return np.concatenate([before, (before + 1) % len(values)])
