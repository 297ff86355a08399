"""Channels that are not as many, or not alike, as they should be."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator

from modgen.analysis.board import Board, Lane
from modgen.catalogue.records import Capacitor, Control
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import listed
from modgen.units import value_text

#: what one lane says of one place: the parts there and what they are, in words
Reading = tuple[tuple[str, ...], str]


class ChannelsDiffer(Rule):
    """There are as many channels as the spec asks for, each built like the others.

    Checks:
        The number of lanes found by structure against ``channels``. For each place in a lane (terminator,
        series resistor, isolating resistor, control, capacitor, output resistors, feedback, amplifier
        type, sense of rotation): what most lanes have there; the lanes that differ are named.
    Matters:
        A value that was changed in seven lanes of eight is found on the bench at last, when one glide does
        not follow the others.
    Fails:
        start from: lane
        spec: channels 2
    Passes:
        start from: pair
    Limits:
        With two lanes there is no majority: the later one is named. Extra outputs are each compared with
        the lane's first.
    References:
        Common practice: replicated channels are compared with each other.
    """

    name = "channels-differ"
    subject = "function"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """The count, then every place in the lanes."""
        board, spec = context.board, context.spec
        assert spec is not None
        lanes = board.channels
        fault = None
        if len(lanes) != spec.channels:
            fault = Fault(
                f"{len(lanes)} channel{'' if len(lanes) == 1 else 's'} found; the spec asks for {spec.channels}",
                "a lane is missing or cut, or the netlist belongs to another spec"
                if len(lanes) < spec.channels
                else "the netlist belongs to another spec, or a lane was added",
                "mend the lane that is named under glide-range, or correct 'channels' in the spec"
                if len(lanes) < spec.channels
                else "correct 'channels' in the spec",
            )
        yield Measurement(
            parts=(),
            what=f"{len(lanes)} of {spec.channels} channels",
            measured=float(len(lanes)),
            limit=float(spec.channels),
            unit="channels",
            fault=fault,
            key="channels",
        )
        places = PLACES | ({"range switch": _range_switch} if any(lane.switch for lane in lanes) else {})
        for place, read in places.items():
            yield from _compared(place, [(lane.channel, read(board, lane)) for lane in lanes])


def _compared(place: str, found: list[tuple[int, Reading]]) -> Iterator[Measurement]:
    if len(found) < 2:
        return
    counts = Counter(said for _, (_, said) in found)
    # of equal ones the first lane's: Counter keeps the order in which they came
    usual = counts.most_common(1)[0][0]
    others = [channel for channel, (_, said) in found if said == usual]
    for channel, (refs, said) in found:
        fault = None
        if said != usual:
            by = f" ({listed(refs)})" if refs else ""
            fault = Fault(
                f"channel {channel} has {said} as {place}{by}; "
                f"channel{'s' if len(others) > 1 else ''} {listed(str(n) for n in others)} "
                f"ha{'ve' if len(others) > 1 else 's'} {usual}",
                "channels of one module are meant to behave alike",
                f"give channel {channel} what the others have",
                level="warning",
            )
        yield Measurement(parts=refs, what=f"channel {channel}: {place} {said}", fault=fault)


def _said(board: Board, ref: str) -> str:
    """A part in words: its value, and what of its kind matters to a lane."""
    record, value = board.record(ref), board.value(ref)
    text = value_text(value) if value else board.part(ref).value or "no value"
    if isinstance(record, Control):
        return f"{text} {record.taper}"
    kind = board.part(ref).field("dielectric") or (record.dielectric if isinstance(record, Capacitor) else "")
    return f"{text} {kind}".strip()


def _parts(choose: Callable[[Lane], tuple[str | None, ...]]) -> Callable[[Board, Lane], Reading]:
    def read(board: Board, lane: Lane) -> Reading:
        refs = tuple(ref for ref in choose(lane) if ref)
        return refs, listed(_said(board, ref) for ref in refs) or "none"

    return read


def _outputs(board: Board, lane: Lane) -> Reading:
    kinds = dict.fromkeys(_said(board, ref) for ref in lane.output_series)
    bare = [feed for feed in lane.feeds if not feed.resistor]
    where = " inside the loop" if lane.inside_loop else ""
    return lane.output_series, (listed(kinds) or "none") + (" and none" if kinds and bare else "") + where


def _amplifiers(board: Board, lane: Lane) -> Reading:
    packages = tuple(dict.fromkeys(section.package for _, section in lane.buffers))
    return packages, listed(dict.fromkeys(section.record.type for _, section in lane.buffers))


def _turning(board: Board, lane: Lane) -> Reading:
    return (lane.control,), "clockwise slower" if lane.wiring.rising else "clockwise faster"


def _range_switch(board: Board, lane: Lane) -> Reading:
    if lane.switch is None:
        return (), "none"
    kept = listed(_said(board, ref) for ref in lane.switch.keepers)
    return (lane.switch.ref, *lane.switch.keepers), f"one (slow at {lane.switch.slow}, kept by {kept or 'nothing'})"


PLACES: dict[str, Callable[[Board, Lane], Reading]] = {
    "terminator": _parts(lambda lane: lane.terminators),
    "series resistor": _parts(lambda lane: lane.input_series),
    "isolating resistor": _parts(lambda lane: lane.isolating),
    "control": _parts(lambda lane: (lane.control,)),
    "glide capacitor": _parts(lambda lane: lane.capacitors),
    "output resistor": _outputs,
    "feedback resistor": _parts(lambda lane: (lane.feedback,)),
    "compensation": _parts(lambda lane: (lane.compensation,)),
    "amplifier": _amplifiers,
    "sense of rotation": _turning,
}
