"""What a page means: defaults, units, jacks, and where each key stands."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable
from pathlib import Path

import pytest

from modgen.problems import Place
from modgen.spec import Jacks, Spec, Waiver, parse_spec, read_spec
from modgen.spec.keys import keys_of
from modgen.spec.model import Accuracy, Build, Glide, Order, Output, Rails, Signal

Page = Callable[..., str]


def test_four_keys_and_a_name_are_enough(page: Page) -> None:
    assert parse_spec(page()) == Spec(
        module="Lag",
        channels=4,
        jacks=Jacks(4, 4),
        rails=Rails(12.0, -12.0, 0.05),
        glide=Glide(0.005, 2.0, "rise", 1.0, 5 / 1200, "nominal", "log"),
        normalling="ground",
        signal=Signal(-5.0, 5.0, 1e3, 100e3, False),
        accuracy=Accuracy(0.02, 0.2),
        output=Output("auto"),
        build=Build("through-hole", "auto", "auto", "cost", (), ""),
        order=Order(1, 0.05, "", ""),
        waive=(),
    )


def test_every_key_stated() -> None:
    text = """\
module: "Größe 2: lag"
channels: 3
jacks: {inputs: 2, outputs: 3}
rails: {positive: 15 V, negative: -15V, tolerance: 10 %}
glide:
  shortest: 1m5s
  longest: 10 s
"""
    text = (
        text.replace("1m5s", "1500 us")
        + """\
  measure: settle
  step: 2 V
  within: 3 cents
  cover: worst-case
  taper: reverse-log
  ranges: 2
normalling: chain
signal: {span: -2 V to 8 V, source: 4k7, load: 1 MΩ, pitch: true}
accuracy: {scale: 3 cents, offset: 1 %}
output: {protection: inside}
build:
  mount: surface
  amplifier: TL07x
  capacitor: film-pp
  prefer: accuracy
  catalogue: [mine.yaml, "sub dir/more.yaml"]
  land_patterns: names.yaml
order: {boards: 25, spares: 2.5 %, stock: stock.csv, prices: prices.csv}
waive:
  - rule: stale-waiver
    parts: [R3, R4]
    reason: >
      there is a bag of them
      in the drawer
  - {rule: glide-range, parts: C1, reason: measured}
  - {rule: no-land-pattern, reason: by hand}
"""
    )
    spec = parse_spec(text)
    assert spec == Spec(
        module="Größe 2: lag",
        channels=3,
        jacks=Jacks(2, 3),
        rails=Rails(15.0, -15.0, 0.1),
        glide=Glide(0.0015, 10.0, "settle", 2.0, 3 / 1200, "worst-case", "reverse-log", 2),
        normalling="chain",
        signal=Signal(-2.0, 8.0, 4700.0, 1e6, True),
        accuracy=Accuracy(3 / 1200, 0.1),
        output=Output("inside"),
        build=Build("surface", "TL07x", "film-pp", "accuracy", ("mine.yaml", "sub dir/more.yaml"), "names.yaml"),
        order=Order(25, 0.025, "stock.csv", "prices.csv"),
        waive=(
            Waiver("stale-waiver", ("R3", "R4"), "there is a bag of them in the drawer", Place("x")),
            Waiver("glide-range", ("C1",), "measured", Place("x")),
            Waiver("no-land-pattern", (), "by hand", Place("x")),
        ),
    )
    assert spec.slug == "grosse-2-lag"
    assert [w.place for w in spec.waive] == [Place("spec.yaml", n, 5) for n in (27, 32, 33)]


def test_accuracy_follows_pitch_and_span(page: Page) -> None:
    assert parse_spec(page(signal="{pitch: true}")).accuracy == Accuracy(5 / 1200, 0.03)
    assert parse_spec(page(signal="{span: 0 V to 5 V}")).accuracy == Accuracy(0.02, 0.02 * 5.0)
    assert parse_spec(page(signal="{pitch: true}", accuracy="{offset: 1 %}")).accuracy == Accuracy(5 / 1200, 0.1)
    assert parse_spec(page(accuracy="{scale: 12 cents}")).accuracy == Accuracy(0.01, 0.2)
    for text in ("5 cents per octave", "5 cents/octave", "5 cents / octave", "'5 cents  per  octave '"):
        assert parse_spec(page(accuracy=f"{{scale: {text}}}")).accuracy.scale == 5 / 1200
    # the order of the keys on the page does not count
    assert parse_spec("accuracy: {offset: 1 %}\nsignal: {span: ±2 V}\n" + page()).accuracy == Accuracy(0.02, 0.04)


def test_default_texts_are_the_defaults_of_the_model(page: Page) -> None:
    """The text of each default and the dataclass default beside it say the same."""
    read = parse_spec(page())
    checked = 0
    for section in (read.rails, read.glide, read.signal, read.output, read.build, read.order):
        for item in dataclasses.fields(section):
            if item.default is not dataclasses.MISSING:
                assert getattr(section, item.name) == item.default, item.name
                checked += 1
    assert checked == 23


def test_every_field_is_a_key_but_for_the_reader_s_own() -> None:
    for model, others in ((Spec, {"file", "places"}), (Signal, {"high"}), (Waiver, {"place"}), (Glide, set())):
        names = {item.name for item in dataclasses.fields(model)}
        assert names - {name for name, _ in keys_of(model)} == others


@pytest.mark.parametrize(
    ("channels", "jacks", "inputs", "outputs"),
    [
        ("1", "2", 1, 1),
        ("4", "5", 1, 4),
        ("4", "7", 3, 4),
        ("4", "8", 4, 4),
        ("4", "9", 4, 5),
        ("4", "36", 4, 32),
        ("64", "65", 1, 64),
        ("64", "576", 64, 512),
        ("4", "{inputs: 1, outputs: 32}", 1, 32),
        ("4", "{inputs: 4, outputs: 4}", 4, 4),
    ],
)
def test_jacks(page: Page, channels: str, jacks: str, inputs: int, outputs: int) -> None:
    spec = parse_spec(page(channels=channels, jacks=jacks))
    assert spec.jacks == Jacks(inputs, outputs)
    assert sum(spec.outputs_of(k) for k in range(1, spec.channels + 1)) == outputs
    assert {spec.input_of(k) for k in range(1, spec.channels + 1)} == set(range(1, inputs + 1))


@pytest.mark.parametrize(
    ("rails", "positive", "negative"),
    [
        ("{positive: 5 V, negative: 0 V}", 5.0, 0.0),
        ("{positive: 3 V, negative: -0 V}", 3.0, 0.0),
        ("{positive: 18 V, negative: -18 V}", 18.0, -18.0),
        ("{positive: 3V3, negative: −3.3 V}", 3.3, -3.3),
    ],
)
def test_rails(page: Page, rails: str, positive: float, negative: float) -> None:
    spec = parse_spec(page(rails=rails, signal="{span: 0 V to 2 V}"))
    assert (spec.rails.positive, spec.rails.negative) == (positive, negative)
    assert spec.rails.single == (negative == 0)
    assert str(spec.rails.negative) != "-0.0"


def test_the_bounds_themselves_are_read(page: Page) -> None:
    assert parse_spec(page(module="x" * 60)).module == "x" * 60
    assert parse_spec(page(signal="{span: 0 V to 1 mV}")).signal.high == 0.001
    assert parse_spec(page(signal="{span: ±20 V}")).signal.low == -20.0
    assert parse_spec(page(signal="{load: 10 kΩ}")).signal.load == 10e3
    assert parse_spec(page(signal="{load: 1 TΩ}")).signal.load == 1e12
    assert parse_spec(page(glide="{shortest: 100 us, longest: 1000 s}")).glide.longest == 1000.0
    assert parse_spec(page(order="{boards: 1000000, spares: 100 %}")).order.boards == 1_000_000


@pytest.mark.parametrize(("text", "path"), [("none", ""), ("'none'", ""), ("./none", "./none"), ("a b.csv", "a b.csv")])
def test_paths(page: Page, text: str, path: str) -> None:
    assert parse_spec(page(order=f"{{stock: {text}}}")).order.stock == path


def test_places(page: Page) -> None:
    spec = parse_spec(page(signal="{load: 50k}", waive="[{rule: a, reason: b}]"), "specs/a.yaml")
    assert dict(spec.places) == {
        "module": Place("specs/a.yaml", 1, 1),
        "channels": Place("specs/a.yaml", 2, 1),
        "jacks": Place("specs/a.yaml", 3, 1),
        "rails": Place("specs/a.yaml", 4, 1),
        "rails.positive": Place("specs/a.yaml", 4, 9),
        "rails.negative": Place("specs/a.yaml", 4, 25),
        "glide": Place("specs/a.yaml", 5, 1),
        "glide.shortest": Place("specs/a.yaml", 5, 9),
        "glide.longest": Place("specs/a.yaml", 5, 25),
        "signal": Place("specs/a.yaml", 6, 1),
        "signal.load": Place("specs/a.yaml", 6, 10),
        "waive": Place("specs/a.yaml", 7, 1),
        "waive[1]": Place("specs/a.yaml", 7, 9),
        "waive[1].rule": Place("specs/a.yaml", 7, 10),
        "waive[1].reason": Place("specs/a.yaml", 7, 19),
    }
    assert spec.place("signal.span") == Place("specs/a.yaml", 6, 1)
    assert spec.place("build.mount") == Place("specs/a.yaml", 1, 1)
    assert spec.file == "specs/a.yaml"


def test_places_of_the_items_of_a_list(page: Page) -> None:
    spec = parse_spec(page(build="{catalogue: [a.yaml, b.yaml]}"))
    assert spec.place("build.catalogue") == Place("spec.yaml", 6, 9)
    assert spec.place("build.catalogue[2]") == Place("spec.yaml", 6, 29)
    assert parse_spec(page(build="{catalogue: a.yaml}")).place("build.catalogue[1]") == Place("spec.yaml", 6, 20)


def test_a_file_keeps_its_name(page: Page, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "a.yaml").write_text(page(), encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    assert read_spec("a.yaml").file == "a.yaml"
    assert read_spec(Path("a.yaml")) == parse_spec(page())
