"""The library's circuit, with the slow ways around what we never do taken out."""

from __future__ import annotations

from typing import Any


class _OrderedNodes(dict[Any, None]):
    """Stands for the set of a circuit's blocks, in the order they were made: a set's order is chance."""

    def add(self, node: Any) -> None:
        """Add a block at the end."""
        self[node] = None


def fast_circuit(skidl: Any) -> Any:
    """An empty circuit.

    Three public methods are overridden and the public list of checks is replaced, because our nets are never
    merged (each pin is connected once, which the read-back proves): so every net is distinct.
    """

    class Circuit(skidl.Circuit):  # type: ignore[misc]
        """A circuit of distinct nets."""

        def get_nets(self) -> list[Any]:
            """Every net with a pin; the library's own compares each net with all others."""
            return [net for net in self.nets if net is not self.NC and net.pins]

        def check_tags(self) -> None:
            """Only parts and blocks that we made: the library warns of its own root block each time."""
            for item in (*self.parts, *(node for node in self.nodes if node is not self.root)):
                item.check_tag()

        def check_for_empty_footprints(self) -> None:
            """Nothing: a part without a land pattern is a finding of our own rule, not a fault of the build."""

    circuit = Circuit()
    circuit.no_files = True
    nodes = _OrderedNodes()
    nodes.add(circuit.root)
    circuit.nodes = nodes
    circuit.erc_list = [_check_everything]
    return circuit


def _check_everything(circuit: Any) -> None:
    """The library's checks of each net and part, in order, without its search for every net by name."""
    for net in circuit.nets:
        # the library keeps the pins of a net as a set made into a list: which pin a message names first is chance
        pins = sorted(net.pins, key=str)
        net.traversal = net.traversal._replace(pins=pins)
        net.ERC()
    for part in circuit.parts:
        part.ERC()
