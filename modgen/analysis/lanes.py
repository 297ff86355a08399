"""Find the glide lanes of a board by structure: no role field and no net name decides.

A lane is a buffer whose non-inverting input carries capacitance to 0 V and a way through exactly one
control, and resistors in series with it, back to the output of another amplifier section. A panel switch with
a contact on that input that changes the capacitance gives the lane two ranges.
"""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from modgen.analysis.parts import POSITIONS, Section, reference_order

if TYPE_CHECKING:
    from modgen.analysis.board import Board


@dataclass(frozen=True)
class Wiring:
    """How a control stands in its lane.

    form: ``rheostat`` (wiper tied to pin 3: clockwise is slower, a lifted wiper leaves the whole track),
    ``reversed`` (wiper tied to pin 1: clockwise is faster), ``loose`` (far end open: a lifted wiper opens
    the lane), ``loose-reversed``, ``fixed`` (wiper open, whole track in the way) or ``divider`` (three nets).
    """

    form: str
    near: str  # net towards the first buffer
    far: str  # net towards the glide capacitor

    @property
    def adjustable(self) -> bool:
        """Whether turning it changes the time."""
        return self.form != "fixed"

    @property
    def rising(self) -> bool:
        """Whether clockwise raises the resistance."""
        return self.form in ("rheostat", "loose", "divider")

    @property
    def fails_open(self) -> bool:
        """Whether a lifted wiper breaks the way through."""
        return self.form in ("loose", "loose-reversed", "divider")


@dataclass(frozen=True)
class Branch:
    """One way from the glide net to 0 V through one capacitor, or through several in series."""

    refs: tuple[str, ...]


@dataclass(frozen=True)
class RangeSwitch:
    """A switch that gives a lane a slow range, in which more capacitance stands from the glide net to 0 V.

    ``slow`` and ``fast`` are its positions, ``1-2`` or ``2-3``. ``waiting`` is the net of the capacitors that the fast
    range leaves out, ``keepers`` are the resistors that hold them meanwhile at the output's voltage; without any
    the output jumps when the slow range is chosen.
    """

    ref: str
    slow: str
    fast: str
    branches: tuple[Branch, ...]  # every way to 0 V in the slow range
    waiting: str
    keepers: tuple[str, ...]


@dataclass(frozen=True)
class Feed:
    """One output: the resistor between the amplifier and the socket (``""`` for none), net, sockets."""

    resistor: str
    net: str
    jacks: tuple[str, ...]


@dataclass(frozen=True)
class Lane:
    """One channel as it is wired."""

    channel: int
    input_net: str | None  # tip of the socket that feeds it
    input_jacks: tuple[str, ...]
    terminators: tuple[str, ...]  # resistors from input_net to 0 V
    input_series: tuple[str, ...]
    first: Section
    isolating: tuple[str, ...]
    control: str
    wiring: Wiring
    glide_net: str
    branches: tuple[Branch, ...]  # parallel ways to 0 V; with a range switch those of the fast range
    second: Section
    feeds: tuple[Feed, ...]
    inside_loop: bool
    feedback: str | None
    compensation: str | None
    switch: RangeSwitch | None = None

    @property
    def slow_branches(self) -> tuple[Branch, ...]:
        """Parallel ways to 0 V in the slow range; without a range switch there is but one range."""
        return self.switch.branches if self.switch else self.branches

    @property
    def buffers(self) -> tuple[tuple[str, Section], tuple[str, Section]]:
        """Both sections, each with what it is called."""
        return ("input buffer", self.first), ("output buffer", self.second)

    @property
    def capacitors(self) -> tuple[str, ...]:
        """Every glide capacitor, in whichever range."""
        return tuple(dict.fromkeys(ref for branch in (*self.branches, *self.slow_branches) for ref in branch.refs))

    @property
    def slow_capacitors(self) -> tuple[str, ...]:
        """The glide capacitors of the slow range, or of the only one."""
        return tuple(ref for branch in self.slow_branches for ref in branch.refs)

    @property
    def output_series(self) -> tuple[str, ...]:
        """Every output resistor."""
        return tuple(feed.resistor for feed in self.feeds if feed.resistor)

    @property
    def output_nets(self) -> tuple[str, ...]:
        """Every output net."""
        return tuple(feed.net for feed in self.feeds)

    @property
    def output_jacks(self) -> tuple[str, ...]:
        """Every output socket."""
        return tuple(ref for feed in self.feeds for ref in feed.jacks)


def find_lanes(board: Board) -> tuple[Lane, ...]:
    """Every lane of a board, sorted by channel.

    Parameters
    ----------
    board
        The netlist seen as electronics.

    Returns
    -------
    tuple of Lane
        The channel number is the control's ``channel`` field; a lane without one, or with one that is
        taken, gets the lowest free number in the order of the control's reference.
    """
    found = [lane for section in board.sections if (lane := _lane(board, section)) is not None]
    found.sort(key=lambda lane: reference_order(lane.control))
    numbered: dict[int, Lane] = {}
    loose = []
    for lane in found:
        if lane.channel and lane.channel not in numbered:
            numbered[lane.channel] = lane
        else:
            loose.append(lane)
    free = 1
    for lane in loose:
        while free in numbered:
            free += 1
        numbered[free] = replace(lane, channel=free)
    return tuple(numbered[number] for number in sorted(numbered))


def _lane(board: Board, second: Section) -> Lane | None:
    glide_net = second.noninverting
    if glide_net is None or glide_net in board.supply_nets:
        return None
    branches, switch = _ranges(board, glide_net, second)
    way = _way_to_output(board, glide_net, second)
    if not branches or way is None:
        return None
    refs, control, near, far, first = way
    wiring = _wiring(board, control, near, far)
    input_net, series = _way_to_input(board, first)
    feeds, inside, feedback = _feeds(board, second)
    compensation = None
    if inside and second.output and second.inverting:
        compensation = next(iter(board.ties(second.output, second.inverting, "capacitor")), None)
    return Lane(
        channel=board.channel(control),
        input_net=input_net,
        input_jacks=tuple(j.ref for j in board.jacks if input_net is not None and j.tip == input_net),
        terminators=board.ties(input_net, board.ground, "resistor") if input_net else (),
        input_series=series,
        first=first,
        isolating=refs,
        control=control,
        wiring=wiring,
        glide_net=glide_net,
        branches=branches,
        second=second,
        feeds=feeds,
        inside_loop=inside,
        feedback=feedback,
        compensation=compensation,
        switch=switch,
    )


def _ranges(board: Board, net: str, second: Section) -> tuple[tuple[Branch, ...], RangeSwitch | None]:
    """Ways to 0 V in the fast range, or in the only one, and the switch that makes another."""
    fixed = _branches(board, net)
    for ref in dict.fromkeys(contact.ref for contact in board.contacts if net in (contact.common, contact.throw)):
        # what each position puts on the net: the capacitors behind the contact that it closes
        behind: dict[str, tuple[str, tuple[Branch, ...]]] = {}
        for position in POSITIONS:
            other = _behind(board, ref, position, net)
            behind[position] = (other, _branches(board, other) if other else ())
        fast, slow = sorted(behind, key=lambda position: _capacitance(board, behind[position][1]))
        if not behind[slow][1]:
            continue  # it switches something else
        ways = (*fixed, *behind[fast][1])
        if not ways:
            return (), None  # without a capacitor in one position it is no lane
        waiting = behind[slow][0]
        held = {waiting, _behind(board, ref, fast, waiting)}
        senses = {second.output, *(feed.net for feed in _feeds(board, second)[0])}
        keepers = tuple(n.ref for at in sorted(held) for n in board.between(at, "resistor") if n.net in senses)
        return ways, RangeSwitch(ref, slow, fast, (*fixed, *behind[slow][1]), waiting, keepers)
    return fixed, None


def _behind(board: Board, ref: str, position: str, net: str) -> str:
    """The net that a switch joins to a net in a position; ``""`` for none, or for a supply."""
    for contact in board.contacts:
        if (contact.ref, contact.position) == (ref, position) and net in (contact.common, contact.throw):
            other = contact.throw if net == contact.common else contact.common
            return "" if other in board.supply_nets else other
    return ""


def _capacitance(board: Board, branches: tuple[Branch, ...]) -> float:
    """Nominal capacitance [F]; a value that cannot be read counts as none, and is refused elsewhere."""
    total = 0.0
    for branch in branches:
        values = [board.value(ref) or 0.0 for ref in branch.refs]
        total += 1 / sum(1 / value for value in values) if all(values) else 0.0
    return total


def _branches(board: Board, net: str) -> tuple[Branch, ...]:
    """Ways to 0 V through capacitors alone, over nets that have nothing but two capacitors on them."""
    out = []
    for start in board.between(net, "capacitor"):
        refs, at, last = [start.ref], start.net, start.ref
        while at != board.ground:
            onward = [n for n in board.between(at) if n.ref != last]
            if len(board.on(at)) != 2 or len(onward) != 1 or onward[0].kind != "capacitor":
                break
            last, at = onward[0].ref, onward[0].net
            if last in refs or at == net:
                break
            refs.append(last)
        if at == board.ground:
            out.append(Branch(tuple(refs)))
    return tuple(out)


def _way_to_output(board: Board, net: str, second: Section) -> tuple[tuple[str, ...], str, str, str, Section] | None:
    """The shortest way from a glide net to another section's output through one control.

    Returns the resistors on it, the control, the nets on the control's near and far side, and that section.
    """
    outputs = {s.output: s for s in reversed(board.sections) if s.output and s.output != second.output}
    # breadth first over (net, control passed or not): the shortest way wins, of equal ones the lowest reference
    queue: deque[tuple[str, tuple[str, ...], str, str, str]] = deque([(net, (), "", "", "")])
    seen = {(net, False)}
    while queue:
        at, resistors, control, near, far = queue.popleft()
        if control and at in outputs:
            return resistors, control, near, far, outputs[at]
        for step in board.between(at, "resistor", "control"):
            if step.net in board.supply_nets or step.net == net:
                continue
            if step.kind == "resistor":
                onward = (step.net, (step.ref, *resistors), control, near, far)
            elif not control:
                onward = (step.net, resistors, step.ref, step.net, at)
            else:
                continue
            state = (onward[0], bool(onward[2]))
            if state not in seen:
                seen.add(state)
                queue.append(onward)
    return None


def _wiring(board: Board, control: str, near: str, far: str) -> Wiring:
    one, wiper, three = (board.net(control, pin) for pin in ("1", "2", "3"))
    # an end on a net of its own goes nowhere: it is open for all that the current knows
    one, wiper, three = (net if net and len(board.on(net)) > 1 else None for net in (one, wiper, three))
    if wiper is None:
        form = "fixed"
    elif wiper == three:
        form = "rheostat"
    elif wiper == one:
        form = "reversed"
    elif three is None:
        form = "loose"
    elif one is None:
        form = "loose-reversed"
    else:
        form = "divider"
    return Wiring(form, near, far)


def _way_to_input(board: Board, first: Section) -> tuple[str | None, tuple[str, ...]]:
    """The socket net that feeds a buffer, and the resistors on the way."""
    tips = {jack.tip for jack in board.jacks if jack.tip}
    start = first.noninverting
    if start is None:
        return None, ()
    queue: deque[tuple[str, tuple[str, ...]]] = deque([(start, ())])
    seen = {start}
    while queue:
        at, refs = queue.popleft()
        if at in tips:
            return at, refs
        for step in board.between(at, "resistor"):
            if step.net not in seen and step.net not in board.supply_nets:
                seen.add(step.net)
                queue.append((step.net, (step.ref, *refs)))
    return None, ()


def _feeds(board: Board, second: Section) -> tuple[tuple[Feed, ...], bool, str | None]:
    """Outputs of a lane, whether an output resistor is inside the loop, and the feedback resistor."""
    if second.output is None:
        return (), False, None

    def jacks_on(net: str) -> tuple[str, ...]:
        return tuple(jack.ref for jack in board.jacks if jack.tip == net)

    feeds = []
    if jacks_on(second.output):
        feeds.append(Feed("", second.output, jacks_on(second.output)))
    inside, feedback = False, None
    for step in board.between(second.output, "resistor"):
        sensed = step.net == second.inverting
        back = board.ties(step.net, second.inverting, "resistor") if second.inverting else ()
        closes = not second.follower and (sensed or bool(back))
        if jacks_on(step.net):
            feeds.append(Feed(step.ref, step.net, jacks_on(step.net)))
            if closes:
                inside = True
                feedback = back[0] if back else None
    return tuple(feeds), inside, feedback
