"""From samples to one cycle: fundamental, whole cycles on the phase grid, scatter."""
