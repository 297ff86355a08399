"""Packages, values and order codes in the words of those who sell and solder them."""

from __future__ import annotations

from dataclasses import replace

import pytest

from modgen.catalogue import load_catalogue
from modgen.catalogue.records import Body
from modgen.outputs.bom import brief_references, short_ranges
from modgen.outputs.partwords import ANY_MAKER, not_listed, order_words, package_words, value_words


@pytest.fixture(scope="module")
def shipped():
    return load_catalogue([])


@pytest.mark.parametrize(
    ("key", "package", "value"),
    [
        ("tl074-dip14", "DIP-14", "TL074CN"),
        ("tl074-soic14", "SOIC-14", "TL074CD"),
        ("tl072-dip8", "DIP-8", "TL072CP"),
        ("metal-film-0207-1k0", "0207", "1 kΩ"),
        ("chip-0603-10k", "0603", "10 kΩ"),
        ("chip-2512-750r", "2512", "750 Ω"),
        ("1n4001", "DO-41", "1N4001"),
        ("1n4148", "DO-35", "1N4148"),
        ("ss14", "SMA", "SS14"),
        ("1n5819-sod123", "SOD-123", "B5819W"),
        ("film-pet-5mm-63v-1u0", "box 5 mm", "1 µF"),
        ("c0g-radial-100v-470p", "radial 5.08 mm", "470 pF"),
        ("x7r-0805-50v-100n", "0805", "100 nF"),
        ("electrolytic-radial-25v-10u", "can 5 x 11 mm", "10 µF"),
        ("control-16mm-log-1m0", "panel, 16 mm", "1 MΩ"),
        ("control-9mm-log-1m0", "panel, 9 mm", "1 MΩ"),
        ("header-2x5", "2 x 5, 2.54 mm", "2 x 5 header"),
        ("jack-35-switched", "panel, 9 x 10.5 mm", "3.5 mm socket"),
    ],
)
def test_shipped_parts_in_words(shipped, key, package, value):
    record = shipped.get(key)
    assert package_words(record) == package
    assert value_words(record, record.order_code or key) == value


def test_no_shipped_part_shows_a_word_for_programs(shipped):
    for record in shipped.parts.values():
        assert package_words(record) != record.body.package, record.key
        assert value_words(record, record.key) != record.key
        code, alternates = order_words(record)
        assert code != record.key
        assert code or alternates


def test_a_size_that_has_no_name_is_given(shipped):
    chip = shipped.get("chip-0603-10k")
    assert package_words(replace(chip, body=replace(chip.body, length=4.0e-3, width=4.0e-3))) == "chip 4 x 4 mm"
    assert package_words(replace(chip, body=Body("owners-own", 1e-3, 1e-3, 1e-3))) == "owners-own"
    # 9 % off is still of that size, 12 % is not
    assert package_words(replace(chip, body=replace(chip.body, length=1.6e-3 * 1.09))) == "0603"
    assert package_words(replace(chip, body=replace(chip.body, length=1.6e-3 * 1.12))) == "chip 1.79 x 0.8 mm"


def test_parts_without_an_order_code_are_any_makers(shipped):
    resistor = shipped.get("metal-film-0207-1k0")
    assert order_words(resistor) == ("", (ANY_MAKER,))
    assert order_words(replace(resistor, order_code=resistor.key)) == ("", (ANY_MAKER,))
    assert order_words(replace(resistor, order_code="MBB02070C1001")) == ("MBB02070C1001", ())
    assert order_words(replace(resistor, alternates=("X1",))) == ("", ("X1",))
    assert order_words(shipped.get("1n4001")) == ("1N4001", ("1N4002", "1N4004", "1N4007"))


def test_types_without_a_code_are_named_by_kind(shipped):
    diode = replace(shipped.get("ss14"), order_code="", key="mine")
    assert value_words(diode, "mine") == "Schottky diode"
    assert value_words(replace(diode, schottky=False), "mine") == "silicon diode"
    amplifier = replace(shipped.get("tl072-dip8"), order_code="", key="mine")
    assert value_words(amplifier, "mine") == "TL07x"


def test_what_a_list_does_not_have(shipped):
    keys = (
        ["jack-35-switched"] * 3
        + ["control-16mm-log-1m0"] * 2
        + ["tl074-dip14", "tl072-dip8", "tl072-dip8", "header-2x5"]
    )
    found = not_listed([shipped.get(key) for key in keys])
    assert [row[:2] for row in found] == [
        ("Bare board", 1),
        ("Front panel with its screws", 1),
        ("Knobs", 2),
        ("Sockets, DIP-8", 2),
        ("Sockets, DIP-14", 1),
        ("Power cables", 1),
    ]
    assert found[1][2] == "holes for 5 panel parts; their nuts come with them"
    assert [row[0] for row in not_listed([shipped.get("tl072-soic8")])] == ["Bare board"]


@pytest.mark.parametrize("step", [2, 3, 11, 13, 21, 22])
def test_steps_are_named_in_english(step):
    refs = [f"R{n}" for n in range(1, 10 * step, step)]
    ending = {2: "2nd", 3: "3rd", 11: "11th", 13: "13th", 21: "21st", 22: "22nd"}[step]
    assert brief_references(refs) == f"R1 to {refs[-1]} (every {ending})"


def test_few_or_uneven_references_are_told_one_by_one():
    assert brief_references([]) == ""
    assert brief_references(["R1", "R2", "R3", "R7"]) == "R1-R3, R7"
    uneven = [f"R{n}" for n in (1, 3, 9, 27, 41, 44, 60, 61, 90)]
    assert brief_references(uneven) == short_ranges(uneven)
