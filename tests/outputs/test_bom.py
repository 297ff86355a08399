import pytest

from modgen.netlist.model import Netlist, Part
from modgen.outputs.bom import bom_lines, cost, short_ranges


def by_key(job):
    return {line.key: line for line in bom_lines(job.netlist, job.catalogue)}


@pytest.mark.parametrize(
    ("refs", "text"),
    [
        (("R1",), "R1"),
        (("R2", "R1"), "R1, R2"),
        (("R1", "R2", "R3", "R4", "R7"), "R1-R4, R7"),
        (("R9", "R10", "R11", "R100"), "R9-R11, R100"),
        (("C1", "R2", "R3", "R4"), "C1, R2-R4"),
        (("R", "R1", "R2"), "R, R1, R2"),
        (("R01", "R2", "R3"), "R01, R2, R3"),
        ((), ""),
    ],
)
def test_references_in_short_ranges(refs, text):
    assert short_ranges(refs) == text


def test_every_part_of_the_netlist_is_in_one_line(make):
    for channels in (1, 2, 7):
        job = make(channels)
        refs = [ref for line in bom_lines(job.netlist, job.catalogue) for ref in line.refs]
        assert sorted(refs) == sorted(part.ref for part in job.netlist.parts)


def test_lines_are_sorted_by_class_and_value(job):
    lines = bom_lines(job.netlist, job.catalogue)
    assert [line.references for line in lines] == [
        "C2, C3, C5, C6",
        "C1, C4",
        "C7, C8",
        "D1, D2",
        "J5",
        "J1-J4",
        "R5, R10",
        "R3, R8",
        "R2, R7",
        "R4, R9",
        "R1, R6",
        "U1, U2",
    ]


def test_a_line_says_everything(job):
    line = by_key(job)["tl072c"]
    assert (line.value, line.description, line.quantity) == ("TL072C", "amplifier tl072c", 2)
    assert (line.order_code, line.alternates, line.pack) == ("TL072CP", ("TL072CN",), 50)
    assert line.rating == "supply 36 V in all at most"
    film = by_key(job)["c-1u-pp"]
    assert (film.value, film.rating, film.tolerance, film.package) == ("1 µF", "63 V", "5 %", "axial-0207")
    assert by_key(job)["r-2k2"].value == "2.2 kΩ"
    assert by_key(job)["r-2k2"].rating == "250 mW, 200 V"
    assert by_key(job)["1n5819"].rating == "40 V, 1 A"
    assert by_key(job)["p-1m-log"].tolerance == "20 %"


def test_only_prices_that_are_made_up_are_called_invented(job):
    assert by_key(job)["tl072c"].invented
    assert not by_key(job)["r-330"].invented  # has no price at all


@pytest.mark.parametrize(("quantity", "price"), [(1, 0.9), (49, 0.9), (50, 0.7), (99, 0.7), (100, 0.5), (10**6, 0.5)])
def test_the_price_changes_at_its_break(job, quantity, price):
    assert by_key(job)["c-1u-pp"].unit_price(quantity) == price


def test_below_the_first_break_the_first_price_holds(job):
    assert by_key(job)["c-100n"].unit_price(3) == 0.05


def test_a_part_that_the_catalogue_lacks_gets_a_line_of_its_own(job):
    odd = (
        Part("R1", "1k", "LAND1", (("power", "1W"), ("tolerance", "5%"))),
        Part("R2", "1k", "LAND2"),
        Part("R3", "1k", "LAND2", (("part", "unheard-of"),)),
    )
    lines = bom_lines(Netlist("t", odd, ()), job.catalogue)
    assert [(line.references, line.key, line.known, line.rating) for line in lines] == [
        ("R1", "", False, "1W"),
        ("R2", "", False, ""),
        ("R3", "unheard-of", False, ""),
    ]
    assert lines[0].description == "not in the catalogue"
    assert cost(lines, 3, 0.0).without_price == 3


def test_cost_by_hand(job):
    order = cost(bom_lines(job.netlist, job.catalogue), 25, 0.1)
    found = {each.line.key: each for each in order.lines}
    film = found["c-1u-pp"]  # 2 a board: 50 and 5 spare, from 50 at 0.70
    assert (film.needed, film.spares, film.to_order, film.unit_price) == (50, 5, 55, 0.7)
    assert film.total == pytest.approx(38.5)
    assert found["header-2x5"].spares == 3  # 2.5 rounded up
    assert found["r-330"].total is None
    assert order.without_price == 1
    # by hand: 110 C 5.50, 55 film 38.50, 55 el 5.50, 55 D 5.50, 28 headers 8.40, 110 jacks 44.00,
    # 3 x 55 R 6.60, 55 controls 82.50, 55 amplifiers 22.00
    assert order.total == pytest.approx(218.5)
    assert order.per_board == pytest.approx(8.74)


def test_spares_are_not_bought_for_a_rounding_error(job):
    # 100 x 0.07 is 7.000000000000001 in binary: 7 spares, not 8
    lines = [line for line in bom_lines(job.netlist, job.catalogue) if line.key == "tl072c"]
    assert cost(lines, 130, 0.05).lines[0].spares == 13
    assert cost(lines, 50, 0.07).lines[0].spares == 7
    assert 100 * 0.07 > 7


def test_stock_is_taken_off_and_never_below_nothing(job):
    lines = bom_lines(job.netlist, job.catalogue)
    order = cost(lines, 10, 0.0, {"tl072c": 5, "1n5819": 100})
    found = {each.line.key: each.to_order for each in order.lines}
    assert found["tl072c"] == 15
    assert found["1n5819"] == 0


@pytest.mark.parametrize(("boards", "spares"), [(0, 0.0), (-1, 0.0), (1, -0.1)])
def test_impossible_orders_are_refused(job, boards, spares):
    with pytest.raises(ValueError, match=r"^boards must be 1 or more and spares not negative, not \S+ and \S+$"):
        cost(bom_lines(job.netlist, job.catalogue), boards, spares)
