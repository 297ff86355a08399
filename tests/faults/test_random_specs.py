"""Random modules that can be built raise no alarm: five hundred, of which most are asked for within reason."""

from __future__ import annotations

import random
from dataclasses import replace

import pytest

from modgen.circuit.plan import plan_of
from modgen.design import make_design
from modgen.problems import InputError
from modgen.rules.engine import judge
from modgen.spec import read_spec

SEED = 20
FEW, MANY = 40, 500
#: share of specs that sizing must not refuse [-]: 300 of 500
LEAST_BUILT = 0.6

#: types that are sold for each mount, and those for one supply
AMPLIFIERS = {
    "through-hole": ("TL07x", "LF35x", "OPAx134", "OPA2604"),
    "surface": ("TL07x", "TL07xH", "OPAx192", "OPAx134"),
}
SINGLE_AMPLIFIERS = {"through-hole": ("TLC27x", "MCP600x"), "surface": ("OPAx192", "TLC27x")}
#: signals that rails of a size leave room for [V]
SPANS = {5: (2, 3), 9: (2, 3, 4), 12: (2, 5, 5), 15: (5, 8, 8), 18: (5, 8, 10)}


def drawn(draw: random.Random, number: int) -> str:
    """A spec within reason: what it leaves out, and the odd thing that it asks for, are up to chance."""
    channels = draw.choice((1, 1, 2, 2, 3, 4, 5, 6, 8))
    inputs = channels if draw.random() < 0.7 else draw.randint(1, channels)
    outputs = channels if draw.random() < 0.7 else draw.randint(channels, 3 * channels)
    single = draw.random() < 0.25
    positive = draw.choice((5, 9, 12, 15) if single else (9, 12, 12, 12, 15, 18))
    negative = 0 if single else -positive if draw.random() < 0.9 else -draw.choice((9, 12, 15))
    tolerance = draw.choice((1, 2, 5, 5, 5, 10))
    shortest = draw.choice((2, 5, 10, 20, 50))
    longest = round(shortest * 10 ** draw.uniform(0.5, 2.3))
    lines = [
        f"module: Random {number}",
        f"channels: {channels}",
        f"jacks: {{inputs: {inputs}, outputs: {outputs}}}",
        f"rails: {{positive: {positive} V, negative: {negative} V, tolerance: {tolerance} %}}",
    ]
    glide = [f"shortest: {shortest} ms", f"longest: {longest} ms"]
    if draw.random() < 0.3:
        glide.append(f"measure: {draw.choice(('rise', 'time-constant', 'settle'))}")
    if draw.random() < 0.2:
        glide.append("cover: worst-case")
    if draw.random() < 0.3:
        glide.append(f"taper: {draw.choice(('linear', 'log', 'reverse-log'))}")
    if draw.random() < 0.15:
        glide.append("ranges: 2")
    lines.append(f"glide: {{{', '.join(glide)}}}")
    if draw.random() < 0.4:
        lines.append("normalling: chain")
    top = draw.choice(SPANS[min(positive, -negative or positive)])
    signal = [f"span: {f'0 V to {top} V' if single else f'±{top} V'}"]
    if draw.random() < 0.3:
        signal.append(f"source: {draw.choice(('100R', '470R', '1k', '2k2'))}")
    if draw.random() < 0.4:
        signal.append(f"load: {draw.choice(('20k', '47k', '100k', '1M'))}")
    if draw.random() < 0.3:
        signal.append("pitch: true")
    lines.append(f"signal: {{{', '.join(signal)}}}")
    if draw.random() < 0.2:
        lines.append(f"output: {{protection: {draw.choice(('inside', 'outside'))}}}")
    if draw.random() < 0.3:
        lines.append(f"accuracy: {{scale: {draw.choice((1, 2, 5))} %, offset: {draw.choice((50, 100, 300))} mV}}")
    mount = draw.choice(("through-hole", "surface"))
    types = (SINGLE_AMPLIFIERS if single else AMPLIFIERS)[mount]
    build = [
        f"mount: {mount}",
        f"amplifier: {'auto' if draw.random() < 0.6 else draw.choice(types)}",
        f"prefer: {draw.choice(('cost', 'accuracy', 'size'))}",
    ]
    lines.append(f"build: {{{', '.join(build)}}}")
    return "\n".join(lines) + "\n"


def alarms(count: int, catalogue, folder) -> tuple[int, dict[str, list[str]]]:
    """How many of so many specs sizing did not refuse, and the errors that rules found in those, by the spec's text."""
    built, found = 0, {}
    path = folder / "spec.yaml"
    for number in range(count):
        text = drawn(random.Random(SEED * 1000 + number), number)
        path.write_text(text, encoding="utf-8")
        try:
            spec = read_spec(path)
            design = make_design(spec, catalogue)
        except InputError:
            continue
        built += 1
        netlist = replace(plan_of(design, {}).netlist, library_messages=())
        report = judge(netlist, catalogue, spec, intended=netlist)
        errors = [f"{f.rule} {list(f.parts)}: {f.message}" for f in report.findings if f.level == "error"]
        if errors:
            found[text] = errors
    return built, found


def test_specs_differ():
    texts = {drawn(random.Random(SEED * 1000 + number), 0) for number in range(MANY)}
    assert len(texts) > 0.99 * MANY


def test_no_random_module_raises_an_alarm(catalogue, tmp_path):
    built, found = alarms(FEW, catalogue, tmp_path)
    assert found == {}
    assert built >= LEAST_BUILT * FEW


@pytest.mark.slow
def test_none_of_five_hundred_does(catalogue, tmp_path):
    built, found = alarms(MANY, catalogue, tmp_path)
    assert found == {}
    assert built >= LEAST_BUILT * MANY
