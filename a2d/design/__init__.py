"""What may stand in a design file, and reading it."""
