"""What is relied on in the library: when a new release takes it away, this says so by name."""

from __future__ import annotations

import importlib
import time
from collections.abc import Callable
from dataclasses import replace

import pytest
import simp_sexp
from hypothesis import given, settings
from hypothesis import strategies as st

from modgen.circuit import build, speed
from modgen.circuit import library as library_module
from modgen.circuit.library import library
from modgen.circuit.text import FIELDS, number
from modgen.design.model import Design

build_module = importlib.import_module("modgen.circuit.build")


def test_version() -> None:
    with library() as skidl:
        assert skidl.__version__.startswith("3.0.")


@pytest.mark.parametrize(
    ("owner", "names"),
    [
        ("", "Circuit Group Net Part Pin POWER SKIDL KICAD8 erc_logger logger"),
        ("logger", "rt_logger erc_logger active_logger"),
        (
            "Circuit",
            "ERC get_nets check_tags check_for_empty_footprints generate_netlist no_files activate deactivate",
        ),
        ("Net", "connect drive pins name ERC"),
        ("Part", "ref value hiertuple check_tag ERC"),
        ("Pin", "types"),
    ],
)
def test_names(owner: str, names: str) -> None:
    with library() as skidl:
        holder = getattr(skidl, owner) if owner else skidl
        assert [name for name in names.split() if not hasattr(holder, name)] == []


def test_names_of_a_circuit() -> None:
    with library() as skidl:
        circuit = skidl.Circuit()
        names = ("nodes", "root", "NC", "nets", "parts", "erc_list", "erc_assertion_list", "active_node")
        assert [name for name in names if not hasattr(circuit, name)] == []
        # the set of blocks is used through these two only
        assert list(circuit.nodes) == [circuit.root]
        assert hasattr(circuit.nodes, "add")
        # the pins of a net are put in order here before the check
        assert skidl.Net("N", circuit).connect().traversal._fields == ("nets", "pins")


def test_pin_kinds() -> None:
    with library() as skidl:
        assert set(build_module._PIN_KINDS.values()) <= {kind.name for kind in skidl.Pin.types}


def test_stand_ins_are_in_place() -> None:
    """The modules through which side effects pass are the private ones where the library uses them."""
    with library() as skidl:
        writer = importlib.import_module("skidl.tools.kicad8.gen_netlist")
        assert skidl.config_.os.makedirs("anything") is None
        assert skidl.scriptinfo.inspect.stack()[0].lineno == 0
        assert skidl.pin.random.randint.__self__ is not None
        assert skidl.logger.logging.FileHandler is library_module._Discard
        assert writer.time.strftime("%Y") == ""
        assert issubclass(writer.Sexp, simp_sexp.Sexp)
        assert writer.Sexp is not simp_sexp.Sexp
        assert skidl.skidl.builtins.NC is skidl.skidl.builtins.default_circuit.NC


def test_no_field_name_is_an_attribute_of_the_librarys_parts(two: Design) -> None:
    """A field called like an attribute would take its place, and corrupt the part without a word."""
    with library() as skidl:
        made = skidl.Part(name="x", tool=skidl.SKIDL, dest=skidl.TEMPLATE, pins=[skidl.Pin(num="1", name="1")])
        assert [name for name in FIELDS if hasattr(made, name)] == []
    used = {name for part in build(two).netlist.parts for name, _ in part.fields}
    assert used == set(FIELDS)


def test_the_shortcuts_change_nothing(two: Design, monkeypatch: pytest.MonkeyPatch) -> None:
    """The library's own ways, slow as they are, give the same text and the same messages."""
    parts = [replace(p, pins=(("1", "LONELY"), *p.pins[1:])) if p.ref == "R1" else p for p in two.parts]
    faulty = replace(two, parts=tuple(parts))
    quick = build(faulty)
    assert quick.netlist.library_messages

    class Known:
        """The library's circuit as it comes, but for the order of its blocks."""

    def plain(skidl: object) -> object:
        circuit = skidl.Circuit()  # type: ignore[attr-defined]
        circuit.no_files = True
        nodes = speed._OrderedNodes()
        nodes.add(circuit.root)
        circuit.nodes = nodes
        # its root block cannot have a tag, and would be complained about
        circuit.root.check_tag = lambda **kwargs: True
        return circuit

    monkeypatch.setattr(build_module, "fast_circuit", plain)
    with library():
        writer = importlib.import_module("skidl.tools.kicad8.gen_netlist")
        monkeypatch.setattr(writer.Sexp, "to_str", simp_sexp.Sexp.to_str)
        assert build(faulty) == quick


words = st.text(st.characters(codec="utf-8", exclude_categories=["C", "Z"], exclude_characters="\\()'\" "), min_size=1)
lists = st.recursive(
    st.lists(words | st.integers(), max_size=3), lambda inner: st.lists(words | inner, max_size=3), max_leaves=12
)


@settings(max_examples=60, deadline=None)
@given(lists)
def test_the_printer_prints_what_the_librarys_prints(inner: list[object]) -> None:
    items = ["head", *inner, ["empty"], ["two words", 'a "b" (c)']]
    plain, quick = simp_sexp.Sexp(items), library_module._private_sexp().Sexp(items)
    for made in (plain, quick):
        made.add_quotes(lambda found: bool(found))
    assert quick.to_str() == plain.to_str()
    assert quick.to_str(break_inc=0) == plain.to_str(break_inc=0)


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.01, "0.01"), (1.0, "1"), (63.0, "63"), (0.25, "0.25"), (0.0, "0"), (7.000000000000001, "7"), (100.0, "100")],
)
def test_number(value: float, text: str) -> None:
    assert number(value) == text


def test_sixty_four_channels_take_time_with_their_number(design_of: Callable[..., Design]) -> None:
    small, large = design_of(channels=16), design_of(channels=64)
    build(small)

    def seconds(design: Design) -> float:
        best = float("inf")
        for _ in range(2):
            start = time.process_time()
            build(design)
            best = min(best, time.process_time() - start)
        return best

    # 0.1 s and 0.5 s on an idle machine of two cores; the bounds leave room for a slower one
    assert seconds(large) < 2.5
    assert seconds(large) < 9 * seconds(small)
