"""Number formats, rounding, section order and scaling, noise, bit-true simulation."""
