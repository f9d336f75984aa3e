"""What the hardware does: H(s), from section parameters, component values or a measurement."""
