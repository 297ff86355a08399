"""A value that nobody sells."""

from __future__ import annotations

from collections.abc import Iterator

from modgen.catalogue.records import Capacitor, Resistor
from modgen.formulas.series import in_series, nearest
from modgen.rules.contract import Context, Fault, Measurement, Rule
from modgen.rules.support import listed
from modgen.units import format_quantity

#: series that parts without a record are sold in. Source: IEC 60063; makers' ranges (common practice).
USUAL = {"resistor": ("E24", "E96"), "capacitor": ("E24",)}
QUANTITY = {"resistor": "resistance", "capacitor": "capacitance"}


class OddValue(Rule):
    """Every fixed resistor and capacitor has a value of the series that it is sold in.

    Checks:
        The value of each fixed resistor and capacitor against the IEC 60063 series that its record names; of one
        without a record against E24 and E96, a capacitor against E24.
    Matters:
        A value between two steps of its series cannot be ordered; whoever buys takes the nearest, and the board is
        not the one that was checked.
    Fails:
        start from: lane
        R2 value=10.3k
    Passes:
        start from: lane
    Limits:
        Controls are sold in steps of their own and are not judged. That a maker leaves steps out is not known.
    References:
        IEC 60063:2015, preferred number series for resistors and capacitors.
    """

    name = "odd-value"
    subject = "ordering"
    level = "warning"
    needs_rails = False

    def measure(self, context: Context) -> Iterator[Measurement]:
        """Every fixed resistor and capacitor with a readable value above zero."""
        board = context.board
        for ref in board.refs:
            kind, record, value = board.kind(ref), board.record(ref), board.value(ref)
            if kind not in USUAL or not value:
                continue
            series = (record.series,) if isinstance(record, Resistor | Capacitor) else USUAL[kind]
            text = format_quantity(value, QUANTITY[kind], 4)
            fault = None
            if not any(in_series(value, name) for name in series):
                near = format_quantity(nearest(value, series[-1]), QUANTITY[kind], 4)
                fault = Fault(
                    f"{ref} is {text}, which is no value of {listed(series)}",
                    "it cannot be ordered, and whoever buys takes the nearest",
                    f"take {near}, or two parts that make {text}",
                )
            yield Measurement(parts=(ref,), what=f"{ref}: {text} of {listed(series)}", fault=fault)
