"""What cannot be had is refused for the right reason, at the right place, with what can be had."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest

from modgen.catalogue import Catalogue, Switch
from modgen.design import make_design
from modgen.problems import InputError, Problem


@pytest.fixture
def refused(catalogue: Catalogue, spec_of: Callable) -> Callable[..., Problem]:
    def refuse(*lines: str) -> Problem:
        with pytest.raises(InputError) as error:
            make_design(spec_of(*lines), catalogue)
        (problem,) = error.value.problems
        return problem

    return refuse


def at(problem: Problem) -> tuple[int, int]:
    return problem.place.line, problem.place.column


def test_longest_glide_that_needs_a_capacitor_that_does_not_exist(refused: Callable) -> None:
    problem = refused("glide: {shortest: 5 ms, longest: 900 s}")
    assert at(problem) == (5, 25)
    assert problem.what == "a glide of 5 ms to 900 s (rise) cannot be had nominally from the catalogue"
    assert problem.why == (
        "the longest glide blocks: no capacitor is large enough for any control; "
        "the nearest that can be had: 5 ms to 9.67 s"
    )
    assert problem.fix == (
        "change glide.shortest or glide.longest to a range that can be had, or add parts with build.catalogue"
    )


def test_range_wider_than_one_control(refused: Callable) -> None:
    problem = refused("glide: {shortest: 200 us, longest: 10 s, cover: worst-case}")
    assert problem.what == "a glide of 200 µs to 10 s (rise) cannot be had guaranteed over tolerance from the catalogue"
    assert problem.why.startswith("the two together block: the range of one control goes from what is left at its end")
    assert "the nearest that can be had: 200 µs to " in problem.why
    assert problem.why.endswith(" to 10 s")


def test_the_nearest_range_can_be_had(catalogue: Catalogue, spec_of: Callable, refused: Callable) -> None:
    why = refused("glide: {shortest: 5 ms, longest: 900 s}").why
    longest = why.rpartition(" to ")[2]
    # the text is rounded to three figures: a hair less is certainly within it
    shorter = f"{float(longest.removesuffix(' s')) * 0.99:.4g} s"
    assert make_design(spec_of(f"glide: {{shortest: 5 ms, longest: {shorter}}}"), catalogue).values.glide


def test_signal_too_large_for_the_rails(refused: Callable) -> None:
    problem = refused("signal: {span: ±10 V}")
    assert problem.what == "no amplifier in the catalogue works on these rails with this signal"
    assert at(problem) == (6, 10)
    assert problem.fix == "a span of ±8.5 V can be had here; or change the rails or the amplifier"
    reasons = {line.split(":")[0].strip(): line.strip() for line in problem.why.splitlines()[1:]}
    assert reasons["TL07x"] == "TL07x: the input range at the negative rail is 2.92 V short behind 1n5818"
    assert (
        reasons["MCP600x"] == "MCP600x: withstands 7 V across its supply pins; the rails reach 25.2 V at 5 % tolerance"
    )


def test_low_voltage_type_on_high_rails(refused: Callable) -> None:
    problem = refused("build: {amplifier: TLV915x, mount: surface}")
    assert at(problem) == (6, 9)
    assert problem.what == "amplifier 'TLV915x' does not work in this module"
    assert problem.why == "TLV915x: withstands 20 V across its supply pins; the rails reach 25.2 V at 5 % tolerance"


def test_bipolar_input_behind_a_large_control(refused: Callable) -> None:
    problem = refused("build: {amplifier: NE5532}")
    assert problem.what == "the accuracy budget cannot be kept over the glide range"
    assert (
        "NE5532: its bias of up to 800 nA and the capacitor's leakage through the control are an offset of "
        in problem.why
    )


@pytest.mark.parametrize(
    ("lines", "why"),
    [
        (
            ("build: {capacitor: electrolytic}", "signal: {pitch: true}"),
            "electrolytic: leaks tens to hundreds of cents through the control",
        ),
        (("build: {capacitor: x7r}",), "x7r: is piezoelectric, and its capacitance changes with the voltage on it"),
    ],
)
def test_dielectrics_that_cannot_glide(refused: Callable, lines: tuple[str, ...], why: str) -> None:
    problem = refused(*lines)
    assert problem.why == why
    assert problem.what.startswith("no ")
    assert problem.what.endswith(" in the catalogue can be the glide capacitor")


def test_leaking_capacitor_is_never_accepted_in_silence(refused: Callable) -> None:
    problem = refused("build: {capacitor: electrolytic}")
    assert problem.what == "the accuracy budget cannot be kept over the glide range"
    assert (
        "TL07x: its bias of up to 200 pA and the capacitor's leakage through the control are an offset" in problem.why
    )


def test_unknown_names(refused: Callable) -> None:
    problem = refused("build: {amplifier: TL07y}")
    assert problem.what == "amplifier 'TL07y' is not in the catalogue"
    assert problem.fix.startswith("did you mean 'TL07x'? ")
    problem = refused("build: {capacitor: film-pp-bx}")
    assert problem.what == "capacitor family 'film-pp-bx' is not in the catalogue"
    assert problem.fix.startswith("did you mean 'film-pp-box")


@pytest.mark.parametrize(
    ("name", "packages"),
    [
        ("tl07x", {"tl074-dip14"}),
        ("TL072", {"tl072-dip8"}),
        ("tl072-dip8", {"tl072-dip8"}),
        ("TL074CN", {"tl074-dip14"}),
    ],
)
def test_names_an_amplifier_goes_by(catalogue: Catalogue, spec_of: Callable, name: str, packages: set[str]) -> None:
    values = make_design(spec_of("channels: 4", "jacks: 8", f"build: {{amplifier: {name}}}"), catalogue).values
    assert {p.key for p in values.packages} == packages


def test_type_not_sold_for_the_mount(refused: Callable) -> None:
    problem = refused("build: {amplifier: OPA164x}")
    assert problem.what == "amplifier 'OPA164x' is not sold for through-hole mounting"
    assert problem.why == "its forms in the catalogue are opa1642-soic8, opa1644-soic14"


def test_single_supply_with_a_type_that_cannot_reach_0v(refused: Callable) -> None:
    problem = refused(
        "rails: {positive: 12 V, negative: 0 V}", "signal: {span: 0 V to 5 V}", "build: {amplifier: TL07x}"
    )
    assert problem.why == "TL07x: the input range at 0 V is 4 V short behind 1n5819"


@pytest.mark.parametrize(
    "lines",
    [
        ("rails: {positive: 18 V, negative: -18 V}",),
        ("rails: {positive: 18 V, negative: -18 V}", "build: {mount: surface}"),
        ("rails: {positive: 5 V, negative: 0 V}", "signal: {span: 0 V to 3 V}"),
        ("rails: {positive: 12 V, negative: 0 V}", "signal: {span: 0 V to 5 V}"),
        ("rails: {positive: 12 V, negative: 0 V}", "signal: {span: 0 V to 5 V}", "build: {mount: surface}"),
        ("rails: {positive: 9 V, negative: -9 V}", "signal: {span: ±3 V}"),
        # the span that the refusal of ±10 V offers
        ("signal: {span: ±8.5 V}",),
    ],
)
def test_rails_that_can_be_had(catalogue: Catalogue, spec_of: Callable, lines: tuple[str, ...]) -> None:
    assert make_design(spec_of(*lines), catalogue).parts


def test_output_that_barely_sinks_next_to_its_rail(refused: Callable) -> None:
    """Falling to 0 V on a single supply the LM358 sinks microamperes: no glide resistor is large enough."""
    problem = refused(
        "rails: {positive: 12 V, negative: 0 V}", "signal: {span: 0 V to 5 V}", "build: {amplifier: LM358}"
    )
    assert problem.why == (
        "what the amplifier can drive asks for an isolating resistor of 417 kΩ at least, and with that "
        "neither end can be reached"
    )


def test_span_off_0v_still_meets_0v_when_unplugged(refused: Callable) -> None:
    """An empty socket is at 0 V: a type that does not reach it may not be taken, however high the span begins."""
    problem = refused(
        "rails: {positive: 12 V, negative: 0 V}",
        "signal: {span: 4 V to 6 V}",
        "accuracy: {offset: 100 mV}",
        "build: {amplifier: TL07x}",
    )
    assert problem.why == "TL07x: the input range at 0 V is 4 V short behind 1n5819"


WIDE = ("rails: {positive: 18 V, negative: -18 V}", "signal: {span: ±11 V}", "build: {mount: surface}")


def test_a_step_beyond_a_controls_rating_takes_another_control(catalogue: Catalogue, spec_of: Callable) -> None:
    """22 V across a 20 V control: the 9 mm families are passed over."""
    control = make_design(spec_of(*WIDE), catalogue).values.control
    assert control.voltage >= 22
    assert control.family != "control-9mm"


def test_a_step_beyond_every_controls_rating(catalogue: Catalogue, spec_of: Callable) -> None:
    small = Catalogue({k: p for k, p in catalogue.parts.items() if p.kind != "control" or p.family == "control-9mm"})
    with pytest.raises(InputError) as error:
        make_design(spec_of(*WIDE), small)
    (problem,) = error.value.problems
    assert problem.what == "no control can be used"
    assert problem.why == "a step over the whole span puts 22 V across the control; the best is rated 20 V"


def test_a_switch_is_offered_where_it_helps_and_only_there(
    refused: Callable, catalogue: Catalogue, spec_of: Callable
) -> None:
    offer = "or have a panel switch for two ranges, glide: {ranges: 2}"
    assert refused("glide: {shortest: 1 ms, longest: 12 s, cover: worst-case}").fix.endswith(offer)
    assert make_design(spec_of("glide: {shortest: 1 ms, longest: 12 s, cover: worst-case, ranges: 2}"), catalogue)
    assert offer not in refused("glide: {shortest: 5 ms, longest: 900 s}").fix


def test_ten_volts_through_a_jfet_pair_on_twelve(refused: Callable) -> None:
    """The guaranteed input range of the type ends 4 V from either rail: 11.4 V less a diode less 4 V is 7 V."""
    problem = refused("signal: {span: ±10 V}", "build: {amplifier: TL07x}")
    assert problem.what == "amplifier 'TL07x' does not work in this module"
    assert problem.why == "TL07x: the input range at the negative rail is 2.92 V short behind 1n5818"


def test_a_switch_whose_contacts_do_not_stand_the_step(catalogue: Catalogue, spec_of: Callable) -> None:
    weak = {k: replace(p, voltage=9.9) if isinstance(p, Switch) else p for k, p in catalogue.parts.items()}
    with pytest.raises(InputError) as error:
        make_design(spec_of("glide: {shortest: 1 ms, longest: 2 s, ranges: 2}"), Catalogue(weak))
    (problem,) = error.value.problems
    assert (problem.what, problem.fix) == (
        "the catalogue has no switch for 10 V",
        "add one with build.catalogue",
    )
