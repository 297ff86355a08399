"""Every chosen value names what came next and the limit or the order that it lost by."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from modgen.catalogue import Catalogue
from modgen.catalogue.records import Diode
from modgen.design import make_design
from modgen.design.model import Choice
from modgen.spec import read_spec

SPECS = sorted((Path(__file__).parents[2] / "specs").glob("*.yaml"))


@pytest.fixture
def chosen(catalogue: Catalogue, spec_of: Callable) -> Callable[..., dict[str, Choice]]:
    def choose(*lines: str) -> dict[str, Choice]:
        return {choice.subject: choice for choice in make_design(spec_of(*lines), catalogue).choices}

    return choose


@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.stem)
def test_every_choice_of_the_shipped_specs_has_two(catalogue: Catalogue, path: Path) -> None:
    for choice in make_design(read_spec(path), catalogue).choices:
        # the catalogue has two small rectifiers for surface mounting
        least = 1 if choice.subject == "reverse-polarity" else 2
        assert len(choice.runners_up) >= least, choice.subject
        names = [what for what, _ in choice.runners_up]
        assert len(set(names)) == len(names)
        assert choice.chosen not in names
        assert all(why for _, why in choice.runners_up)
        assert choice.margin is not None
        assert choice.binding


def test_neighbours_of_a_pitch_lane_and_the_limits_they_miss(chosen: Callable) -> None:
    found = chosen("signal: {pitch: true}")
    assert found["isolating"].chosen == "metal-film-0207-2k2"
    assert found["isolating"].runners_up == (
        # 2.4 kohm and 2 ohm of the control with 1 uF: ln 9 x 2.402 ms
        ("metal-film-0207-2k4", "the shortest glide would be 5.28 ms; 5 ms is asked"),
        ("metal-film-0207-2k0", "fits the range less closely: 4.4 ms to 2.2 s"),
    )
    assert found["terminator"].runners_up[1] == (
        # 1 kohm into 910 kohm less 1 %: 1.11e-3 of 1200 cents
        "metal-film-0207-910k",
        "loads the source by 1.33 cents per octave, more than the 25 % of the scale budget that loading is allowed",
    )
    assert found["input-series"].runners_up[1] == (
        # 12 V over a junction and 9.1 kohm
        "metal-film-0207-9k1",
        "protects less: 1.32 mA instead of 1.2 mA from a neighbour",
    )
    assert found["compensation"].runners_up == (
        ("c0g-radial-100v-680p", "680 pF is more than is needed, at the same price"),
        ("c0g-radial-100v-330p", "330 pF where 400 pF is wanted"),
    )
    # 470 pF of the 400 pF that 1 kohm, 10 kohm and 2 nF of cable ask for
    assert found["compensation"].margin == pytest.approx(0.175)


def test_output_resistor_outside_the_loop_loses_by_the_scale_budget(chosen: Callable) -> None:
    found = chosen("signal: {load: 47k}", "output: {protection: outside}")["output-series"]
    larger, why = found.runners_up[0]
    assert (found.chosen, larger) == ("metal-film-0207-620r", "metal-film-0207-680r")
    assert why.endswith(" cents per octave in all; the budget is 24 cents per octave")
    assert float(why.removeprefix("scale would be off by ").split(" ")[0]) > 24


def test_control_with_too_little_track_or_too_much_left_at_its_end(chosen: Callable) -> None:
    assert chosen("signal: {pitch: true}")["glide-control"].runners_up == (
        ("control-9mm-log-1m0", "10 kΩ can be left at its end: the shortest glide is 26.8 ms"),
        ("control-16mm-log-500k", "with this capacitor it reaches 1.1 s at most"),
    )


def test_pair_of_capacitor_and_control_is_named_once(chosen: Callable) -> None:
    lost = [what.rpartition(" and ")[0] for what, _ in chosen()["glide-capacitor"].runners_up[:2]]
    assert len(set(lost)) == 2


def test_diode_that_does_not_bear_the_reversed_header(catalogue: Catalogue, chosen: Callable) -> None:
    found = chosen("rails: {positive: 15 V, negative: -15 V}")["reverse-polarity"]
    assert found.chosen not in dict(found.runners_up)
    for key, why in found.runners_up:
        record = catalogue.get(key)
        assert isinstance(record, Diode)
        # what is named before a faulty one would have done
        assert (record.reverse_voltage >= 31.5) == (not why.startswith("blocks"))


def test_range_switch_names_other_capacitors_for_its_slow_range(chosen: Callable) -> None:
    found = chosen("glide: {shortest: 1 ms, longest: 12 s, ranges: 2, cover: worst-case}")
    lost = dict(found["range-capacitor"].runners_up)
    assert len(lost) == 2
    assert all(found["range-capacitor"].chosen not in name for name in lost)
    assert found["range-keeper"].runners_up == (
        # 11 kohm and 10 uF
        ("metal-film-0207-11k", "the waiting capacitor would follow within 110 ms instead of 100 ms"),
        (
            "metal-film-0207-9k1",
            "lets more current into the waiting capacitor, with nothing gained that is heard",
        ),
    )


def test_what_decided_is_what_is_said_to_have_decided(chosen: Callable) -> None:
    """Insulation that is the same to the last figure shown has not cost anybody the place."""
    for what, why in chosen("glide: {shortest: 1 ms, longest: 12 s, ranges: 2}")["glide-capacitor"].runners_up:
        numbers = why.removeprefix("insulation costs ").split(" ")
        if why.startswith("insulation"):
            assert numbers[0] != numbers[3], what
