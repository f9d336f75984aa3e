"""Plots and the report page."""
