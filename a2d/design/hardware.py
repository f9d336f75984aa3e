"""Sections given by component values: `[[section]]` with `network = ...`."""

from __future__ import annotations

from a2d.design.network import Network
from a2d.design.section import Section


class NetworkSection(Section, frozen=True, kw_only=True):
    """A section given as a network of parts."""

    network: Network


Section.by_key.update({"network": NetworkSection})
