"""The error at rest of the emitted deck, run by ngspice with its greatest offsets, against the terms of the budget.

The budget adds magnitudes; in the simulated board each term has a sign: offsets raise the output, bias currents
leave the inputs and lower it, loading, gain and insulation lower the scale, common-mode rejection raises it. So the
sum, or for the scale the product, of the budget's own terms with their signs is what the simulator must give.
Tolerances are taken off the netlist, since a deck has nominal values.
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
#: resistor inside the loop, and outside; both on two rails with a socket of its own for each input
SPECS = ("four-lane-pitch-lag", "five-lane-fanout-lag")

pytestmark = pytest.mark.source("ngspice 39: operating point of the emitted deck with worst=1")


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


def output(program: str, spec: str, volts: float) -> float:
    """The first lane's output with a voltage at every input, the control at its slow end [V]."""
    from modgen.outputs.spice import Nodes, spice_deck

    job, board = exact(spec)
    text = spice_deck(job).decode().split(".options")[0].replace(".param worst=0", ".param worst=1")
    text = re.sub(r"^VSIGNAL .*$", f"VSIGNAL signal 0 DC {volts:g}", text, flags=re.MULTILINE)
    out = Nodes(job.netlist, board.ground).net(board.channels[0].output_nets[0])
    text += "\n".join(
        [
            ".options noinit reltol=1e-7 abstol=1e-15 vntol=1e-9 itl1=500 numdgt=12",
            ".control",
            "op",
            f"print v({out})",
            "quit",
            ".endc",
            ".end",
            "",
        ]
    )
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "dc.cir").write_text(text, "ascii")
        done = subprocess.run(
            [program, "-b", "dc.cir"], cwd=folder, capture_output=True, text=True, timeout=120, check=True
        )
    return float(re.search(rf"^v\({out}\) = (\S+)$", done.stdout, re.MULTILINE)[1])


def signed(terms, kind: str) -> list[float]:
    raise_ = ("offset voltage", "common-mode rejection")
    return [t.worst if t.name.startswith(raise_) else -t.worst for t in terms if t.kind == kind]


@pytest.mark.parametrize("spec", SPECS)
def test_offset_and_scale_are_the_signed_sums_of_the_budget(spec):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the deck is not run here")
    from modgen.analysis.accuracy import accuracy_budget

    job, board = exact(spec)
    terms = accuracy_budget(board, job.spec.signal, job.spec.accuracy).terms
    zero, five = output(program, spec, 0.0), output(program, spec, 5.0)
    # the output resistor and the insulation take a hundredth of the 20 mV too, which the budget leaves out
    assert zero == pytest.approx(math.fsum(signed(terms, "offset")), abs=0.25e-3)
    # gains multiply where the budget adds their errors: 50 parts in a million between the two
    assert (five - zero) / 5 == pytest.approx(math.prod(1 + term for term in signed(terms, "scale")), abs=5e-6)
    assert (five - zero) / 5 - 1 == pytest.approx(math.fsum(signed(terms, "scale")), abs=60e-6)


@pytest.mark.parametrize("spec", SPECS)
def test_the_worst_case_holds_what_is_simulated(spec):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the deck is not run here")
    from modgen.analysis import Board
    from modgen.analysis.accuracy import accuracy_budget

    job, _ = exact(spec)
    budget = accuracy_budget(Board.of(job.netlist, job.catalogue), job.spec.signal, job.spec.accuracy)
    zero, five = output(program, spec, 0.0), output(program, spec, 5.0)
    assert abs(zero) < budget.offset_worst
    assert abs((five - zero) / 5 - 1) < budget.scale_worst
