"""The netlist text, read by programs that are not ours."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from modgen.chain import run
from modgen.netlist import Netlist
from modgen.outputs.model import Job

#: fields the library adds to those of the conventions
ADDED = {"Description", "Footprint", "Datasheet", "SKiDL Tag"}

SPECS = {
    "two rails": ("rails: {positive: 12 V, negative: -12 V}",),
    "single supply, extra outputs": (
        "rails: {positive: 12 V, negative: 0 V}",
        "signal: {span: 3 V to 6 V}",
        "channels: 1",
        "jacks: 3",
    ),
}


@pytest.fixture(params=SPECS.values(), ids=SPECS)
def job(request: pytest.FixtureRequest, write_spec: Callable[..., Path]) -> Job:
    """One module, computed from its spec."""
    return run(write_spec(*request.param))


def parts_of(netlist: Netlist) -> dict[str, tuple[str, str, str, dict[str, str]]]:
    """What each part says: value, land pattern, sheet, fields."""
    return {p.ref: (p.value, p.land_pattern, p.sheet, dict(p.fields)) for p in netlist.parts}


def nets_of(netlist: Netlist) -> dict[str, set[tuple[str, str]]]:
    """The pins on each net."""
    return {net.name: set(net.pins) for net in netlist.nets}


@pytest.mark.source("PyPI kinparse 1.2.4, parse_netlist(text): an S-expression netlist parser on pyparsing")
@pytest.mark.filterwarnings("ignore::DeprecationWarning")
def test_kinparse_reads_the_same_parts_and_nets(job: Job) -> None:
    import kinparse

    found = kinparse.parse_netlist(job.netlist_text)
    parts = {
        part.ref: (
            part.value,
            part.footprint,
            part.sheetpath.names,
            {field.name: field.value for field in part.fields if field.name not in ADDED},
        )
        for part in found.parts
    }
    nets = {net.name: {(pin.ref, pin.num) for pin in net.pins} for net in found.nets}
    assert len(found.parts) == len(job.netlist.parts)
    assert parts == parts_of(job.netlist)
    assert nets == nets_of(job.netlist)


@pytest.mark.source("PyPI simp_sexp 0.3.1, Sexp(text).search(path): the whole file as nested lists")
def test_simp_sexp_reads_the_same_parts_and_nets(job: Job) -> None:
    from simp_sexp import Sexp

    root = Sexp(job.netlist_text)

    def text(item: Sexp, path: str) -> str:
        return str(item.search(path)[0][1])

    components, nets = root.search("/export/components")[0], root.search("/export/nets")[0]
    parts = {
        text(comp, "/comp/ref"): (
            text(comp, "/comp/value"),
            text(comp, "/comp/footprint"),
            text(comp, "/comp/sheetpath/names"),
            {
                text(field, "/field/name"): str(field[2])
                for field in comp.search("/comp/fields/field")
                if text(field, "/field/name") not in ADDED
            },
        )
        for comp in components[1:]
    }
    pins = {
        text(net, "/net/name"): {(text(node, "/node/ref"), text(node, "/node/pin")) for node in net.search("/net/node")}
        for net in nets[1:]
    }
    assert len(components) - 1 == len(job.netlist.parts)
    assert parts == parts_of(job.netlist)
    assert pins == nets_of(job.netlist)
