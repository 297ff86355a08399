"""Phase margin of both buffers in the emitted deck: the loop broken in ngspice against the analysis, within 2 degrees.

The deck's amplifier has one pole; the second one that the analysis assumes is put into the broken path, and so is
the capacitance of the inverting input. The loop is closed at d.c. by 1 GH and driven through 1 GF. Where a case
names another output resistance than the catalogue's, the deck is written for an amplifier that has it.

What remains: ngspice's amplifier also has common-mode rejection and a tanh output stage, whose slope at rest is the
output resistance; together they move the phase by some hundredths of a degree.

``ngspice/stability.txt`` keeps what the stated version gave, so that it is compared also where there is no ngspice.
To make it again after the deck or the circuits have changed on purpose:
``python tests/outside/test_ngspice_stability.py``.
"""

from __future__ import annotations

import cmath
import math
import re
import shutil
import subprocess
import sys
import tempfile
from dataclasses import dataclass, replace
from functools import cache
from itertools import pairwise
from pathlib import Path

import pytest

HERE = Path(__file__).resolve().parent
ROOT = HERE.parents[1]
KEPT = HERE / "ngspice" / "stability.txt"
#: resistor inside the loop; outside with two outputs; another amplifier on a single supply
SPECS = ("four-lane-pitch-lag", "five-lane-fanout-lag", "two-lane-bench-lag")

pytestmark = pytest.mark.source("ngspice 39: loop gain of the emitted deck; kept run in tests/outside/ngspice/")


@dataclass(frozen=True)
class Case:
    """A lane's buffer into a load (end of the control [ohm] or cable [F]), at a factor on the output resistance."""

    spec: str
    buffer: str
    load: float
    factor: float = 1.0

    def __str__(self) -> str:
        return f"{self.spec} {self.buffer} {self.load:g} {self.factor:g}"


CASES = tuple(
    Case(spec, *rest)
    for spec in SPECS
    for rest in (
        ("input", 0.0),
        ("input", 12e3),
        ("output", 0.0),
        ("output", 100e-12),
        ("output", 2e-9),
        ("output", 10e-9),
        ("output", 100e-12, 2.0),
        ("output", 10e-9, 0.5),
    )
)


class Changed:
    """A catalogue whose amplifiers have another output resistance."""

    def __init__(self, catalogue, factor):
        self.catalogue, self.factor = catalogue, factor

    def get(self, key):
        record = self.catalogue.get(key)
        if record is not None and record.kind == "amplifier":
            return replace(record, output_resistance=self.factor * record.output_resistance)
        return record


@cache
def job(spec: str, factor: float = 1.0):
    from modgen.chain import run

    found = run(ROOT / "specs" / f"{spec}.yaml")
    return replace(found, catalogue=Changed(found.catalogue, factor))


@cache
def lane(spec: str, factor: float):
    from modgen.analysis import Board

    found = job(spec, factor)
    board = Board.of(found.netlist, found.catalogue)
    return board, board.channels[0]


def expected(case: Case) -> tuple[float, float]:
    """What modgen's formulas give with the nominal values of the netlist."""
    from modgen.analysis.stability import INPUT_CAPACITANCE, SECOND_POLE
    from modgen.formulas.stability import loaded_feedback, phase_margin, sensed_feedback

    board, found = lane(case.spec, case.factor)
    section = found.first if case.buffer == "input" else found.second
    record, load = section.record, job(case.spec).spec.signal.load

    def feedback(frequency):
        ohm = record.output_resistance
        if case.buffer == "input":
            series = sum(board.resistance(ref).nominal for ref in found.isolating) + case.load
            farad = sum(board.capacitance(ref).nominal for ref in found.capacitors)
            return loaded_feedback(frequency, ohm, [(series, farad, math.inf)])
        series = [board.resistance(ref).nominal for ref in found.output_series]
        if not found.inside_loop:
            return loaded_feedback(frequency, ohm, [(r, case.load, load) for r in series])
        back, comp = board.resistance(found.feedback).nominal, board.capacitance(found.compensation).nominal
        return sensed_feedback(frequency, ohm, series[0], back, comp, case.load, load, INPUT_CAPACITANCE)

    return phase_margin(feedback, record.gain, record.gain_bandwidth, SECOND_POLE * record.gain_bandwidth)


def deck(case: Case) -> str:
    """The emitted deck with the loop of one buffer broken."""
    from modgen.analysis.stability import INPUT_CAPACITANCE, SECOND_POLE
    from modgen.outputs.spice import Nodes, spice_deck

    found = job(case.spec, case.factor)
    board, channel = lane(case.spec, case.factor)
    nodes = Nodes(found.netlist, board.ground)
    section = channel.first if case.buffer == "input" else channel.second
    text = spice_deck(found).decode().split(".options")[0]
    middle = (found.spec.signal.low + found.spec.signal.high) / 2
    text = re.sub(r"^VSIGNAL .*$", f"VSIGNAL signal 0 DC {middle:g}", text, flags=re.MULTILINE)
    turned = case.load if case.buffer == "input" else board.resistance(channel.control).nominal
    text, count = re.subn(
        rf"^({channel.control}_[AB] \S+ \S+) \S+  ; turned below$",
        rf"\g<1> {turned + 1e-6:g}",
        text,
        flags=re.MULTILINE,
    )
    assert count == 1
    back = nodes.net(section.inverting)
    text, count = re.subn(rf"^(X{section.name} \S+) \S+ ", r"\g<1> inverted ", text, flags=re.MULTILINE)
    assert count == 1
    extra = [
        f"LCLOSED {back} open 1e9",
        "CDRIVEN open probe 1e9",
        "VPROBE probe 0 DC 0 AC 1",
        "ESECOND second 0 open 0 1",
        "RSECOND second inverted 1",
        f"CSECOND inverted 0 {1 / (2 * math.pi * SECOND_POLE * section.record.gain_bandwidth):.9g}",
    ]
    if case.buffer == "output":
        extra += [f"CCABLE{n} {nodes.net(net)} 0 {case.load:g}" for n, net in enumerate(channel.output_nets)]
        if channel.inside_loop:
            extra.append(f"CINPUT {back} 0 {INPUT_CAPACITANCE:g}")
    run = [
        ".options noinit reltol=1e-4 abstol=1e-13 vntol=1e-7 itl1=500",
        ".control",
        "ac dec 100 1e4 3e7",
        f"let gain = -v({back})/v(open)",
        "wrdata loop.txt gain",
        "quit",
        ".endc",
        ".end",
    ]
    return "\n".join([text, *extra, *run]) + "\n"


def simulated(program: str, case: Case) -> tuple[float, float]:
    """Crossover and phase margin that ngspice gives."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder)
        (path / "loop.cir").write_text(deck(case), "ascii")
        subprocess.run([program, "-b", "loop.cir"], cwd=folder, capture_output=True, timeout=120, check=True)
        rows = [[float(x) for x in line.split()] for line in (path / "loop.txt").read_text().splitlines()]
    worst = (0.0, 180.0)
    for (f1, *a), (f2, *b) in pairwise(rows):
        one, two = complex(*a[:2]), complex(*b[:2])
        if (abs(one) > 1) != (abs(two) > 1):
            share = math.log(abs(one)) / math.log(abs(one) / abs(two))
            phase = math.degrees(cmath.phase(one) + share * cmath.phase(two / one))
            margin = 180 + phase if phase <= 0 else phase - 180
            worst = min(worst, (f1 * (f2 / f1) ** share, margin), key=lambda found: found[1])
    return worst


def kept() -> dict[str, tuple[float, float]]:
    rows = [line.rsplit(" ", 2) for line in KEPT.read_text("utf-8").splitlines() if not line.startswith("#")]
    return {name: (float(crossover), float(margin)) for name, crossover, margin in rows}


def compare(found: tuple[float, float], case: Case) -> None:
    crossover, margin = expected(case)
    assert found[1] == pytest.approx(margin, abs=2.0), case
    assert found[0] == pytest.approx(crossover, rel=0.03), case


@pytest.mark.parametrize("case", CASES, ids=str)
def test_ngspice_agrees_with_the_formulas(case):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the loop is not simulated here, see the kept run")
    compare(simulated(program, case), case)


@pytest.mark.parametrize("case", CASES, ids=str)
def test_the_kept_run_agrees_with_the_formulas(case):
    compare(kept()[str(case)], case)


@pytest.mark.parametrize("spec", SPECS)
def test_the_worst_of_the_analysis_is_what_ngspice_gives_there(spec):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the loop is not simulated here, see the kept run")
    from modgen.analysis.stability import stabilities

    board, channel = lane(spec, 1.0)
    for result in stabilities(board, job(spec).spec.signal)[:2]:
        buffer, section = result.stage.split()[0], channel.first
        if buffer == "output":
            section = channel.second
        case = Case(spec, buffer, result.load, result.output_resistance / section.record.output_resistance)
        crossover, margin = simulated(program, case)
        assert result.measured == pytest.approx(margin, abs=2.0), result.stage
        assert result.crossover == pytest.approx(crossover, rel=0.03), result.stage


STEP = """* Follower with a capacitor straight at its output: a second-order loop
.subckt follower inp out
BGAIN 0 pole I={gm}*(v(inp)-v(out))
RPOLE pole 0 1e6
CPOLE pole 0 {farad}
EOUT drive 0 pole 0 1
ROUT drive out {ohm}
.ends
VIN in 0 DC 0 PULSE(0 1 0 1e-12 1e-12 1 2)
XA in out follower
CLOAD out 0 {load}
.tran 1e-9 10e-6 0 1e-9
.control
run
meas tran peak max v(out)
echo PEAK $&peak
quit
.endc
.end
"""


@pytest.mark.parametrize("load", [200e-12, 1e-9, 10e-9])
def test_ngspice_steps_over_as_far_as_the_phase_margin_says(load):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the step is not simulated here")
    from modgen.formulas.stability import loaded_feedback, overshoot, phase_margin

    gain, bandwidth, ohm = 1e6, 4e6, 200.0
    _, margin = phase_margin(lambda f: loaded_feedback(f, ohm, [(0.0, load, math.inf)]), gain, bandwidth)
    farad = gain / (2 * math.pi * 1e6 * bandwidth)
    text = STEP.format(gm=gain / 1e6, farad=farad, ohm=ohm, load=load)
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "step.cir").write_text(text, "ascii")
        done = subprocess.run(
            [program, "-b", "step.cir"], cwd=folder, capture_output=True, text=True, timeout=120, check=True
        )
    peak = float(re.search(r"^PEAK (\S+)$", done.stdout, re.MULTILINE)[1])
    assert peak - 1 == pytest.approx(overshoot(margin), abs=0.005)


@pytest.mark.source("ST, TL072 data sheet rev 4, electrical characteristics: overshoot factor 10 % at 100 pF")
def test_the_published_overshoot_lies_between_one_pole_and_two():
    """The sheet says 10 % at 100 pF on the output; the model 4 % with one pole and 18 % with the second one.

    The second pole at three times the gain-bandwidth is on the safe side for this type, and its output
    resistance is from memory.
    """
    from modgen.analysis.stability import SECOND_POLE
    from modgen.formulas.stability import loaded_feedback, overshoot, phase_margin

    def into(second_pole):
        bare = [(0.0, 100e-12, math.inf)]
        return overshoot(phase_margin(lambda f: loaded_feedback(f, 200.0, bare), 25e3, 4e6, second_pole)[1])

    assert into(math.inf) < 0.10 < into(SECOND_POLE * 4e6)


@pytest.mark.source(
    "from memory: G. F. Franklin et al., Feedback Control of Dynamic Systems: 45 degrees, 23 %; 60, 9 %"
)
def test_overshoot_of_the_textbook(printed):
    from modgen.formulas.stability import overshoot

    assert overshoot(45.0) * 100 == printed("23")
    assert overshoot(60.0) * 100 == printed("9")


def keep() -> None:
    """Simulate every case again."""
    program = shutil.which("ngspice")
    if program is None:
        sys.exit("ngspice is not installed")
    sys.path.insert(0, str(ROOT))
    version = subprocess.run([program, "--version"], capture_output=True, text=True, check=True).stdout
    name = re.search(r"ngspice-\S+", version)
    lines = [f"# {name[0] if name else 'ngspice'}: spec, buffer, load, factor; crossover [Hz], phase margin [deg]"]
    for case in CASES:
        crossover, margin = simulated(program, case)
        lines.append(f"{case} {crossover:.5g} {margin:.2f}")
    KEPT.write_text("\n".join(lines) + "\n", "utf-8")


if __name__ == "__main__":
    keep()
