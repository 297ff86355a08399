"""Assembly steps: what is fitted in which order, what is printed on it and which way round it goes."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from modgen.catalogue.records import Amplifier, Capacitor, Control, Diode, Header, Switch
from modgen.catalogue.records import Part as Record
from modgen.netlist.model import Part
from modgen.outputs.boardfacts import range_words, records_of
from modgen.outputs.marking import orientation, printed
from modgen.outputs.pages import TICK, Cell, Column, Table, columns
from modgen.outputs.partwords import value_words
from modgen.outputs.wording import natural, plural, quantity, short_ranges

if TYPE_CHECKING:
    from modgen.outputs.model import Job

#: Parts whose bodies differ by less than this are of one height [m]: what a board lies flat on does not see it.
HEIGHT_STEP = 0.05e-3

#: Most digits of a value; no part of the IEC 60063 series has more than three.
VALUE_DIGITS = 4

_PANEL = ("jack", "switch", "control")  # last, in this order: heat comes to the controls once only

_KINDS = {
    "resistor": "resistors",
    "capacitor": "capacitors",
    "diode": "diodes",
    "amplifier": "amplifier packages",
    "control": "controls",
    "jack": "jacks",
    "switch": "switches",
    "header": "power header",
}

_CAPACITORS = {
    "film-pp": "polypropylene capacitors",
    "film-pet": "polyester capacitors",
    "film-pps": "polyphenylene sulphide capacitors",
    "c0g": "ceramic capacitors (C0G)",
    "x7r": "ceramic capacitors (X7R)",
    "electrolytic": "electrolytic capacitors",
    "bipolar-electrolytic": "bipolar electrolytic capacitors",
}


@dataclass(frozen=True)
class Line:
    """Parts of one step that are the same part and go the same way round."""

    refs: tuple[str, ...]
    value: str
    printed: Cell
    orientation: Cell


@dataclass(frozen=True)
class Step:
    """What is fitted together: one kind of part on one land pattern. ``height`` in [m]."""

    number: int
    title: str
    kind: str
    height: float
    land_pattern: str
    facts: str
    lines: tuple[Line, ...]
    notes: tuple[str, ...]

    @property
    def panel(self) -> bool:
        """Whether its parts go through the panel, and so come last whatever their height."""
        return self.kind in _PANEL

    @property
    def count(self) -> int:
        """How many parts."""
        return sum(len(line.refs) for line in self.lines)


def steps(job: Job) -> tuple[Step, ...]:
    """Assembly steps: rising height on the board, then jacks, switches and controls.

    Parameters
    ----------
    job
        The module. [-]

    Returns
    -------
    tuple of Step
        Every part of the netlist is in exactly one line of one step.
    """
    records = records_of(job)
    groups: dict[tuple[int, int, str, str, str], list[Part]] = {}
    for part in job.netlist.parts:
        record = records[part.ref]
        last = _PANEL.index(record.kind) + 1 if record.kind in _PANEL else 0
        height = round(record.body.height / HEIGHT_STEP)
        groups.setdefault((last, height, _kind_words(record), record.kind, part.land_pattern), []).append(part)
    made = []
    for number, key in enumerate(sorted(groups), start=1):
        parts = groups[key]
        first = records[parts[0].ref]
        made.append(
            Step(
                number=number,
                title=key[2],
                kind=key[3],
                height=max(records[part.ref].body.height for part in parts),
                land_pattern=key[4],
                facts=_facts(first, len(parts)),
                lines=_lines(job, parts, records),
                notes=_notes(job, first, parts, records),
            )
        )
    return tuple(made)


def _kind_words(record: Record) -> str:
    if isinstance(record, Capacitor):
        return _CAPACITORS.get(record.dielectric, "capacitors")
    return _KINDS.get(record.kind, record.kind)


def _facts(record: Record, count: int) -> str:
    body = record.body
    facts = [plural(count, "part"), f"{quantity(body.height, 'length')} high"]
    if body.pitch and body.pins == 2 and record.mount != "surface":
        facts.append(f"leads {quantity(body.pitch, 'length', 4)} apart")
    if body.pins == 2 and record.mount == "surface":
        facts.append(f"{quantity(body.length, 'length')} by {quantity(body.width, 'length')}")
    return ", ".join(facts)


def _lines(job: Job, parts: Sequence[Part], records: Mapping[str, Record]) -> tuple[Line, ...]:
    net_of = job.netlist.net_of
    groups: dict[tuple[float, str, str, Cell], list[str]] = {}
    for part in parts:
        record = records[part.ref]
        numbers = [pin.number for pin in record.pins]
        way = orientation(record, {number: net_of.get((part.ref, number), "") for number in numbers})
        groups.setdefault((_size(record), part.value, record.key, way), []).append(part.ref)
    ordered = sorted(groups.items(), key=lambda item: (item[0][0], natural(item[1][0])))
    return tuple(
        Line(tuple(refs), value_words(records[refs[0]], key[1], VALUE_DIGITS), printed(records[refs[0]]), key[3])
        for key, refs in ordered
    )


def _size(record: Record) -> float:
    for name in ("resistance", "capacitance"):
        size = getattr(record, name, None)
        if size is not None:
            return float(size)
    return 0.0


def _notes(job: Job, record: Record, parts: Sequence[Part], records: Mapping[str, Record]) -> tuple[str, ...]:
    if isinstance(record, Control):
        return (
            f"Soldering limit: {record.solder_temperature:g} °C for {record.solder_time:g} s a pin, below the usual "
            "setting of an iron: turn it down, let the part cool between pins, and never twice in a row.",
            "Fit them into the panel with their nuts first, solder then, so that no joint is under strain.",
        )
    if record.kind == "jack":
        return ("Put the panel on and tighten the nuts before soldering, so that all sit square.",)
    if isinstance(record, Switch):
        return (
            f"{range_words(job)} The lever of a toggle points away from the pin that it joins to the middle one: check "
            "with a meter before the panel is marked.",
            "Put the panel on and tighten the nuts before soldering.",
        )
    if isinstance(record, Amplifier) and record.mount == "through-hole":
        return (
            "Keep the packages out until the rails have been measured. With sockets (which the parts list does not "
            "have) solder the sockets now; without, leave this step until then.",
        )
    if isinstance(record, Diode):
        return ("A diode the wrong way round blocks its rail, or lets a turned header through.",)
    if isinstance(record, Capacitor) and record.polarised:
        notes = ["Check every one against the table twice: the wrong way round they burst."]
        if any(part.field("role") == "glide-capacitor" for part in parts):
            notes.append(
                "The glide capacitors are pairs, back to back: minus to minus in the middle, plus outwards, so that "
                "the pair can take both signs."
            )
        return tuple(notes)
    if isinstance(record, Header):
        return ("The gap of the shroud is no safe guide: go by pin 1, marked on the part and on the board.",)
    return ()


def step_table(step: Step) -> Table:
    """The table of one step.

    Parameters
    ----------
    step
        From :func:`steps`. [-]

    Returns
    -------
    Table
        One row a line; the column for the way round only where it matters.
    """
    turned = any(line.orientation.text for line in step.lines)
    heads: tuple[Column, ...] = columns("!References", "#Quantity", "Value", "Printed on it")
    heads += columns("Which way round", "") if turned else columns("")
    rows = []
    for line in step.lines:
        row: tuple[str | Cell, ...] = (short_ranges(line.refs), str(len(line.refs)), line.value, line.printed)
        rows.append((*row, line.orientation, TICK) if turned else (*row, TICK))
    return Table(f"{step.facts}; land pattern {step.land_pattern or 'not given'}", heads, tuple(rows))
