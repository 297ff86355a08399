"""A glide capacitor of a kind that is not for signals."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.analysis.accuracy import offset_terms
from modgen.catalogue.records import Capacitor
from modgen.design.practice import GLIDE_DIELECTRICS, GLIDE_LEAKY
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.units import format_quantity


class GlideDielectric(Rule):
    """Every glide capacitor is of a dielectric that holds a voltage.

    Checks:
        The dielectric of each capacitor in the glide position. Film and C0G pass. Class 2 ceramic (X7R)
        is an error. An electrolytic is an error where pitch passes; elsewhere a warning, unless the
        channel's offset, with its leakage, keeps within the budget.
    Matters:
        X7R loses capacitance with the voltage on it, so that the glide depends on the note, and is
        piezoelectric, so that a tap on the panel is heard. An electrolytic leaks through the control: tens
        to hundreds of cents.
    Fails:
        start from: lane
        C1 dielectric=x7r
    Passes:
        start from: lane
    Limits:
        Knows the dielectric by the netlist's field, else by the catalogue.
    References:
        WIMA, dielectric properties, and Vishay document 28309, leakage.
    """

    name = "glide-dielectric"
    subject = "function"
    needs_spec = True

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every glide capacitor."""
        board, spec = context.board, context.spec
        assert spec is not None
        for lane in board.channels:
            for ref in lane.capacitors:
                record = board.record(ref)
                kind = board.part(ref).field("dielectric") or (
                    record.dielectric if isinstance(record, Capacitor) else ""
                )
                fault, said = None, kind or "not known"
                if kind in GLIDE_LEAKY:
                    offset = sum(term.worst for term in offset_terms(board, lane, spec.signal))
                    worst, budget = (format_quantity(value, "voltage", 4) for value in (offset, spec.accuracy.offset))
                    said = f"{kind}, channel off by {worst} of {budget}"
                    if spec.signal.pitch:
                        fault = Fault(
                            f"{ref} ({kind}) is the glide capacitor of channel {lane.channel}, which passes pitch",
                            "its leakage through the control shifts the pitch, by tens to hundreds of cents",
                            "fit a film capacitor",
                        )
                    elif offset > spec.accuracy.offset:
                        fault = Fault(
                            f"{ref} ({kind}) is the glide capacitor of channel {lane.channel}, which is off by up to "
                            f"{worst}; the budget is {budget}",
                            "its leakage through the control is an offset that grows with the glide",
                            "fit a film capacitor",
                            level="warning",
                        )
                elif kind and kind not in GLIDE_DIELECTRICS:
                    fault = Fault(
                        f"{ref} ({kind}) is the glide capacitor of channel {lane.channel}",
                        "it loses capacitance with the voltage on it, so that the glide depends on the note, and is "
                        "piezoelectric",
                        "fit a film or C0G capacitor",
                    )
                yield Measurement(
                    parts=(ref,),
                    what=f"channel {lane.channel}: {ref} {said}",
                    nets=(lane.glide_net,),
                    fault=fault,
                    key="signal.pitch" if kind in GLIDE_LEAKY and spec.signal.pitch else "build.capacitor",
                )
