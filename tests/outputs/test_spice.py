import dataclasses
import math
import re
import shutil
import subprocess

import pytest

from modgen.catalogue.records import Diode
from modgen.outputs.spice import spice_deck
from modgen.outputs.spice_models import amplifier_model, diode_fit
from modgen.spec.model import Glide, Rails, Signal


def deck(job):
    return spice_deck(job).decode("ascii")


def block(text, heading):
    """The element lines under a heading."""
    return text.split(f"* {heading}\n")[1].split("\n\n")[0].splitlines()


def test_one_channel_as_it_is_wired(make):
    assert block(deck(make(1)), "Channel 1") == [
        "C1 nch1_glide 0 1e-06",
        "RINS_C1 nch1_glide 0 3e+10",
        "RSOURCE_J1 signal nch1_in {source}",
        "RLOAD_J2 nch1_out 0 {load}",
        "R1 nch1_in 0 1000000",
        "R2 nch1_in nch1_a 100000",
        "R3 nch1_buf nch1_ctl 2200",
        "R4_A nch1_ctl nch1_glide 1000000  ; turned below",
        "R5 nch1_drive nch1_out 330",
        "XU1A nch1_a nch1_buf nch1_buf nvp nvn AMP_TL07xC",
        "XU1B nch1_glide nch1_drive nch1_drive nvp nvn AMP_TL07xC",
    ]


def test_shared_parts_stand_the_right_way_round(make):
    assert block(deck(make(1)), "Shared parts") == [
        "C2 nvp 0 1e-07",
        "C3 nvn 0 1e-07",
        "C4 nvp 0 1e-05",
        "RINS_C4 nvp 0 8333333.33",
        "C5 0 nvn 1e-05",
        "RINS_C5 0 nvn 8333333.33",
        "D1 nbusp nvp DMOD_1n5819",
        "D2 nvn nbusn DMOD_1n5819",
    ]
    assert block(deck(make(1)), "Supply at its nominal voltage") == ["Vnbusp nbusp 0 DC 12", "Vnbusn nbusn 0 DC -12"]


def test_every_part_is_in_the_deck(make):
    job = make(3)
    text = deck(job)
    for part in job.netlist.parts:
        if part.field("role") != "power-header":
            assert re.search(rf"^\w*{part.ref}[A-B_ ]", text, re.M), part.ref


def test_the_control_goes_to_both_ends_and_the_middle(make):
    found = re.findall(r"^alter R4_A = (\S+)$", deck(make(2)), re.M)
    assert found == ["2", "150000", "1000000"]


def test_steps_follow_the_expected_time(make):
    runs = re.findall(r"^tran (\S+) (\S+) 0 \S+$", deck(make(1)), re.M)
    for (step, end), tau in zip(runs, (2.202e-3, 0.1522, 1.0022), strict=True):
        assert float(step) == pytest.approx(tau / 100, rel=1e-6)
        assert float(end) == pytest.approx(tau * (math.log(10) + 1 + 1e-4), rel=1e-6)


@pytest.mark.parametrize(
    ("glide", "measured"),
    [
        (Glide(5e-3, 2.0), "trig left1 val=0.9 fall=1 targ left1 val=0.1 fall=1"),
        (Glide(5e-3, 2.0, measure="time-constant"), "when left1=0.367879441 fall=1"),
        (Glide(5e-3, 2.0, measure="settle", step=2.0, within=0.01), "when left1=0.005 fall=1"),
    ],
)
def test_the_time_is_measured_as_the_spec_asks(make, glide, measured):
    assert f"meas tran time1 {measured}\n" in deck(make(1, glide=glide))


def test_the_step_stays_inside_the_span(make):
    assert "PULSE(-2.5 2.5 0 " in deck(make(1))
    settle = make(1, glide=Glide(5e-3, 2.0, measure="settle", step=1.0))
    assert "VSIGNAL signal 0 DC 0.5 PULSE(-0.5 0.5 0 " in deck(settle)


def test_a_title_cannot_add_lines(make):
    text = deck(make(1, module="Ω\n.end\n$shell"))
    assert text.splitlines()[0] == "* ?.end?$shell: every channel at both ends and the middle of its control"
    assert text.splitlines().count(".end") == 1


def test_amplifier_figures_by_hand(job):
    model = amplifier_model(job.catalogue["tl072c"], "AMP")
    # pole at 4 MHz / 25 000 = 160 Hz with 1 Mohm: 994.7 pF; 13 V/us into that 12.93 mA; gain/R = 25 mA/V
    assert model.pole_capacitance == pytest.approx(994.7e-12, rel=1e-4)
    assert model.slew_current == pytest.approx(12.93e-3, rel=1e-3)
    assert model.transconductance == pytest.approx(25e-3)
    assert (model.swing_low, model.swing_high, model.short_circuit) == (3.0, 3.0, 40e-3)
    unknown = dataclasses.replace(job.catalogue["tl072c"], output_resistance=0.0, short_circuit_typical=0.0)
    assert amplifier_model(unknown, "AMP").output_resistance == 1.0
    assert amplifier_model(unknown, "AMP").short_circuit == 1.0


def drop(emission, saturation, current):
    return emission * 0.025865 * math.log(current / saturation)


@pytest.mark.parametrize("current", [1e-3, 0.01, 0.03, 0.1, 0.5, 3.0])
def test_the_diode_goes_through_the_points_about_the_current(job, current):
    record = job.catalogue["1n5819"]  # 0.2 V at 10 mA, 0.3 V at 100 mA, 0.45 V at 1 A
    emission, saturation = diode_fit(record, current)
    points = ((0.01, 0.2), (0.1, 0.3)) if current <= 0.1 else ((0.1, 0.3), (1.0, 0.45))
    for at, volts in points:
        assert drop(emission, saturation, at) == pytest.approx(volts, abs=1e-6)


def test_a_diode_with_one_point_takes_a_customary_slope(job):
    record: Diode = dataclasses.replace(job.catalogue["1n5819"], forward=((0.1, 0.3, 0.4),), schottky=False)
    emission, saturation = diode_fit(record, 0.02)
    assert emission == 1.8
    assert drop(emission, saturation, 0.1) == pytest.approx(0.3)


def test_an_open_amplifier_pin_cannot_be_simulated(make):
    job = make(1)
    nets = tuple(
        dataclasses.replace(net, pins=tuple(p for p in net.pins if p != ("U1", "8"))) for net in job.netlist.nets
    )
    broken = dataclasses.replace(job, netlist=dataclasses.replace(job.netlist, nets=nets))
    with pytest.raises(ValueError, match=r"^U1A: pin 8 is open, which cannot be simulated$"):
        spice_deck(broken)


def test_the_same_bytes_every_time(make):
    assert spice_deck(make(3)) == spice_deck(make(3))


# --- variants that ngspice itself has to run ------------------------------------------------------


def rewired(job, moves, more=(), drop=(), **spec):
    """The job with pins on other nets, parts added and left out."""
    parts = [p for p in job.netlist.parts if p.ref not in drop] + [part for part, _ in more]
    nets = {}
    for net in job.netlist.nets:
        for pin in net.pins:
            if pin[0] not in drop:
                nets.setdefault(moves.get(pin, net.name), []).append(pin)
    for part, pins in more:
        for number, net in pins.items():
            nets.setdefault(net, []).append((part.ref, number))
    netlist = dataclasses.replace(
        job.netlist,
        parts=tuple(parts),
        nets=tuple(dataclasses.replace(job.netlist.nets[0], name=n, pins=tuple(sorted(nets[n]))) for n in sorted(nets)),
    )
    return dataclasses.replace(job, netlist=netlist, spec=dataclasses.replace(job.spec, **spec))


def extra(job, ref, value, key, **fields):
    first = job.netlist.parts[0]
    return dataclasses.replace(first, ref=ref, value=value, fields=tuple(sorted({"part": key, **fields}.items())))


def inside_the_loop(make):
    job = make(1)
    feedback = extra(job, "R90", "100k", "r-100k", channel="1", role="feedback")
    compensation = extra(job, "C90", "100p", "c-100n", channel="1", role="compensation")
    more = (
        (feedback, {"1": "CH1_OUT", "2": "CH1_FB"}),
        (compensation, {"1": "CH1_DRIVE", "2": "CH1_FB"}),
    )
    return rewired(job, {("U1", "6"): "CH1_FB"}, more)


def back_to_back(make):
    job = make(1)
    pair = tuple(
        (extra(job, ref, "10u", "c-10u-el", channel="1", role="glide-capacitor"), pins)
        for ref, pins in (("C91", {"1": "CH1_GLIDE", "2": "CH1_MID"}), ("C92", {"1": "0V", "2": "CH1_MID"}))
    )
    return rewired(job, {}, pair, drop=("C1",))


def single_supply(make):
    job = make(1)
    rail_to_rail = dataclasses.replace(
        job.catalogue["tl072c"], swing_low=0.025, swing_high=0.025, common_mode_low=-0.3, common_mode_high=-0.3
    )
    job = dataclasses.replace(job, catalogue=type(job.catalogue)({**job.catalogue, "tl072c": rail_to_rail}))
    header = {("J3", "1"): "open1", ("J3", "2"): "open2"}
    return rewired(
        job,
        {("U1", "4"): "0V", **header},
        drop=("D2", "C3", "C5"),
        rails=Rails(5.0, 0.0),
        signal=Signal(0.0, 3.0),
    )


def run(tmp_path, job):
    program = shutil.which("ngspice")
    if program is None:
        pytest.skip("ngspice is not installed: the deck is not run here")
    (tmp_path / "circuit.cir").write_bytes(spice_deck(job))
    done = subprocess.run(
        [program, "-b", "circuit.cir"], cwd=tmp_path, capture_output=True, text=True, timeout=120, check=True
    )
    return {
        (channel, what): float(value)
        for channel, what, value in re.findall(r"^CH(\d+) (\w+) (\S+)$", done.stdout, re.M)
    }


@pytest.mark.parametrize(
    ("build", "series", "capacitance"),
    [(inside_the_loop, 2200.0, 1e-6), (back_to_back, 2200.0, 5e-6), (single_supply, 2200.0, 1e-6)],
    ids=lambda value: getattr(value, "__name__", None),
)
def test_variants_run_and_take_their_time(make, tmp_path, build, series, capacitance):
    found = run(tmp_path, build(make))
    # insulation of electrolytics, 16.7 Mohm beside the control, shortens the slow end by 6 %
    leak = 2 * 25.0 / 3e-6 if build is back_to_back else 3e10
    for position, turned in (("shortest", 2.0), ("middle", 150e3), ("longest", 1e6)):
        resistance = 1 / (1 / (series + turned) + 1 / leak)
        expected = math.log(9) * resistance * capacitance
        assert found["1", position] == pytest.approx(expected, rel=3e-3), position


def test_the_output_resistor_costs_nothing_inside_the_loop(make, tmp_path):
    """By hand at 2.5 V: source 1/1001 loses 2.50 mV, 330 ohm into 100 k 8.22 mV, two offsets add 6 mV."""
    outside, inside = run(tmp_path, make(1))["1", "error"], run(tmp_path, inside_the_loop(make))["1", "error"]
    assert outside == pytest.approx(-2.50e-3 - 8.22e-3 + 6e-3 + 2 * 2.5 / 3162 - 2 * 2.5 / 25e3, abs=1.5e-4)
    assert inside - outside == pytest.approx(8.22e-3, abs=1e-4)


def test_an_output_in_trouble_limits_at_the_rail(make, tmp_path):
    """11.8 V behind the diode less 3 V of swing is where a 30 V input must end."""
    job = dataclasses.replace(make(1), spec=dataclasses.replace(make(1).spec, signal=Signal(0.0, 40.0)))
    found = run(tmp_path, job)
    assert found["1", "error"] == pytest.approx((12 - 0.175 - 3) * 100 / 100.33 - 30.0, abs=0.05)
