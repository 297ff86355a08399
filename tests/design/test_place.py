"""Parts and nets of a design: every pin spoken for, in each jack regime, supply and package mix."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable

import pytest

from modgen.catalogue import Amplifier, Catalogue
from modgen.design import make_design
from modgen.design.model import Design, Placed
from modgen.design.stage import packagings


@pytest.fixture
def design_of(catalogue: Catalogue, spec_of: Callable) -> Callable[..., Design]:
    return lambda *lines: make_design(spec_of(*lines), catalogue)


def role(design: Design, name: str) -> list[Placed]:
    return [p for p in design.parts if p.role == name]


def nets(part: Placed) -> dict[str, str]:
    return dict(part.pins)


REGIMES = {
    "one each": ("channels: 4", "jacks: 8"),
    "shared": ("channels: 4", "jacks: 6"),
    "least": ("channels: 3", "jacks: 4"),
    "extra": ("channels: 3", "jacks: 11"),
    "chain": ("channels: 3", "jacks: 6", "normalling: chain"),
    "single": ("rails: {positive: 5 V, negative: 0 V}", "signal: {span: 0 V to 3 V}"),
    "pitch": ("signal: {pitch: true}",),
    "two ranges": ("glide: {shortest: 1 ms, longest: 2 s, ranges: 2}",),
    "pitch, extra": ("channels: 2", "jacks: 5", "signal: {pitch: true}"),
}


@pytest.mark.parametrize("regime", REGIMES)
def test_every_pin_is_spoken_for(design_of: Callable, regime: str) -> None:
    design = design_of(*REGIMES[regime])
    assert len({p.ref for p in design.parts}) == len(design.parts)
    for part in design.parts:
        assert sorted(n for n, _ in part.pins) == sorted(p.number for p in part.record.pins), part.ref
    on = Counter(net for part in design.parts for _, net in part.pins if net)
    assert min(on.values()) >= 2, "no net has a single pin"


def test_one_channel_along_the_signal(design_of: Callable) -> None:
    design = design_of("channels: 1", "jacks: 2")
    assert nets(role(design, "input-jack")[0]) == {"T": "CH1_IN", "TN": "0V", "S": "0V"}
    assert nets(role(design, "terminator")[0]) == {"1": "CH1_IN", "2": "0V"}
    assert nets(role(design, "input-series")[0]) == {"1": "CH1_IN", "2": "CH1_A"}
    assert nets(role(design, "isolating")[0]) == {"1": "CH1_BUF", "2": "CH1_CTL"}
    # clockwise is slower, and a lifted wiper leaves the whole track between CTL and GLIDE
    assert nets(role(design, "glide-control")[0]) == {"1": "CH1_CTL", "2": "CH1_GLIDE", "3": "CH1_GLIDE"}
    assert nets(role(design, "glide-capacitor")[0]) == {"1": "CH1_GLIDE", "2": "0V"}
    assert nets(role(design, "output-series")[0]) == {"1": "CH1_DRIVE", "2": "CH1_OUT"}
    assert nets(role(design, "output-jack")[0]) == {"T": "CH1_OUT", "TN": "", "S": "0V"}
    dual = nets(role(design, "amplifier")[0])
    assert dual == {
        "1": "CH1_BUF", "2": "CH1_BUF", "3": "CH1_A", "4": "V-",
        "5": "CH1_GLIDE", "6": "CH1_DRIVE", "7": "CH1_DRIVE", "8": "V+",
    }  # fmt: skip
    assert role(design, "amplifier")[0].channel == 1


def test_two_capacitors_in_parallel_where_one_does_not_reach(design_of: Callable) -> None:
    design = design_of("channels: 1", "jacks: 2", "glide: {shortest: 40 ms, longest: 30 s}")
    one, two = role(design, "glide-capacitor")
    assert nets(one) == nets(two) == {"1": "CH1_GLIDE", "2": "0V"}
    assert one.record.capacitance + two.record.capacitance == pytest.approx(14.7e-6)


def test_a_range_switch(design_of: Callable) -> None:
    design = design_of("channels: 2", "jacks: 4", "glide: {shortest: 1 ms, longest: 12 s, ranges: 2}")
    switch, second = role(design, "range-switch")
    assert (switch.ref, switch.channel, second.ref, second.channel) == ("S1", 1, "S2", 2)
    # 1-2 puts the second capacitor beside the first; 2-3 leaves it at the output's voltage, through a resistor
    assert nets(switch) == {"1": "CH1_GLIDE", "2": "CH1_RANGE", "3": "CH1_KEEP"}
    (added, _), (keeper, _) = role(design, "range-capacitor"), role(design, "range-keeper")
    assert nets(added) == {"1": "CH1_RANGE", "2": "0V"}
    assert nets(keeper) == {"1": "CH1_DRIVE", "2": "CH1_KEEP"}
    (first, _) = role(design, "glide-capacitor")
    assert nets(first) == {"1": "CH1_GLIDE", "2": "0V"}
    assert added.record.capacitance > first.record.capacitance
    assert keeper.record == role(design, "input-series")[0].record
    assert all(part.reason for part in (switch, added, keeper))


def test_no_range_switch_unasked(design_of: Callable) -> None:
    design = design_of("channels: 1", "jacks: 2", "glide: {shortest: 40 ms, longest: 30 s}")
    assert not [part for part in design.parts if part.role.startswith("range-")]
    assert design.values.range_switch is None


def test_output_resistor_inside_the_loop(design_of: Callable) -> None:
    design = design_of("channels: 1", "jacks: 2", "output: {protection: inside}")
    assert nets(role(design, "output-series")[0]) == {"1": "CH1_DRIVE", "2": "CH1_OUT"}
    assert nets(role(design, "feedback")[0]) == {"1": "CH1_OUT", "2": "CH1_FB"}
    assert nets(role(design, "compensation")[0]) == {"1": "CH1_DRIVE", "2": "CH1_FB"}
    assert nets(role(design, "amplifier")[0])["6"] == "CH1_FB"


def test_shared_inputs_take_the_one_before_them(design_of: Callable) -> None:
    design = design_of("channels: 4", "jacks: 6")
    assert [p.channel for p in role(design, "input-jack")] == [1, 2]
    assert [p.channel for p in role(design, "terminator")] == [1, 2]
    assert [nets(p)["1"] for p in role(design, "input-series")] == ["CH1_IN", "CH2_IN", "CH2_IN", "CH2_IN"]
    assert len(role(design, "output-jack")) == 4


def test_extra_outputs_in_turn_each_behind_its_own_resistor(design_of: Callable) -> None:
    design = design_of("channels: 3", "jacks: 11")
    assert Counter(p.channel for p in role(design, "output-jack")) == {1: 3, 2: 3, 3: 2}
    outs = [nets(p)["2"] for p in role(design, "output-series")]
    assert sorted(outs) == sorted(nets(p)["T"] for p in role(design, "output-jack"))
    assert len(set(outs)) == 8


def test_chain_takes_the_input_before(design_of: Callable) -> None:
    design = design_of("channels: 3", "jacks: 6", "normalling: chain")
    assert [nets(p)["TN"] for p in role(design, "input-jack")] == ["0V", "CH1_IN", "CH2_IN"]


def test_supply_polarity(design_of: Callable) -> None:
    design = design_of()
    positive, negative = role(design, "reverse-polarity")
    assert nets(positive) == {"1": "V+", "2": "BUS+"}, "cathode to the protected rail"
    assert nets(negative) == {"1": "BUS-", "2": "V-"}
    assert [nets(p) for p in role(design, "reservoir")] == [{"1": "V+", "2": "0V"}, {"1": "0V", "2": "V-"}]
    header = nets(role(design, "power-header")[0])
    assert [header[str(n)] for n in range(1, 11)] == ["BUS-"] * 2 + ["0V"] * 6 + ["BUS+"] * 2


def test_single_supply_has_no_negative_rail(design_of: Callable) -> None:
    design = design_of("rails: {positive: 5 V, negative: 0 V}", "signal: {span: 0 V to 3 V}")
    every = {net for part in design.parts for _, net in part.pins}
    assert not every & {"V-", "BUS-"}
    header = nets(role(design, "power-header")[0])
    assert header["1"] == header["2"] == ""
    assert len(role(design, "reverse-polarity")) == 1


def test_decoupling_names_its_package(design_of: Callable) -> None:
    design = design_of("channels: 5", "jacks: 10")
    packages = [p.ref for p in role(design, "amplifier")]
    served = Counter((p.serves, frozenset(nets(p).values())) for p in role(design, "decoupling"))
    assert served == {(u, frozenset((rail, "0V"))): 1 for u in packages for rail in ("V+", "V-")}


def test_idle_sections_follow_0v(design_of: Callable) -> None:
    design = design_of("channels: 3", "jacks: 6", "build: {amplifier: tl074-dip14}")
    last = nets(role(design, "amplifier")[-1])
    assert (last["10"], last["9"], last["8"]) == ("0V", "IDLE2C", "IDLE2C")
    assert (last["12"], last["13"], last["14"]) == ("0V", "IDLE2D", "IDLE2D")


@pytest.mark.parametrize("channels", range(1, 20))
@pytest.mark.parametrize("prefer", ["cost", "size"])
def test_packagings_are_the_best(catalogue: Catalogue, channels: int, prefer: str) -> None:
    forms = [a for a in catalogue.of(Amplifier) if a.type == "TL07x" and a.mount == "through-hole"]
    dual, quad = sorted(forms, key=lambda a: a.sections)
    chosen = packagings(forms, channels, prefer, 1)
    assert sum(p.sections for p in chosen) >= 2 * channels

    def figure(duals: int, quads: int) -> float:
        if prefer == "size":
            return duals * dual.body.area + quads * quad.body.area

        def price(part: Amplifier, count: int) -> float:
            return count * min((b.price for b in part.prices if b.quantity <= count), default=0.0)

        return price(dual, duals) + price(quad, quads)

    options = [figure(d, q) for d in range(channels + 1) for q in range(channels + 1) if 2 * d + 4 * q >= 2 * channels]
    counts = Counter(p.sections for p in chosen)
    assert figure(counts[2], counts[4]) == pytest.approx(min(options))
