"""Discrete against analog: errors, limits, verdict."""
