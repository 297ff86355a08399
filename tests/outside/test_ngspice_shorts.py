"""Shorted outputs in ngspice, with the emitted deck's amplifier, against the analysis.

The analysis lets the amplifier drive right to its rail until its limit stops it. The deck's amplifier has an output
resistance, keeps off its rails, and limits softly. So two things are held: with the first two at nothing the
currents and powers agree; with the catalogue's figures the simulated ones stay below the analysis.
"""

from __future__ import annotations

import re
import shutil
import subprocess
import tempfile
from dataclasses import replace
from functools import cache
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
SPECS = ("four-lane-pitch-lag", "five-lane-fanout-lag")

pytestmark = pytest.mark.source("ngspice 39: operating point of the emitted deck with an output shorted")


class Changed:
    """A catalogue whose amplifiers limit at their typical current, and perhaps reach their rails without resistance."""

    def __init__(self, catalogue, ideal):
        self.catalogue, self.ideal = catalogue, ideal

    def get(self, key):
        record = self.catalogue.get(key)
        if record is None or record.kind != "amplifier":
            return record
        record = replace(record, short_circuit_most=record.short_circuit_typical)
        return replace(record, output_resistance=1.0, swing_low=0.0, swing_high=0.0) if self.ideal else record


@cache
def job(spec: str, ideal: bool):
    from modgen.chain import run

    found = run(ROOT / "specs" / f"{spec}.yaml")
    return replace(found, catalogue=Changed(found.catalogue, ideal))


def simulate(program, spec, ideal, volts, resistor, far, source):
    """(rail, amplifier's output, current) of the first lane, its first output tied to a voltage [V, V, A]."""
    from modgen.analysis import Board
    from modgen.outputs.spice import Nodes, element, spice_deck

    found = job(spec, ideal)
    board = Board.of(found.netlist, found.catalogue)
    lane, nodes = board.channels[0], Nodes(found.netlist, board.ground)
    feed = lane.feeds[0]
    text = spice_deck(found).decode().split(".options")[0]
    text = re.sub(r"^VSIGNAL .*$", f"VSIGNAL signal 0 DC {volts:g}", text, flags=re.MULTILINE)
    name = element("R", feed.resistor)
    text, count = re.subn(rf"^({name} \S+ \S+) \S+$", rf"\g<1> {resistor:g}", text, flags=re.MULTILINE)
    assert count == 1
    rail, drive, out = nodes.net("V+"), nodes.net(lane.second.output), nodes.net(feed.net)
    lines = [
        f"VFAR far 0 DC {far:g}",
        f"RFAR {out} far {source + 1e-3:g}",
        ".options noinit reltol=1e-6 abstol=1e-13 vntol=1e-7 itl1=1000",
        ".control",
        "op",
        f"print v({rail}) v({drive}) v({out})",
        "quit",
        ".endc",
        ".end",
    ]
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "short.cir").write_text(text + "\n".join(lines) + "\n", "ascii")
        done = subprocess.run(
            [program, "-b", "short.cir"], cwd=folder, capture_output=True, text=True, timeout=120, check=True
        )
    seen = {node: float(value) for node, value in re.findall(r"^v\((\S+)\) = (\S+)$", done.stdout, re.MULTILINE)}
    return seen[rail], seen[drive], (seen[drive] - seen[out]) / resistor


def analysed(spec, ideal, resistor, rail):
    """Both shorts of the first output, the rails where the simulator has them."""
    from modgen.analysis import Board
    from modgen.analysis.power import rail_powers
    from modgen.analysis.shorts import shorts

    found = job(spec, ideal)
    ref = Board.of(found.netlist, found.catalogue).channels[0].feeds[0].resistor
    parts = tuple(replace(p, value=f"{resistor:g}") if p.ref == ref else p for p in found.netlist.parts)
    board = Board.of(replace(found.netlist, parts=parts), found.catalogue)
    powers = tuple(
        replace(p, protected_high=rail if p.name == "V+" else -rail)
        for p in rail_powers(board, found.spec.rails, found.spec.signal)
    )
    ours = [s for s in shorts(board, powers, found.spec.signal) if s.resistor == ref]
    return {s.against: s for s in ours}, found.spec.signal.source


#: well below the current limit, and far into it
@pytest.mark.parametrize("resistor", [1000.0, 470.0, 22.0])
@pytest.mark.parametrize("against", ["0 V", "another output"])
@pytest.mark.parametrize("spec", SPECS)
def test_currents_agree_for_an_amplifier_that_reaches_its_rail(spec, against, resistor):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the short is not simulated here")
    _, source = analysed(spec, True, resistor, 12.0)
    through = 0.0 if against == "0 V" else source
    rail, far = 12.0, 0.0
    # the neighbour stands at the opposite of our own rail, which moves a little with the current
    for _ in range(3):
        far = 0.0 if against == "0 V" else -rail
        rail, _, current = simulate(program, spec, True, 12.0, resistor, far, through)
    short = analysed(spec, True, resistor, rail)[0][against]
    # what is left is 1 ohm of output resistance, and the tanh at the limit
    assert current == pytest.approx(short.current_most, rel=0.005)
    assert current**2 * resistor == pytest.approx(short.measured, rel=0.01)


@pytest.mark.parametrize("spec", SPECS)
def test_the_real_amplifier_stays_below_the_analysis(spec):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the short is not simulated here")
    for resistor in (1000.0, 220.0, 22.0):
        rail, drive, current = simulate(program, spec, False, 12.0, resistor, 0.0, 0.0)
        short = analysed(spec, False, resistor, rail)[0]["0 V"]
        assert current < short.current_most
        if resistor == 1000.0:
            # 3 V below the rail, 200 ohm inside; nearer to its limit the deck's amplifier gives less still
            assert current == pytest.approx((rail - 3.0) / 1200.0, rel=0.02)
        assert (rail - drive) * current < short.package


@pytest.mark.parametrize("share", [0.25, 0.5, 0.75])
def test_the_stage_gets_hottest_at_half_the_voltage(share):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the short is not simulated here")
    # a follower with its resistor outside the loop drives whatever its input says into the short
    rail, drive, current = simulate(program, "five-lane-fanout-lag", True, share * 11.3, 1000.0, 0.0, 0.0)
    short = analysed("five-lane-fanout-lag", True, 1000.0, rail)[0]["0 V"]
    assert (rail - drive) * current == pytest.approx(4 * share * (1 - share) * short.package, rel=0.02)
