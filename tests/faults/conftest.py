"""Valid modules, and every netlist that has one fault in it.

A fault is made in the netlist alone, as it would come back from a layout editor: nothing of the design or of the
rules has a say in what counts as one, nor in what a finding must name.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace
from functools import cached_property
from itertools import combinations
from pathlib import Path
from types import MappingProxyType

import pytest

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Amplifier, Capacitor, Control, Resistor
from modgen.catalogue.records import Part as Record
from modgen.circuit.plan import plan_of
from modgen.design import make_design
from modgen.netlist.model import Net, Netlist, Part
from modgen.netlist.order import sorted_nets, sorted_parts
from modgen.spec import read_spec
from modgen.spec.model import Spec
from modgen.units import read_value, value_text

#: ratings that capacitors are sold in [V]. Source: IEC 60063 R5 rounded, as every maker lists them.
RATINGS = (2.5, 4.0, 6.3, 10.0, 16.0, 25.0, 35.0, 50.0, 63.0, 100.0)
SUPPLIES = ("0V", "BUS+", "BUS-", "V+", "V-")

#: what each spec says besides its name: both mounts, dual and quad packages, every regime of sockets, one and two
#: supplies, the output resistor inside and outside the loop, an idle section with and without a resistor
MODULES = {
    "quad, through-hole": "channels: 2\njacks: 4\nrails: {positive: 12 V, negative: -12 V}\n"
    "glide: {shortest: 5 ms, longest: 1 s}",
    "quad and dual, surface": "channels: 3\njacks: 6\nrails: {positive: 15 V, negative: -15 V}\n"
    "glide: {shortest: 10 ms, longest: 1 s}\nbuild: {mount: surface}",
    "dual, through-hole, inside the loop": "channels: 2\njacks: 4\nrails: {positive: 12 V, negative: -12 V}\n"
    "glide: {shortest: 10 ms, longest: 1 s}\nbuild: {amplifier: OPAx134}\noutput: {protection: inside}",
    "chained pitch, inside the loop": "channels: 2\njacks: 4\nnormalling: chain\n"
    "rails: {positive: 12 V, negative: -12 V}\nglide: {shortest: 5 ms, longest: 1 s}\nsignal: {pitch: true}",
    "single 12 V": "channels: 2\njacks: 4\nrails: {positive: 12 V, negative: 0 V}\n"
    "glide: {shortest: 20 ms, longest: 1 s}\nsignal: {span: 0 V to 5 V}",
    "single 5 V, surface, idle sections": "channels: 3\njacks: 6\nrails: {positive: 5 V, negative: 0 V}\n"
    "glide: {shortest: 20 ms, longest: 1 s}\nsignal: {span: 0 V to 3 V}\nbuild: {mount: surface}",
    "chained, shared input, extra output": "channels: 3\njacks: {inputs: 2, outputs: 4}\nnormalling: chain\n"
    "rails: {positive: 12 V, negative: -12 V}\nglide: {shortest: 5 ms, longest: 2 s}",
    "electrolytic, idle sections through resistors": "channels: 3\njacks: 6\n"
    "rails: {positive: 12 V, negative: -12 V}\nglide: {shortest: 50 ms, longest: 1 s}\n"
    "build: {capacitor: electrolytic, amplifier: LM358}\naccuracy: {offset: 1 V}",
}

#: only in the whole matrix
MORE_MODULES = {
    "two ranges": "channels: 2\njacks: 4\nrails: {positive: 12 V, negative: -12 V}\n"
    "glide: {shortest: 10 ms, longest: 1 s, ranges: 2}",
    "pitch, surface, inside the loop": "channels: 2\njacks: 4\nrails: {positive: 15 V, negative: -15 V}\n"
    "glide: {shortest: 10 ms, longest: 1 s}\nsignal: {pitch: true}\nbuild: {mount: surface}",
    "worst case": "channels: 1\njacks: 2\nrails: {positive: 12 V, negative: -12 V}\n"
    "glide: {shortest: 20 ms, longest: 1 s, cover: worst-case}",
    "eight channels": "channels: 8\njacks: 16\nrails: {positive: 12 V, negative: -12 V}\n"
    "glide: {shortest: 10 ms, longest: 2 s}",
}


#: modules of quad packages alone: where channels are odd in number, two sections idle
QUADS = ("single 5 V, surface, idle sections", "electrolytic, idle sections through resistors")


@dataclass(frozen=True)
class Module:
    """A module as it should be."""

    name: str
    spec: Spec
    netlist: Netlist
    records: dict[str, Record]

    @cached_property
    def places(self) -> dict[str, dict[str, str]]:
        """Pins of every part, with the net of each that is connected."""
        out: dict[str, dict[str, str]] = {part.ref: {} for part in self.netlist.parts}
        for net in self.netlist.nets:
            for ref, pin in net.pins:
                out[ref][pin] = net.name
        return out

    def record(self, part: Part) -> Record:
        return self.records[part.field("part")]


@dataclass(frozen=True)
class Fault:
    """One netlist with one fault in it, and what a finding must name at least one of."""

    kind: str
    name: str
    netlist: Netlist
    parts: tuple[str, ...]
    nets: tuple[str, ...] = ()
    #: records of parts that no catalogue lists, as a builder's own file could
    records: dict[str, Record] = field(default_factory=dict, hash=False)


@dataclass(frozen=True)
class Shelf:
    """The catalogue with a few parts more."""

    base: object
    more: dict[str, Record]

    def get(self, key: str) -> Record | None:
        return self.more.get(key) or self.base.get(key)  # type: ignore[attr-defined]


@pytest.fixture(scope="session")
def catalogue():
    from modgen.catalogue import load_catalogue

    return load_catalogue()


@pytest.fixture(scope="session")
def shelf(catalogue) -> Callable[[dict[str, Record]], Shelf]:
    return lambda more: Shelf(catalogue, more)


@pytest.fixture(scope="session")
def module_of(catalogue, tmp_path_factory) -> Callable[[str], Module]:
    """One of the modules by its name."""
    folder: Path = tmp_path_factory.mktemp("modules")

    def make(name: str) -> Module:
        path = folder / f"{name.replace(' ', '-')}.yaml"
        path.write_text(f"module: {name}\n{(MODULES | MORE_MODULES)[name]}\n", encoding="utf-8")
        spec = read_spec(path)
        parts = catalogue.parts
        if name in QUADS:
            parts = {key: part for key, part in parts.items() if getattr(part, "sections", 4) == 4}
        design = make_design(spec, Catalogue(MappingProxyType(dict(parts))))
        netlist = replace(plan_of(design, {}).netlist, library_messages=())
        keys = {part.field("part") for part in netlist.parts}
        return Module(name, spec, netlist, {key: catalogue.get(key) for key in sorted(keys)})

    return make


@pytest.fixture(scope="session")
def module_names() -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Names of the modules that every run looks at, and of those that only the whole matrix does."""
    return tuple(MODULES), tuple(MORE_MODULES)


@pytest.fixture(scope="session")
def faults_of(catalogue) -> Callable[..., list[Fault]]:
    """Every fault of a module; of those that are alike but for the number of the channel only the first."""

    def make(module: Module, *, alike: bool = False) -> list[Fault]:
        seen: set[tuple[str, str]] = set()
        out = []
        for maker in MAKERS:
            for pattern, fault in maker(module, catalogue):
                mark = (fault.kind, _without_channels(pattern))
                if alike or mark not in seen:
                    seen.add(mark)
                    out.append(fault)
        return out

    return make


# --- making one netlist of another -----------------------------------------------------------------


def _rewired(netlist: Netlist, moved: dict[tuple[str, str], str | None]) -> Netlist:
    """The netlist with pins on other nets, or on none."""
    nets: dict[str, list[tuple[str, str]]] = {net.name: [p for p in net.pins if p not in moved] for net in netlist.nets}
    for pin, name in moved.items():
        if name is not None:
            nets.setdefault(name, []).append(pin)
    return replace(netlist, nets=sorted_nets(Net(name, tuple(sorted(pins))) for name, pins in nets.items() if pins))


def _without(netlist: Netlist, ref: str) -> Netlist:
    pins = {(r, p): None for net in netlist.nets for r, p in net.pins if r == ref}
    kept = sorted_parts(part for part in netlist.parts if part.ref != ref)
    return replace(_rewired(netlist, dict(pins)), parts=kept)


def _bridged(netlist: Netlist, one: str, two: str) -> Netlist:
    """Two nets as one, under the name of a supply where there is one."""
    order = sorted((one, two), key=lambda name: (name not in SUPPLIES, name))
    pins = tuple(sorted((*netlist.by_net[one].pins, *netlist.by_net[two].pins)))
    others = [net for net in netlist.nets if net.name not in (one, two)]
    return replace(netlist, nets=sorted_nets((*others, Net(order[0], pins))))


def _replaced(netlist: Netlist, part: Part) -> Netlist:
    return replace(netlist, parts=sorted_parts(part if part.ref == p.ref else p for p in netlist.parts))


def _with_fields(changed: Part, **texts: str) -> Part:
    fields = {**dict(changed.fields), **texts}
    return replace(changed, fields=tuple(sorted(fields.items())))


def _local(nets: list[str | None]) -> tuple[str, ...]:
    """Nets that belong to one place; a supply is everywhere and names nothing."""
    return tuple(dict.fromkeys(net for net in nets if net and net not in SUPPLIES))


def _without_channels(text: str) -> str:
    """A pattern in which the first channel that is named is called a, the next b."""
    letters: dict[str, str] = {}
    return re.sub(r"CH(\d+)_", lambda m: f"CH{letters.setdefault(m[1], chr(97 + len(letters)))}_", text)


# --- the kinds of fault ----------------------------------------------------------------------------

Made = Iterator[tuple[str, Fault]]


def detached_pins(module: Module, catalogue) -> Made:
    for part in module.netlist.parts:
        for pin, net in module.places[part.ref].items():
            bad = _rewired(module.netlist, {(part.ref, pin): None})
            end = pin if module.record(part).kind not in ("amplifier", "header") else ""
            around = ",".join(sorted(module.places[part.ref].values())) if part.letters not in "UJ" else ""
            yield (
                f"{part.field('role')} {end} {net} {around}",
                Fault("pin detached", f"{part.ref}.{pin} off {net}", bad, (part.ref,), _local([net])),
            )


def removed_parts(module: Module, catalogue) -> Made:
    for part in module.netlist.parts:
        nets = tuple(dict.fromkeys(module.places[part.ref].values()))
        # the part is gone: what it stood between, and whom it served, are all that can be named
        names = tuple(name for name in (part.ref, part.field("serves")) if name)
        yield (
            f"{part.field('role')} {','.join(sorted(nets))}",
            Fault("part removed", f"without {part.ref}", _without(module.netlist, part.ref), names, nets),
        )


def bridges(module: Module, catalogue) -> Made:
    seen = set()
    for part in module.netlist.parts:
        for one, two in combinations(sorted(set(module.places[part.ref].values())), 2):
            if (one, two) not in seen:
                seen.add((one, two))
                nets = (one, two) if {one, two} <= set(SUPPLIES) else _local([one, two])
                yield (
                    f"{one} {two}",
                    Fault(
                        "nets bridged",
                        f"{one} with {two}, on {part.ref}",
                        _bridged(module.netlist, one, two),
                        (part.ref,),
                        nets,
                    ),
                )


def _swapped(module: Module, pins: list[tuple[str, str]]) -> Netlist:
    (ref, one), (other, two) = pins
    nets = module.places
    return _rewired(module.netlist, {(ref, one): nets[other].get(two), (other, two): nets[ref].get(one)})


def turned_parts(module: Module, catalogue) -> Made:
    for part in module.netlist.parts:
        record = module.record(part)
        polar = record.kind == "diode" or (isinstance(record, Capacitor) and record.polarised)
        if polar:
            places = module.places[part.ref]
            kind = "diode turned" if record.kind == "diode" else "polarised capacitor turned"
            bad = _swapped(module, [(part.ref, "1"), (part.ref, "2")])
            nets = _local(list(places.values()))
            yield (
                f"{part.field('role')} {places['1']} {places['2']}",
                Fault(kind, f"{part.ref} turned", bad, (part.ref,), nets),
            )


def swapped_pairs(module: Module, catalogue) -> Made:
    for part in module.netlist.parts:
        record = module.record(part)
        if not isinstance(record, Amplifier):
            continue
        places = module.places[part.ref]

        def swap(kind: str, one: str, two: str, ref: str = part.ref, places: dict[str, str] = places) -> tuple:
            nets = _local([places[one], places[two]])
            bad = _swapped(module, [(ref, one), (ref, two)])
            return f"{places[one]} {places[two]}", Fault(kind, f"{ref}.{one} with {ref}.{two}", bad, (ref,), nets)

        yield swap("supply pair swapped", record.positive_pin, record.negative_pin)
        for _, inverting, noninverting in record.section_pins:
            yield swap("input pair swapped", inverting, noninverting)
        for (one, _, _), (two, _, _) in combinations(record.section_pins, 2):
            yield swap("output pair swapped", one, two)


def lowered_ratings(module: Module, catalogue) -> Made:
    rails = module.spec.rails
    # every capacitor of such a module can come to stand between a rail and 0 V
    need = (1 + rails.tolerance) * min(rails.positive, -rails.negative or rails.positive)
    rating = max(volts for volts in RATINGS if volts < need)
    for part in module.netlist.parts:
        record = module.record(part)
        if isinstance(record, Capacitor):
            yield _other_part(
                module,
                part,
                "capacitor rating lowered",
                f"{rating:g}V",
                replace(record, key=f"{record.key}-at-{rating:g}v", voltage=rating),
            )


def _other_part(module: Module, part: Part, kind: str, what: str, record: Record) -> tuple[str, Fault]:
    """The fault that a part of other figures is fitted: the netlist names it, and says what it is."""
    texts = {"part": record.key}
    value = part.value
    if isinstance(record, Resistor | Control):
        value = value_text(record.resistance)
    if isinstance(record, Capacitor):
        value = value_text(record.capacitance)
        texts["voltage"] = f"{record.voltage:g}V"
    changed = replace(_with_fields(part, **texts), value=value)
    nets = _local(list(module.places[part.ref].values()))
    fault = Fault(
        kind,
        f"{part.ref} {what}",
        _replaced(module.netlist, changed),
        (part.ref,),
        nets,
        {record.key: record},
    )
    pattern = f"{part.field('role')} {what} {','.join(sorted(module.places[part.ref].values()))}"
    return pattern, fault


def wrong_values(module: Module, catalogue) -> Made:
    """Ten times and a tenth, by another part and by another text for the same part."""
    for part in module.netlist.parts:
        record = module.record(part)
        name = {"resistor": "resistance", "control": "resistance", "capacitor": "capacitance"}.get(record.kind)
        if name is None:
            continue
        for factor, said in ((10.0, "x 10"), (0.1, "/ 10")):
            value = float(f"{getattr(record, name) * factor:.10g}")
            other = replace(record, key=f"{record.key}-{said.replace(' ', '')}", **{name: value})
            yield _other_part(module, part, f"value {said}", said, other)
            nets = _local(list(module.places[part.ref].values()))
            changed = _replaced(module.netlist, replace(part, value=value_text(read_value(part.value) * factor)))
            yield (
                f"{part.field('role')} {','.join(sorted(module.places[part.ref].values()))}",
                Fault(f"value text {said}, part kept", f"{part.ref} {said}", changed, (part.ref,), nets),
            )


def moved_decoupling(module: Module, catalogue) -> Made:
    packages = [part.ref for part in module.netlist.parts if module.record(part).kind == "amplifier"]
    for part in module.netlist.parts:
        serves = part.field("serves")
        for other in packages:
            if serves and other != serves:
                yield (
                    f"{serves} {other} {','.join(sorted(module.places[part.ref].values()))}",
                    Fault(
                        "decoupling moved",
                        f"{part.ref} from {serves} to {other}",
                        _replaced(module.netlist, _with_fields(part, serves=other)),
                        (part.ref, serves),
                    ),
                )


def opened_ties(module: Module, catalogue) -> Made:
    for part in module.netlist.parts:
        role, places = part.field("role"), module.places[part.ref]
        if role in ("terminator", "idle-tie"):
            # at the end on 0 V: the other one is among the detached pins too
            pin = next(pin for pin, net in places.items() if net == "0V")
            kind = "terminator opened" if role == "terminator" else "idle tie opened"
        elif role == "input-jack":
            pin, kind = "TN", "normalling contact opened"
        else:
            continue
        bad = _rewired(module.netlist, {(part.ref, pin): None})
        nets = _local(list(places.values()))
        yield (
            f"{role} {','.join(sorted(places.values()))}",
            Fault(kind, f"{part.ref}.{pin} off {places[pin]}", bad, (part.ref,), nets),
        )
    for part in module.netlist.parts:
        record = module.record(part)
        for pins in record.section_pins if isinstance(record, Amplifier) else ():
            net = module.places[part.ref][pins[2]]
            if net == "0V":  # an idle section that is tied straight
                bad = _rewired(module.netlist, {(part.ref, pins[2]): None})
                yield net, Fault("idle tie opened", f"{part.ref}.{pins[2]} off 0V", bad, (part.ref,))


def turned_headers(module: Module, catalogue) -> Made:
    for part in module.netlist.parts:
        if module.record(part).kind == "header":
            moved = {(part.ref, str(n)): module.places[part.ref].get(str(11 - n)) for n in range(1, 11)}
            yield (
                "",
                Fault(
                    "header turned",
                    f"{part.ref} turned",
                    _rewired(module.netlist, moved),
                    (part.ref,),
                    ("BUS+", "BUS-"),
                ),
            )


def wrong_types(module: Module, catalogue) -> Made:
    """Another package of the same pins: the bipolar type of the greatest bias current, and one for low voltages."""
    high = module.spec.rails.positive - module.spec.rails.negative
    records = [record for key in catalogue.parts if isinstance(record := catalogue.get(key), Amplifier)]
    for part in module.netlist.parts:
        record = module.record(part)
        if not isinstance(record, Amplifier):
            continue
        fitting = [r for r in records if (r.sections, r.mount) == (record.sections, record.mount)]
        bipolar = max((r for r in fitting if r.input == "bipolar"), key=lambda r: (r.bias_max, r.key))
        low = min(fitting, key=lambda r: (r.supply_absolute, r.key))
        for kind, other in (("bipolar type", bipolar), ("low-voltage type", low)):
            # where the module itself is of that kind it is no fault
            right = record.input == "bipolar" if kind == "bipolar type" else other.supply_absolute >= high
            if not right:
                changed = replace(_with_fields(part, part=other.key), value=other.order_code or other.type)
                nets = tuple(sorted(_local(list(module.places[part.ref].values()))))
                yield (
                    ",".join(nets),
                    Fault(
                        f"{kind} in the socket",
                        f"{part.ref} is {other.key}",
                        _replaced(module.netlist, changed),
                        (part.ref,),
                    ),
                )


MAKERS = (
    detached_pins,
    removed_parts,
    bridges,
    turned_parts,
    swapped_pairs,
    lowered_ratings,
    wrong_values,
    moved_decoupling,
    opened_ties,
    turned_headers,
    wrong_types,
)
