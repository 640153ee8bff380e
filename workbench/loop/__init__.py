"""From two voltages to H and B: circuits undone, polarity, ring applied, closure."""
