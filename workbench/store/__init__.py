"""Runs, cube and curves on disk: schema, write, open, history, set aside."""
