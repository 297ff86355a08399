"""Feedback: how much of an amplifier's output comes back to each of its inputs."""

from __future__ import annotations

from dataclasses import dataclass

from modgen.analysis.board import Board, Section

#: What a link counts as, so that the equations stay solvable [ohm]. Source: small beside any other resistor.
LINK = 1e-3
#: a share below this is rounding [-]
NOTHING = 1e-9


@dataclass(frozen=True)
class Feedback:
    """Share of the output's voltage at each input, by resistors and wires alone [-]."""

    inverting: float
    noninverting: float

    @property
    def positive(self) -> bool:
        """Whether the output drives itself on: as much comes back to the non-inverting input, or more."""
        return self.noninverting > NOTHING and self.noninverting >= self.inverting - NOTHING

    @property
    def exchanged(self) -> bool:
        """Whether the inputs look exchanged: all that comes back comes back to the non-inverting one."""
        return self.noninverting > NOTHING and self.inverting <= NOTHING


def feedback_of(board: Board, section: Section) -> Feedback:
    """What of a section's output comes back to its inputs.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    section
        One of its sections.

    Returns
    -------
    Feedback
        Found by solving the resistors around it at DC with the output at 1 V and every supply and every other
        output at 0 V; sockets are open.

    Notes
    -----
    Kirchhoff's current law at each net between the fixed ones; a control counts with its whole track.
    """
    if section.output is None:
        return Feedback(0.0, 0.0)
    fixed = dict.fromkeys(board.supply_nets, 0.0)
    fixed |= {s.output: 0.0 for s in board.sections if s.output}
    fixed[section.output] = 1.0
    volts = _solve(board, section.output, fixed)
    shares = [volts.get(net, 0.0) if net else 0.0 for net in (section.inverting, section.noninverting)]
    return Feedback(*shares)


def _solve(board: Board, start: str, fixed: dict[str, float]) -> dict[str, float]:
    """Voltages of the nets that resistors join to a net, other fixed nets not passed."""
    free: list[str] = []
    queue = [start]
    while queue:
        for step in board.between(queue.pop(), "resistor", "control"):
            if step.net not in fixed and step.net not in free:
                free.append(step.net)
                queue.append(step.net)
    place = {net: n for n, net in enumerate(free)}
    rows = [[0.0] * (len(free) + 1) for _ in free]
    for net, n in place.items():
        for step in board.between(net, "resistor", "control"):
            conductance = 1 / max(board.value(step.ref) or 0.0, LINK)
            rows[n][n] += conductance
            if step.net in place:
                rows[n][place[step.net]] -= conductance
            else:
                rows[n][-1] += conductance * fixed[step.net]
    return {**fixed, **dict(zip(free, _eliminate(rows), strict=True))}


def _eliminate(rows: list[list[float]]) -> list[float]:
    """Solve linear equations, given as rows with the right side last, by elimination.

    The diagonal of such a network outweighs the rest of its row, so no pivoting is needed.
    """
    size = len(rows)
    for n in range(size):
        for m in range(n + 1, size):
            factor = rows[m][n] / rows[n][n]
            if factor:
                for k in range(n, size + 1):
                    rows[m][k] -= factor * rows[n][k]
    found = [0.0] * size
    for n in reversed(range(size)):
        found[n] = (rows[n][-1] - sum(rows[n][k] * found[k] for k in range(n + 1, size))) / rows[n][n]
    return found


def loop_through_others(board: Board, section: Section) -> bool:
    """Whether the output holds the inverting input by way of other amplifiers, through resistors.

    Parameters
    ----------
    board
        The netlist seen as electronics.
    section
        One of its sections.

    Returns
    -------
    bool
        True when some way leads from the output to the inverting input without turning the sign round. Two
        followers whose outputs are exchanged reach each other's inverting inputs: each turns the sign round, and
        the pair latches. A net that an output drives takes nothing through a resistor.
    """
    if section.output is None or section.inverting is None:
        return False
    driven = {s.output for s in board.sections if s.output}
    stop = {*board.supply_nets, section.output}
    # (net, whether the sign there is the output's own)
    reached, queue = {(section.output, True)}, [(section.output, True)]
    while queue:
        at, same = queue.pop()
        onward = [(step.net, same) for step in board.between(at, "resistor", "control") if step.net not in driven]
        for other in board.sections:
            if other.output and (other.package, other.index) != (section.package, section.index):
                onward += [(other.output, same)] if at == other.noninverting else []
                onward += [(other.output, not same)] if at == other.inverting and not other.follower else []
        for state in onward:
            if state[0] not in stop and state not in reached:
                reached.add(state)
                queue.append(state)
    return (section.inverting, True) in reached
