"""Networks made from others: other op-amps, a source, a load."""

from __future__ import annotations

from typing import Literal

import msgspec

from a2d.design.network import Input, Network, OpAmp, OpAmpModel, Output
from a2d.design.quantities import Ohm, OhmOrZero


def with_op_amps(network: Network, model: OpAmpModel | Literal["ideal"]) -> Network:
    """The network with every op-amp of the kind `model`."""
    parts = {
        name: msgspec.structs.replace(part, opamp=model) if isinstance(part, OpAmp) else part
        for name, part in network.parts.items()
    }
    return msgspec.structs.replace(network, parts=parts)


def with_ends(network: Network, source: float | None, load: float | None) -> Network:
    """The network with a source resistance and a load in Ω; None leaves what is there."""
    entry, exit_ = network.entry, network.exit
    if source is not None:
        entry = Input(node=entry.node, source=OhmOrZero(source))
    if load is not None:
        exit_ = Output(node=exit_.node, minus=exit_.minus, load=Ohm(load))
    return msgspec.structs.replace(network, input=entry, output=exit_)


def without_ends(network: Network, source: bool = False, load: bool = False) -> Network:
    """The network driven by an ideal source, without its load, or both."""
    entry = Input(node=network.entry.node) if source else network.entry
    exit_ = Output(node=network.exit.node, minus=network.exit.minus) if load else network.exit
    return msgspec.structs.replace(network, input=entry, output=exit_)
