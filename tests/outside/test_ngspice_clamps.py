"""An unpowered module fed by powered neighbours: currents in ngspice against the analysis.

The emitted deck without its supply, its amplifiers replaced by what is left of them: a junction from every input
and output to both supply pins, with 0.6 V at 1 mA. The analysis takes 0.6 V at every current and the supply pins at
0 V; with the pins held there the currents agree within 1 % (a junction has some 60 mV more at 10 mA), and with the
rails loaded by the amplifiers' quiescent current instead they are less, since the rails then rise.
"""

from __future__ import annotations

import math
import re
import shutil
import subprocess
import tempfile
from dataclasses import replace
from functools import cache
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
SPECS = ("four-lane-pitch-lag", "five-lane-fanout-lag", "eight-lane-shared-lag")

pytestmark = pytest.mark.source("ngspice 39: operating point of the emitted deck without supply, inputs driven")


@cache
def exact(spec: str):
    """The job, and its board with the tolerances of all parts at nothing."""
    from modgen.analysis import Board
    from modgen.chain import run

    job = run(ROOT / "specs" / f"{spec}.yaml")
    parts = tuple(
        replace(part, fields=tuple((k, "0%" if k == "tolerance" else v) for k, v in part.fields))
        for part in job.netlist.parts
    )
    return job, Board.of(replace(job.netlist, parts=parts), job.catalogue)


def simulate(program, spec, volts, plugged, rails):
    """Current of each plugged socket [A], and of each resistor by reference, with rails to 0 V through ``rails``."""
    from modgen.outputs.spice import Nodes, element, spice_deck

    job, board = exact(spec)
    nodes = Nodes(job.netlist, board.ground)
    text = spice_deck(job).decode().split(".options")[0]
    # no supply, no loads, no sources but those of this state, no amplifiers
    text = re.sub(r"^(VSIGNAL|Vnbus|RLOAD_|RSOURCE_|X)[^\n]*\n", "", text, flags=re.MULTILINE)
    lines = [".model JUNCTION D(IS=8.4e-14 N=1)"]
    lines += [f"RHOLD{nodes.net(net)} {nodes.net(net)} 0 {rails:g}" for net in ("V+", "V-")]
    for section in board.sections:
        for n, net in enumerate(dict.fromkeys((section.output, section.inverting, section.noninverting))):
            if net and net != board.ground:
                pin = nodes.net(net)
                lines.append(f"DUP{section.name}{n} {pin} {nodes.net(section.positive)} JUNCTION")
                lines.append(f"DLOW{section.name}{n} {nodes.net(section.negative)} {pin} JUNCTION")
    for jack in board.jacks:
        if jack.tip is None:
            continue
        if jack.ref in plugged:
            lines.append(f"V{jack.ref} {nodes.net(jack.tip)} 0 DC {volts:.9g}")
        elif jack.switch and jack.switch != jack.tip:
            lines.append(f"RCONTACT{jack.ref} {nodes.net(jack.tip)} {nodes.net(jack.switch)} 1e-3")
    wanted = {f"i(v{ref.lower()})": ref for ref in plugged}
    lines += [".options noinit reltol=1e-6 abstol=1e-13 itl1=1000 gmin=1e-15", ".control", "op"]
    lines += [f"print {name}" for name in wanted]
    resistors = [ref for lane in board.channels for ref in (*lane.input_series, *lane.output_series, lane.feedback)]
    ends = {}
    for ref in filter(None, resistors):
        one, two = (nodes.pin(ref, pin) for pin in ("1", "2"))
        ends[ref] = (one, two)
        lines.append(f"let across_{element('R', ref)} = v({one})-v({two})")
        lines.append(f"print across_{element('R', ref)}")
    lines += ["quit", ".endc", ".end"]
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "clamp.cir").write_text(text + "\n".join(lines) + "\n", "ascii")
        done = subprocess.run(
            [program, "-b", "clamp.cir"], cwd=folder, capture_output=True, text=True, timeout=120, check=True
        )
    seen = {name.lower(): float(value) for name, value in re.findall(r"^(\S+) = (\S+)$", done.stdout, re.MULTILINE)}
    sockets = {ref: abs(seen[name]) for name, ref in wanted.items()}
    through = {ref: abs(seen[f"across_{element('R', ref)}".lower()]) / board.resistance(ref).nominal for ref in ends}
    return sockets, through


def analysed(spec):
    from modgen.analysis.supply_states import powered_off

    job, board = exact(spec)
    return powered_off(board, job.spec.rails)


def ngspice() -> str:
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the state is not simulated here")
    return program


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize("spec", SPECS)
def test_currents_into_inputs_outputs_and_rails(spec, sign):
    program = ngspice()
    _, board = exact(spec)
    results = analysed(spec)
    volts = sign * results[0].voltage
    _, through = simulate(program, spec, volts, tuple(j.ref for j in board.jacks), 1e-3)
    inputs = [r for r in results if r.subject in ("input", "output")]
    assert len(inputs) >= 2 * len(board.channels)
    for result in inputs:
        (ref,) = result.parts[1:]
        assert through[ref] == pytest.approx(result.measured, rel=0.01), result
    total = math.fsum(through[ref] for lane in board.channels for ref in lane.input_series)
    for result in (r for r in results if r.subject == "rail"):
        assert total == pytest.approx(result.measured, rel=0.01)


@pytest.mark.parametrize("spec", SPECS)
def test_current_of_a_socket_with_the_others_empty(spec):
    program = ngspice()
    results = {r.name: r for r in analysed(spec) if r.subject == "jack"}
    _, board = exact(spec)
    assert sorted(results) == sorted(j.ref for j in board.jacks)
    for name in list(results)[:4]:
        sockets, _ = simulate(program, spec, results[name].voltage, (name,), 1e-3)
        assert sockets[name] == pytest.approx(results[name].measured, rel=0.01), name


@pytest.mark.parametrize("spec", SPECS)
def test_rails_that_rise_take_less(spec):
    program = ngspice()
    _, board = exact(spec)
    results = [r for r in analysed(spec) if r.subject == "input"]
    # the amplifiers as one resistor that draws their quiescent current at the full supply
    rail = next(r for r in analysed(spec) if r.subject == "rail")
    load = rail.voltage / rail.limit
    plugs = tuple(ref for lane in board.channels for ref in lane.input_jacks)
    _, through = simulate(program, spec, rail.voltage, plugs, load)
    for result in results:
        if result.parts[1] in {ref for lane in board.channels for ref in lane.input_series}:
            assert 0.3 * result.measured < through[result.parts[1]] < result.measured
