"""From analog sections to their digital twins, one file a method."""
