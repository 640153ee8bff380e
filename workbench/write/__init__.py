"""What leaves the bench: hand-off folder, tables, the opening notebook."""
