"""What is wrong with a network as drawn, told by the names of its nodes and parts before anything is solved."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator

import numpy as np

from a2d.analog.network.taper import track_fraction
from a2d.design.network import (
    GROUND,
    Capacitor,
    ControlledCurrent,
    ControlledVoltage,
    Inductor,
    Network,
    OpAmp,
    OpAmpModel,
    Part,
    Potentiometer,
    Resistor,
    Switch,
    Transformer,
)

Edge = tuple[str, str]


def faults(network: Network) -> tuple[str, ...]:
    """Every fault of the drawing, in words; empty when the network can be solved as far as its drawing goes."""
    checks = (_names, _ends, _shorted_parts, _lonely_nodes, _floating_nodes, _source_loops, _open_op_amps)
    found = [text for check in checks for text in check(network)]
    return tuple(found) if found else tuple(_unreached(network))


def _names(network: Network) -> Iterator[str]:
    for reserved in ("source", "load"):
        if reserved in network.parts:
            yield f"the part \"{reserved}\" has a reserved name (the input's and output's own; allowed any other)"
    lowered = Counter(name.lower() for name in network.parts)
    for name in network.parts:
        if lowered[name.lower()] > 1:
            yield f'the name of part "{name}" is there twice but for capitals (allowed each once)'


def _ends(network: Network) -> Iterator[str]:
    nodes = {node for part in network.parts.values() for node in part.terminals()} | {GROUND}
    for what, node in (("input", network.entry.node), ("output", network.exit.node), ("output", network.exit.minus)):
        if node not in nodes:
            yield f'the {what} "{node}" is not a node of any part'
    if network.entry.node == GROUND:
        yield f'the input is "{GROUND}" itself (allowed any other node)'
    if network.exit.node == network.exit.minus:
        yield f'the output is between "{network.exit.node}" and itself (allowed two nodes)'


def _shorted_parts(network: Network) -> Iterator[str]:
    """Parts that their own connections leave without effect, or without a solution."""
    for name, part in network.parts.items():
        if isinstance(part, (Resistor, Capacitor, Inductor, Switch)) and part.nodes[0] == part.nodes[1]:
            yield f'part "{name}" has both of its ends at node "{part.nodes[0]}"'
        elif isinstance(part, Transformer):
            for a, b in (part.nodes[:2], part.nodes[2:]):
                if a == b:
                    yield f'transformer "{name}" has both ends of a winding at node "{a}"'
        elif isinstance(part, ControlledVoltage) and part.nodes.out == part.nodes.back:
            yield f'part "{name}" has both of its ends at node "{part.nodes.out}"'
        elif isinstance(part, OpAmp) and part.nodes.plus == part.nodes.minus:
            yield f'op-amp "{name}" has both of its inputs at node "{part.nodes.plus}"'
        elif isinstance(part, OpAmp) and part.nodes.out == GROUND:
            yield f'op-amp "{name}" has its output at "{GROUND}"'


def _lonely_nodes(network: Network) -> Iterator[str]:
    """A node that only one terminal touches carries no current and says that something was left out."""
    where = [(node, name) for name, part in network.parts.items() for node in part.terminals()]
    touched = Counter(node for node, _ in where)
    used = {GROUND, network.entry.node, network.exit.node, network.exit.minus}
    for node, name in where:
        if touched[node] == 1 and node not in used:
            yield f'node "{node}" has one connection only (part "{name}"; a second one is missing)'


def _floating_nodes(network: Network) -> Iterator[str]:
    """Nodes that no part holds to ground."""
    held = _Groups()
    held.join(network.entry.node, GROUND)
    if network.exit.load is not None:
        held.join(network.exit.node, network.exit.minus)
    for part in network.parts.values():
        for a, b in _conducting(part):
            held.join(a, b)
    nodes = dict.fromkeys(node for part in network.parts.values() for node in part.terminals())
    for node in nodes:
        if not held.together(node, GROUND):
            yield f'node "{node}" has no path to "{GROUND}"'


def _conducting(part: Part) -> Iterator[Edge]:
    """The pairs of nodes between which current can flow."""
    if isinstance(part, (Resistor, Capacitor, Inductor)):
        yield part.nodes
    elif isinstance(part, Potentiometer):
        yield from (part.nodes[:2], part.nodes[1:])
    elif isinstance(part, Switch) and part.switch == "closed":
        yield part.nodes
    elif isinstance(part, OpAmp):
        yield (part.nodes.out, GROUND)
    elif isinstance(part, ControlledVoltage):
        yield (part.nodes.out, part.nodes.back)
    elif isinstance(part, Transformer):
        yield from (part.nodes[:2], part.nodes[2:])


def _source_loops(network: Network) -> Iterator[str]:
    """Branches that fix a voltage must not close a loop; a loop with the input in it is a short across it."""
    fixed = _Groups()
    if network.entry.source == 0.0:
        fixed.join(network.entry.node, GROUND)
    for name, part in network.parts.items():
        for a, b in _fixing(part):
            if a == b:
                continue  # told by itself, or the tied side of a potentiometer
            if not fixed.together(a, b):
                fixed.join(a, b)
            elif {a, b} == {network.entry.node, GROUND} and network.entry.source == 0.0:
                yield f'part "{name}" is a short across the input "{network.entry.node}"'
            else:
                yield f'part "{name}" closes a loop of voltage sources and shorts between "{a}" and "{b}"'


def _fixing(part: Part) -> Iterator[Edge]:
    """The pairs of nodes whose voltage the part fixes, whatever current flows."""
    if isinstance(part, Switch) and part.switch == "closed" and part.resistance == 0.0:
        yield part.nodes
    elif isinstance(part, OpAmp) and (part.opamp == "ideal" or _stiff(part.opamp)):
        yield (part.nodes.out, GROUND)
    elif isinstance(part, ControlledVoltage):
        yield (part.nodes.out, part.nodes.back)
    elif isinstance(part, Potentiometer) and part.end_resistance == 0.0:
        fraction = float(track_fraction(part, np.asarray(part.position)))
        yield from [side for side, share in ((part.nodes[:2], fraction), (part.nodes[1:], 1.0 - fraction)) if not share]


def _stiff(model: object) -> bool:
    return isinstance(model, OpAmpModel) and model.output_resistance == 0.0


def _open_op_amps(network: Network) -> Iterator[str]:
    """An op-amp whose output reaches neither of its inputs has no feedback."""
    flow = _flow(network)
    for name, part in network.parts.items():
        if isinstance(part, OpAmp):
            reached = _reachable(flow, [part.nodes.out])
            if part.nodes.plus not in reached and part.nodes.minus not in reached:
                yield f'op-amp "{name}" has no feedback: nothing leads from "{part.nodes.out}" to its inputs'


def _unreached(network: Network) -> Iterator[str]:
    reached = _reachable(_flow(network), [network.entry.node])
    if network.exit.node not in reached and network.exit.minus not in reached:
        yield f'the input "{network.entry.node}" cannot reach the output "{network.exit.node}"'


def _flow(network: Network) -> dict[str, set[str]]:
    """Which node's voltage acts on which; nothing acts on ground or on the node of a stiff source."""
    stiff = {GROUND}
    if network.entry.source == 0.0:
        stiff.add(network.entry.node)
    flow: dict[str, set[str]] = {}
    for part in network.parts.values():
        for a, b in _acting(part):
            if b not in stiff and a != GROUND:
                flow.setdefault(a, set()).add(b)
    return flow


def _acting(part: Part) -> Iterator[Edge]:
    """The pairs of nodes the first of which acts on the second."""
    if isinstance(part, OpAmp):
        yield from ((part.nodes.plus, part.nodes.out), (part.nodes.minus, part.nodes.out))
    elif isinstance(part, (ControlledVoltage, ControlledCurrent)):
        n = part.nodes
        yield from ((c, o) for c in (n.plus, n.minus) for o in (n.out, n.back))
    elif isinstance(part, Transformer):
        yield from ((a, b) for a in part.nodes for b in part.nodes if a != b)
    else:
        for a, b in _conducting(part):
            yield from ((a, b), (b, a))


def _reachable(flow: dict[str, set[str]], start: Iterable[str]) -> set[str]:
    """Every node that the start acts on, the start itself included."""
    reached, front = set(start), list(start)
    while front:
        for node in flow.get(front.pop(), ()):
            if node not in reached:
                reached.add(node)
                front.append(node)
    return reached


class _Groups:
    """Nodes that have been joined (union-find)."""

    def __init__(self) -> None:
        self._parent: dict[str, str] = {}

    def _root(self, node: str) -> str:
        while self._parent.get(node, node) != node:
            node = self._parent[node]
        return node

    def join(self, a: str, b: str) -> None:
        self._parent[self._root(a)] = self._root(b)

    def together(self, a: str, b: str) -> bool:
        return self._root(a) == self._root(b)
