"""Who shares a source: the nets that empty sockets join through their switched contacts."""

from __future__ import annotations

from modgen.analysis.board import Board
from modgen.analysis.parts import reference_order


def nets_after(board: Board, net: str) -> tuple[str, ...]:
    """A socket net and every socket net that a signal on it reaches through the contacts of empty sockets.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    net
        The tip net of a socket with a plug in it.

    Returns
    -------
    tuple of str
        With inputs normalled in a chain, every input down the chain.
    """
    nets, queue = [net], [net]
    while queue:
        at = queue.pop()
        for jack in board.jacks:
            # the socket's own plug opens its switch, so the signal only runs from switch to tip
            if jack.switch == at and jack.tip and jack.tip not in nets and jack.tip != board.ground:
                nets.append(jack.tip)
                queue.append(jack.tip)
    return tuple(nets)


def nets_before(board: Board, net: str) -> tuple[str, ...]:
    """A socket net and every socket net that reaches it through switched contacts.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    net
        The tip net of a socket.

    Returns
    -------
    tuple of str
        With inputs normalled in a chain, every input up the chain.
    """
    nets, queue = [net], [net]
    while queue:
        at = queue.pop()
        for jack in board.jacks:
            if jack.tip != at or not jack.switch or jack.switch in nets or jack.switch in board.supply_nets:
                continue
            nets.append(jack.switch)
            queue.append(jack.switch)
    return tuple(nets)


def heads(board: Board, net: str) -> tuple[str, ...]:
    """Where a source that reaches a socket net can be plugged to reach most: the starts of its chain.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    net
        The tip net of a socket.

    Returns
    -------
    tuple of str
        Nets that no other socket net reaches; when sockets are normalled in a ring, all of the ring.
    """
    before = nets_before(board, net)
    fed = {jack.tip for jack in board.jacks if jack.switch in before and jack.tip != jack.switch}
    return tuple(start for start in before if start not in fed) or before


def terminators_seen(board: Board, net: str) -> tuple[str, ...]:
    """Terminators that a source plugged into a socket drives: resistors to 0 V on every net it reaches.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    net
        The tip net of the socket.

    Returns
    -------
    tuple of str
        References, sorted.
    """
    refs = {ref for name in nets_after(board, net) for ref in board.ties(name, board.ground, "resistor")}
    return tuple(sorted(refs, key=reference_order))


def lanes_sharing(board: Board, net: str) -> int:
    """How many lanes one source can feed at once, when it is plugged where it feeds most and this net too.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    net
        The tip net of the socket that feeds a lane.

    Returns
    -------
    int
        Lanes, that lane included; 0 when none is on it.
    """
    inputs = [lane.input_net for lane in board.channels]
    return max(sum(map(inputs.count, nets_after(board, start))) for start in heads(board, net))
