"""The only place for ipywidgets and bqplot: one file a pane, and no arithmetic."""
