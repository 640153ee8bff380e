"""What came from the bench: sheet and run list, readers, records and checks on them."""
