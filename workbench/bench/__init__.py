"""The measuring bench: specimens, circuits, cautions, and the forward model from loop to volts."""
