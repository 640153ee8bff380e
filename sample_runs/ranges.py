"""Input ranges of the invented recorders: steps of 1, 2, 5."""

import math


def smallest_range(peak: float, steps: tuple[float, ...] = (1.0, 2.0, 5.0), lowest: float = 1e-3) -> float:
    """The smallest full scale of 1, 2 or 5 times a power of ten that leaves a tenth above `peak`, V."""
    wanted = max(1.1 * peak, lowest)
    decade = 10.0 ** math.floor(math.log10(wanted))
    # Times ten last: a peak of 0.7 needs the 1 of the next decade.
    return next(step * decade for step in (*steps, 10.0) if step * decade >= wanted)
