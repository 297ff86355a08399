"""The lane by hand of design section 11, with the amplifier that the shipped catalogue sells."""

from __future__ import annotations

import pytest

from modgen.analysis import analyse
from modgen.catalogue import load_catalogue


@pytest.fixture
def found(lanes, spec):
    bench = lanes(amplifier_key="tl072-dip8").exact()
    shelf = bench.shelf
    shelf.records["tl072-dip8"] = load_catalogue([]).get("tl072-dip8")
    return analyse(bench.netlist(), shelf, spec)


def test_scale_but_for_the_output_resistor_is_two_cents_an_octave(found):
    cents = {t.name: 1200 * t.worst for t in found.accuracy.terms if t.kind == "scale"}
    output = cents.pop("output resistor into load")
    # 1.20 + 0.76 + 0.10 + 0.04
    assert sum(cents.values()) == pytest.approx(2.10, abs=0.02)
    assert output == pytest.approx(11.88, abs=0.005)


def test_offset_cold_and_hot(found):
    assert 1e3 * found.accuracy.offset_worst == pytest.approx(20.2, abs=0.05)
    # 2 x (10 mV + 10 uV/K x 40 K), and 3.2 nA through a megohm
    assert 1e3 * found.accuracy.offset_hot == pytest.approx(20.8 + 3.2, abs=0.1)


def test_headroom(found):
    room = {(h.stage, h.subject): h for h in found.headroom}
    assert room["input buffer", "common mode"].can_high == pytest.approx(7.1)
    assert room["input buffer", "common mode"].margin == pytest.approx(2.1)
    assert room["output buffer", "swing"].can_high == pytest.approx(8.1)


def test_current(found):
    assert [r.current_typical for r in found.rails] == pytest.approx([2.8e-3, 2.8e-3])
    assert [r.current_max for r in found.rails] == pytest.approx([5.0e-3 + 5 / 101e3] * 2)
