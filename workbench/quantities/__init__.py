"""Numbers with uncertainty, one topic a file; marks; the reduction of one run."""
