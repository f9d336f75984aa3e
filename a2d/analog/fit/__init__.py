"""A measured response to analog sections: reading it, searching for the sections, writing them as a design file."""
