"""Tables of published standards that limits are taken from, one file a standard."""
