"""Johnson noise of a glide network in ngspice, 20 Hz to 20 kHz, against the formula."""

from __future__ import annotations

import math
import re
import shutil
import subprocess
import tempfile
from pathlib import Path

import pytest

from modgen.formulas.noise import band_noise, johnson_density

pytestmark = pytest.mark.source("ngspice 39: .noise of a resistor and a capacitor at 26.85 degC")

DECK = """* A resistor into a capacitor
VIN in 0 DC 0 AC 1
RGLIDE in out {ohm}
CGLIDE out 0 {farad}
.options temp=26.85
.control
noise v(out) VIN dec 500 20 20k
print onoise_total
quit
.endc
.end
"""


@pytest.mark.parametrize(("ohm", "farad"), [(2.2e3, 100e-9), (1e6, 100e-9), (2.2e3, 1e-6), (10e3, 100e-12)])
def test_noise_of_a_glide_network(ohm, farad):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the noise is not simulated here")
    with tempfile.TemporaryDirectory() as folder:
        (Path(folder) / "noise.cir").write_text(DECK.format(ohm=ohm, farad=farad), "ascii")
        done = subprocess.run(
            [program, "-b", "noise.cir"], cwd=folder, capture_output=True, text=True, timeout=120, check=True
        )
    found = float(re.search(r"^onoise_total = (\S+)$", done.stdout, re.MULTILINE)[1])
    corner = 1 / (2 * math.pi * ohm * farad)
    assert band_noise(johnson_density(ohm, 300.0), 20.0, 20e3, corner) == pytest.approx(found, rel=1e-3)
