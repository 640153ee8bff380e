"""Why: Rayleigh region, approach to saturation, thick rings, sheets (reads a store, adds nothing to it)."""
