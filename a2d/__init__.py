"""a2d: from an analog audio equaliser to its proven digital twin."""
