"""Signals, rendering, level matching, comparison by ear, measurement."""
