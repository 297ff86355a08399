"""All analyses together, and what they refuse."""

from __future__ import annotations

import subprocess
import sys
import time

import pytest

from modgen.analysis import analyse
from modgen.analysis.montecarlo import draw_boards
from modgen.problems import InputError


def test_everything_is_there(lanes, spec):
    bench = lanes(4)
    found = analyse(bench.netlist(), bench.shelf, spec)
    assert [g.channel for g in found.glide] == [1, 2, 3, 4]
    assert [r.name for r in found.rails] == ["V+", "V-"]
    assert len(found.headroom) == 4
    assert found.accuracy.scale_budget == spec.accuracy.scale
    assert [b.net for b in found.bounds] == sorted(n.name for n in bench.netlist().nets)


def test_the_same_netlist_gives_the_same_analyses(lanes, spec):
    bench = lanes(2, chain=True)
    assert analyse(bench.netlist(), bench.shelf, spec) == analyse(bench.netlist(), bench.shelf, spec)


def test_values_that_are_no_numbers_are_refused_all_at_once(lanes, spec):
    bench = lanes().value("R12", "DNP").value("R13", "").value("C10", "1 uF film")
    with pytest.raises(InputError) as caught:
        analyse(bench.netlist(), bench.shelf, spec)
    assert [p.what for p in caught.value.problems] == [
        "C10 has the value '1 uF film', which is not a capacitance",
        "R12 has the value 'DNP', which is not a resistance",
        "R13 has the value '', which is not a resistance",
    ]


def test_a_netlist_of_nothing(empty_bench, spec):
    bench = empty_bench()
    found = analyse(bench.netlist(), bench.shelf, spec)
    assert (found.glide, found.headroom, found.bounds) == ((), (), ())
    assert [r.current_max for r in found.rails] == [0.0]


def test_sixty_four_lanes_take_no_time(lanes, spec):
    bench = lanes(64)
    analyse(lanes().netlist(), bench.shelf, spec)
    draw_boards.cache_clear()
    start = time.process_time()
    analyse(bench.netlist(), bench.shelf, spec)
    assert time.process_time() - start < 2.0


def test_importing_does_not_load_numpy():
    code = "import sys, modgen.analysis; sys.exit('numpy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
