"""What a diode leaks with the header turned round; no shipped diode leaks too much, so one is made that does."""

from __future__ import annotations

from dataclasses import replace

import pytest

from modgen.catalogue.records import Diode
from modgen.rules.engine import discover, finding_text, judge


@pytest.fixture
def leaking(catalogue):
    """A catalogue whose 1N5819 leaks as much as asked."""

    def make(amperes: float):
        diode = catalogue.get("1n5819")
        assert isinstance(diode, Diode)
        return replace(catalogue, parts={**catalogue.parts, "1n5819": replace(diode, leakage=amperes)}, _of={})

    return make


def judged(catalogue, example):
    found = example("start from: lane\nwithout D2\nJ1 1=V- 2=V-\nD2 1n4001 1=BUS- 2=V-\nJ1 1=BUS- 2=BUS-")
    rule = next(rule for rule in discover() if rule.name == "reverse-polarity")
    return judge(found.netlist, catalogue, found.spec, [rule])


def test_more_than_the_junctions_bear_is_a_warning(leaking, example):
    # two sections at 5 mA
    (finding,) = judged(leaking(10.1e-3), example).findings
    assert finding_text(finding) == (
        "warning: D1 leaks 10.1 mA with the header turned round; the amplifiers' junctions bear 10 mA "
        "[reverse-polarity]\n"
        "    why: it flows from the rail through the supply pins of the amplifiers, the wrong way round\n"
        "    fix: fit a diode that leaks less: a silicon rectifier, or a Schottky diode of a higher reverse voltage"
    )
    assert (finding.parts, finding.key) == (("D1",), "rails.positive")


def test_just_as_much_as_they_bear_passes(leaking, example):
    report = judged(leaking(10e-3), example)
    assert not report.findings
    (checked,) = report.checked
    assert (checked.worst, checked.worst_margin) == ("D1: leaks 10 mA of 10 mA with the header turned round", 0.0)
