"""Small netlists in words: the notation of the ``Fails`` and ``Passes`` examples of the rules.

One line does one thing::

    start from: lane          begin with one of BOARDS
    R9 metal-film-0207-100k 1=CH1_IN 2=0V role=terminator
    C1 2=0V                   put a pin of a part that is there on another net
    C1 2=                     leave the pin open
    C1 film-pp-box-250v-470n           fit another part in the place of C1
    R1 land= value=3k         change what the netlist says of it (value, land pattern, any field)
    add R1 ...                a second part of that reference
    without C1                take it out
    spec: rails.positive 15 V change the spec (EXAMPLE_SPEC)
    spec: waive idle-amplifier U1
    library: error TEXT       a message of the circuit library's own check

Value and fields are those of the catalogue record; a line that starts with ``#`` is a comment.
"""

from __future__ import annotations

import inspect
from collections.abc import Sequence
from dataclasses import dataclass, replace

from modgen.analysis.board import Records
from modgen.catalogue.records import Amplifier, Capacitor, Control, Diode, Resistor
from modgen.catalogue.records import Part as Record
from modgen.netlist.model import Net, Netlist, Part
from modgen.netlist.order import sorted_nets, sorted_parts
from modgen.problems import Place
from modgen.rules.contract import HEADINGS, Rule
from modgen.spec.model import (
    Accuracy,
    Build,
    Glide,
    Jacks,
    Order,
    Output,
    Rails,
    Signal,
    Spec,
    Waiver,
)
from modgen.units import parse_quantity, parse_span, value_text

#: One lane on two rails, as it should be.
LANE = """
J1 header-2x5 1=BUS- 2=BUS- 3=0V 4=0V 5=0V 6=0V 7=0V 8=0V 9=BUS+ 10=BUS+ role=power-header
J2 jack-35-switched T=CH1_IN TN=0V S=0V role=input-jack channel=1
J3 jack-35-switched T=CH1_OUT S=0V role=output-jack channel=1
D1 1n5819 1=V+ 2=BUS+ role=reverse-polarity
D2 1n5819 1=BUS- 2=V- role=reverse-polarity
U1 tl072-dip8 1=CH1_BUF 2=CH1_BUF 3=CH1_A 4=V- 5=CH1_GLIDE 6=CH1_DRIVE 7=CH1_DRIVE 8=V+ role=amplifier
R1 metal-film-0207-1m0 1=CH1_IN 2=0V role=terminator channel=1
R2 metal-film-0207-10k 1=CH1_IN 2=CH1_A role=input-series channel=1
R3 metal-film-0207-2k2 1=CH1_BUF 2=CH1_CTL role=isolating channel=1
R4 control-16mm-linear-1m0 1=CH1_CTL 2=CH1_GLIDE 3=CH1_GLIDE role=glide-control channel=1
R5 metal-film-0207-1k0 1=CH1_DRIVE 2=CH1_OUT role=output-series channel=1
C1 film-pp-box-250v-1u0 1=CH1_GLIDE 2=0V role=glide-capacitor channel=1
C2 x7r-radial-50v-100n 1=V+ 2=0V role=decoupling serves=U1
C3 x7r-radial-50v-100n 1=V- 2=0V role=decoupling serves=U1
C4 electrolytic-radial-25v-10u 1=V+ 2=0V role=reservoir
C5 electrolytic-radial-25v-10u 1=0V 2=V- role=reservoir
"""

#: The same lane on a single supply of 9 V, with signals between 0 V and 5 V.
SINGLE = """
spec: rails.positive 9 V
spec: rails.negative 0 V
spec: signal.span 0 V to 5 V
J1 header-2x5 3=0V 4=0V 5=0V 6=0V 7=0V 8=0V 9=BUS+ 10=BUS+ role=power-header
J2 jack-35-switched T=CH1_IN TN=0V S=0V role=input-jack channel=1
J3 jack-35-switched T=CH1_OUT S=0V role=output-jack channel=1
D1 1n5819 1=V+ 2=BUS+ role=reverse-polarity
U1 opa2192-soic8 1=CH1_BUF 2=CH1_BUF 3=CH1_A 4=0V 5=CH1_GLIDE 6=CH1_DRIVE 7=CH1_DRIVE 8=V+ role=amplifier
R1 metal-film-0207-1m0 1=CH1_IN 2=0V role=terminator channel=1
R2 metal-film-0207-10k 1=CH1_IN 2=CH1_A role=input-series channel=1
R3 metal-film-0207-2k2 1=CH1_BUF 2=CH1_CTL role=isolating channel=1
R4 control-16mm-linear-1m0 1=CH1_CTL 2=CH1_GLIDE 3=CH1_GLIDE role=glide-control channel=1
R5 metal-film-0207-1k0 1=CH1_DRIVE 2=CH1_OUT role=output-series channel=1
C1 film-pp-box-250v-1u0 1=CH1_GLIDE 2=0V role=glide-capacitor channel=1
C2 x7r-radial-50v-100n 1=V+ 2=0V role=decoupling serves=U1
C3 electrolytic-radial-25v-10u 1=V+ 2=0V role=reservoir
"""

#: Two lanes, the second input falling back on the first, with the output resistors inside the loops.
PAIR = """
start from: lane
spec: channels 2
U1 6=CH1_FB
R6 metal-film-0207-10k 1=CH1_OUT 2=CH1_FB role=feedback channel=1
C6 c0g-radial-100v-470p 1=CH1_DRIVE 2=CH1_FB role=compensation channel=1
J4 jack-35-switched T=CH2_IN TN=CH1_IN S=0V role=input-jack channel=2
J5 jack-35-switched T=CH2_OUT S=0V role=output-jack channel=2
U2 tl072-dip8 1=CH2_BUF 2=CH2_BUF 3=CH2_A 4=V- 5=CH2_GLIDE 6=CH2_FB 7=CH2_DRIVE 8=V+ role=amplifier
R11 metal-film-0207-1m0 1=CH2_IN 2=0V role=terminator channel=2
R12 metal-film-0207-10k 1=CH2_IN 2=CH2_A role=input-series channel=2
R13 metal-film-0207-2k2 1=CH2_BUF 2=CH2_CTL role=isolating channel=2
R14 control-16mm-linear-1m0 1=CH2_CTL 2=CH2_GLIDE 3=CH2_GLIDE role=glide-control channel=2
R15 metal-film-0207-1k0 1=CH2_DRIVE 2=CH2_OUT role=output-series channel=2
R16 metal-film-0207-10k 1=CH2_OUT 2=CH2_FB role=feedback channel=2
C11 film-pp-box-250v-1u0 1=CH2_GLIDE 2=0V role=glide-capacitor channel=2
C12 x7r-radial-50v-100n 1=V+ 2=0V role=decoupling serves=U2
C13 x7r-radial-50v-100n 1=V- 2=0V role=decoupling serves=U2
C16 c0g-radial-100v-470p 1=CH2_DRIVE 2=CH2_FB role=compensation channel=2
"""

BOARDS = {"lane": LANE, "single": SINGLE, "pair": PAIR}

EXAMPLE_SPEC = Spec(
    module="Example",
    channels=1,
    jacks=Jacks(1, 1),
    rails=Rails(12.0, -12.0, 0.05),
    glide=Glide(10e-3, 1.0, taper="linear"),
    normalling="chain",
    signal=Signal(),
    accuracy=Accuracy(scale=0.02, offset=0.2),
    output=Output(),
    build=Build(),
    order=Order(),
    file="example.yaml",
)

#: spec keys that examples may change, and what kind of text they take
SPEC_KEYS = {
    "channels": "whole",  # and as many sockets of each kind
    "normalling": "word",
    "rails.positive": "voltage",
    "rails.negative": "voltage",
    "rails.tolerance": "ratio",
    "glide.shortest": "time",
    "glide.longest": "time",
    "glide.cover": "word",
    "glide.measure": "word",
    "glide.taper": "word",
    "glide.ranges": "count",
    "signal.source": "resistance",
    "signal.load": "resistance",
    "signal.span": "span",
    "signal.pitch": "flag",
    "build.amplifier": "word",
    "accuracy.scale": "ratio",
    "accuracy.offset": "voltage",
}

_PINS = {"T", "TN", "S"}


class ExampleError(ValueError):
    """A line of an example that cannot be read."""


@dataclass(frozen=True)
class Example:
    """What an example describes."""

    netlist: Netlist
    spec: Spec
    #: what the example starts from: the circuit that is intended
    start: Netlist | None = None


def read_example(text: str, catalogue: Records) -> Example:
    """Read an example.

    Parameters
    ----------
    text
        The lines, see the module's docstring.
    catalogue
        Where the parts are looked up; a part that is not there gets its key as its value.

    Returns
    -------
    Example
        The netlist and the spec it is held against.

    Raises
    ------
    ExampleError
        When a line cannot be read; the line is quoted.
    """
    state = _State(catalogue)
    for line in text.strip().splitlines():
        state.line(line.strip())
    return state.finish()


class _State:
    """Parts and pins while the lines are read."""

    def __init__(self, catalogue: Records) -> None:
        self.catalogue = catalogue
        self.parts: list[Part] = []
        self.pins: list[tuple[str, str, str]] = []
        self.spec = EXAMPLE_SPEC
        self.messages: list[tuple[str, str]] = []
        self.start: Netlist | None = None

    def line(self, line: str) -> None:
        """Do what one line says."""
        head, _, rest = line.partition(" ")
        if not line or line.startswith("#"):
            return
        if line.startswith("start from:"):
            name = line.partition(":")[2].strip()
            if name not in BOARDS:
                raise ExampleError(f"no board {name!r} in line {line!r}; there are {', '.join(sorted(BOARDS))}")
            for inner in BOARDS[name].strip().splitlines():
                self.line(inner)
            self.start = self._netlist()
        elif head == "spec:":
            self.spec = _changed(self.spec, rest)
        elif head == "library:":
            level, _, message = rest.partition(" ")
            self.messages.append((level, message))
        elif head == "without":
            for ref in rest.split():
                self._find(ref, line)
                self.parts = [part for part in self.parts if part.ref != ref]
                self.pins = [pin for pin in self.pins if pin[0] != ref]
        elif head == "add":
            self._part(rest, line, new=True)
        else:
            self._part(line, line, new=False)

    def _find(self, ref: str, line: str) -> Part | None:
        found = next((part for part in self.parts if part.ref == ref), None)
        if found is None and line.startswith("without"):
            raise ExampleError(f"no part {ref} to take out in line {line!r}")
        return found

    def _part(self, text: str, line: str, *, new: bool) -> None:
        ref, *words = text.split()
        key = words.pop(0) if words and "=" not in words[0] else ""
        known = None if new else self._find(ref, line)
        if known is None and not key:
            raise ExampleError(f"{ref} names no part in line {line!r}")
        part = known or Part(ref, "", "")
        if key:
            role = tuple(pair for pair in part.fields if pair[0] in ("role", "channel", "serves"))
            fitted = _fitted(ref, key, self.catalogue.get(key))
            part = replace(fitted, fields=tuple(sorted((*fitted.fields, *role))))
        for word in words:
            name, equals, value = word.partition("=")
            if not equals:
                raise ExampleError(f"{word!r} is neither pin=net nor field=text in line {line!r}")
            if name.isdigit() or name in _PINS:
                if known is not None:
                    self.pins = [pin for pin in self.pins if pin[:2] != (ref, name)]
                if value:
                    self.pins.append((ref, name, value))
            elif name == "value":
                part = replace(part, value=value)
            elif name == "land":
                part = replace(part, land_pattern=value)
            else:
                fields = {**dict(part.fields), name: value}
                part = replace(part, fields=tuple(sorted(fields.items())))
        if known is not None:
            self.parts[self.parts.index(known)] = part
        else:
            self.parts.append(part)

    def finish(self) -> Example:
        """Put parts and nets together."""
        return Example(self._netlist(), self.spec, self.start)

    def _netlist(self) -> Netlist:
        nets: dict[str, list[tuple[str, str]]] = {}
        for ref, pin, net in self.pins:
            nets.setdefault(net, []).append((ref, pin))
        return Netlist(
            title=self.spec.module,
            parts=sorted_parts(self.parts),
            nets=sorted_nets(Net(name, tuple(pins)) for name, pins in nets.items()),
            library_messages=tuple(self.messages),
        )


def _fitted(ref: str, key: str, record: Record | None) -> Part:
    """A part as the netlist writes it, with the figures of its record."""
    fields = {"part": key}
    value = key
    if isinstance(record, Resistor | Control):
        value = value_text(record.resistance)
        fields["power"] = f"{record.power:g}W"
    elif isinstance(record, Capacitor):
        value = value_text(record.capacitance)
        fields["dielectric"] = record.dielectric
    elif isinstance(record, Amplifier):
        value = record.type
    if isinstance(record, Resistor | Control | Capacitor):
        fields["tolerance"] = f"{record.tolerance * 100:g}%"
        fields["voltage"] = f"{record.voltage:g}V"
    elif isinstance(record, Diode):
        fields["voltage"] = f"{record.reverse_voltage:g}V"
    land = record.land_pattern if record is not None else "UNKNOWN"
    return Part(ref, value, land, tuple(sorted(fields.items())))


def _changed(spec: Spec, text: str) -> Spec:
    """The spec with one key changed, or one waiver added."""
    key, _, value = text.strip().partition(" ")
    value = value.strip()
    if key == "waive":
        rule, *parts = value.split()
        waiver = Waiver(rule, tuple(parts), "for the example", Place(spec.file, 1, 1))
        return replace(spec, waive=(*spec.waive, waiver))
    kind = SPEC_KEYS.get(key)
    if kind is None:
        raise ExampleError(f"spec key {key!r} cannot be changed in an example")
    if kind == "whole":
        return replace(spec, channels=int(value), jacks=Jacks(int(value), int(value)))
    if key == "normalling":
        return replace(spec, normalling=value)
    section, _, name = key.partition(".")
    held = getattr(spec, section)
    if kind == "span":
        low, high = parse_span(value)
        changed = replace(held, low=low, high=high)
    elif kind == "count":
        changed = replace(held, **{name: int(value)})
    elif kind == "flag":
        changed = replace(held, **{name: value == "true"})
    else:
        changed = replace(held, **{name: value if kind == "word" else parse_quantity(value, kind)})
    return replace(spec, **{section: changed})


# --- the rules' own pages -------------------------------------------------------------------------


def headings(rule: Rule) -> dict[str, str]:
    """The text under each docstring heading of a rule; the summary line under ``""``."""
    out: dict[str, list[str]] = {"": []}
    at = ""
    for line in (inspect.getdoc(type(rule)) or "").splitlines():
        if line.endswith(":") and line[:-1] in HEADINGS:
            at = line[:-1]
            out[at] = []
        else:
            out[at].append(line.strip())
    return {name: "\n".join(lines).strip() for name, lines in out.items()}


def rule_page(name: str, rules: Sequence[Rule] | None = None) -> str:
    """Everything there is to read about one rule.

    Parameters
    ----------
    name
        The rule's name.
    rules
        Where it is looked for; all rules by default.

    Raises
    ------
    KeyError
        When there is no such rule; the message gives the nearest name.
    """
    from modgen.rules.engine import discover, nearest

    chosen = discover() if rules is None else rules
    found = next((rule for rule in chosen if rule.name == name), None)
    if found is None:
        near = nearest(name, [rule.name for rule in chosen])
        raise KeyError(f"there is no rule {name!r}" + (f"; did you mean {near!r}?" if near else ""))
    needs = "; needs the spec" if found.needs_spec else ""
    lines = [f"{found.name} ({found.subject}, {found.level}{needs})", ""]
    for heading, text in headings(found).items():
        if heading:
            lines += ["", heading]
        lines += [("    " if heading else "") + line for line in text.splitlines()]
    return "\n".join(lines) + "\n"


def rule_table(rules: Sequence[Rule] | None = None) -> str:
    """One line a rule, under its subject: name, level and summary."""
    from modgen.rules.engine import SUBJECTS, discover

    chosen = discover() if rules is None else rules
    width = max(len(rule.name) for rule in chosen)
    lines: list[str] = []
    for subject in SUBJECTS:
        members = [rule for rule in chosen if rule.subject == subject]
        if members:
            lines += ([""] if lines else []) + [subject]
            lines += [
                f"  {rule.name:<{width}}  {rule.level:<7}  {headings(rule)[''].splitlines()[0]}" for rule in members
            ]
    return "\n".join(lines) + "\n"
