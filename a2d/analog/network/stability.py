"""Whether a network is stable, and which op-amp is to blame when it is not."""

from __future__ import annotations

import msgspec
import numpy as np

from a2d.analog.network.parts import lay_out
from a2d.analog.network.roots import poles_of
from a2d.arrays import ComplexArray
from a2d.design.network import ControlledCurrent, ControlledVoltage, Network, OpAmp, OpAmpModel, OpAmpNodes
from a2d.design.quantities import Hertz
from a2d.errors import NetworkError

_FAST = OpAmpModel(gain_bandwidth=Hertz(1e10))  # an ideal op-amp has no right way round; a very fast one does
_ROUNDING = 1e-9  # of |pole|: a real part above this is one


def check_stability(network: Network) -> None:
    """Refuse a network with a pole in the right half-plane, ideal op-amps taken as very fast ones.

    An ideal op-amp holds its inputs equal, whichever is which; that its feedback has the right sign shows only in the
    pole that its finite speed gives rise to.

    Raises
    ------
    NetworkError
        Unstable; the message has the frequency, and the op-amp whose inputs are the wrong way round, if one is.
    """
    active = any(isinstance(part, (OpAmp, ControlledVoltage, ControlledCurrent)) for part in network.parts.values())
    worst = growing_pole(network) if active else None
    if worst is None:
        return
    culprit = next((name for name in _op_amps(network) if growing_pole(_swapped(network, name)) is None), None)
    why = "look for feedback of the wrong sign or too much of it"
    if culprit is not None:
        why = f'op-amp "{culprit}" has its inputs the wrong way round, plus where minus belongs'
    raise NetworkError(
        f"the network is unstable: a pole in the right half-plane at {abs(worst) / (2 * np.pi):.4g} Hz ({why})"
    )


def growing_pole(network: Network) -> complex | None:
    """The pole furthest into the right half-plane, relative to its size; None when there is none."""
    layout = lay_out(_quickened(network))
    poles: ComplexArray = poles_of(layout.pencil(np.array(layout.nominal)))
    poles = poles[poles.real > _ROUNDING * np.abs(poles)]
    return complex(poles[np.argmax(poles.real / np.abs(poles))]) if len(poles) else None


def _op_amps(network: Network) -> list[str]:
    return [name for name, part in network.parts.items() if isinstance(part, OpAmp)]


def _quickened(network: Network) -> Network:
    parts = {
        name: msgspec.structs.replace(part, opamp=_FAST) if isinstance(part, OpAmp) and part.opamp == "ideal" else part
        for name, part in network.parts.items()
    }
    return msgspec.structs.replace(network, parts=parts)


def _swapped(network: Network, name: str) -> Network:
    part = network.parts[name]
    assert isinstance(part, OpAmp)
    nodes = OpAmpNodes(plus=part.nodes.minus, minus=part.nodes.plus, out=part.nodes.out)
    return msgspec.structs.replace(network, parts={**network.parts, name: msgspec.structs.replace(part, nodes=nodes)})
