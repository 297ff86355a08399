"""Stock and price files of one's own: what is read, and every word that is said about what cannot be."""

import pytest

from modgen.catalogue import Evidence, PriceBreak, load_catalogue, read_prices, read_stock
from modgen.catalogue.delimited import LARGEST_TABLE, MOST_COLUMNS, MOST_PROBLEMS
from modgen.problems import InputError

KEYS = ("tl072-dip8", "jack-35-switched", "metal-film-0207-1k0")
QUANTITY_WHY = "    why: it is a whole number from {} to 10000000, in digits alone\n    fix: write it like 250"
PRICE_WHY = (
    "    why: it is a number without currency, sign or thousands\n    fix: write the price of one part, like 0.40"
)
ABOVE_0 = (
    "    why: a price is above 0 and at most 1000000; a part at 0 would count as free\n"
    "    fix: leave the row out when there is no price"
)


def written(tmp_path, content):
    path = tmp_path / "mine.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return path


@pytest.fixture
def stock(tmp_path):
    return lambda content, known=KEYS: dict(read_stock(written(tmp_path, content), known))


@pytest.fixture
def prices(tmp_path):
    def run(content, known=KEYS):
        found = read_prices(written(tmp_path, content), known)
        return {key: [(b.quantity, b.price) for b in breaks] for key, breaks in found.items()}

    return run


@pytest.fixture
def said(tmp_path):
    """Everything that is said of a file that cannot be used, with its bare name."""

    def run(read, content, known=KEYS):
        with pytest.raises(InputError) as caught:
            read(written(tmp_path, content), known)
        return str(caught.value).replace(f"{tmp_path}/", "")

    return run


# --- what is read ---------------------------------------------------------------------------------


def test_a_stock_file(stock):
    assert stock("part,quantity\ntl072-dip8,12\njack-35-switched,0\n") == {"jack-35-switched": 0, "tl072-dip8": 12}


def test_a_price_file_by_rising_quantity_and_key(prices):
    found = prices("part,quantity,price\ntl072-dip8,100,0.31\njack-35-switched,1,0.5\ntl072-dip8,1,0.5\n")
    assert list(found.items()) == [("jack-35-switched", [(1, 0.5)]), ("tl072-dip8", [(1, 0.5), (100, 0.31)])]


def test_columns_are_found_by_name_in_any_case_and_order(stock):
    page = 'Shelf,QUANTITY ,"Remark",Part\nA1,5,"blue, with\n""lid""",tl072-dip8\nB2,7,,jack-35-switched\n'
    assert stock(page) == {"tl072-dip8": 5, "jack-35-switched": 7}


@pytest.mark.parametrize("separator", [",", ";", "\t"])
@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_separators_and_line_ends(prices, separator, end):
    rows = (("part", "quantity", "price"), ("tl072-dip8", "1", "0.5"), ("tl072-dip8", "25", "0.4"))
    page = end.join(separator.join(row) for row in rows)
    assert prices(page) == prices(page + end) == {"tl072-dip8": [(1, 0.5), (25, 0.4)]}


def test_the_needed_columns_tell_the_separator_not_a_count(stock):
    # commas are the more frequent here, in a header and in texts that semicolons separate
    page = "part;shelf, row, place, box;quantity\ntl072-dip8;a, b, c, d;4\n"
    assert stock(page) == {"tl072-dip8": 4}


@pytest.mark.parametrize("separator", [";", "\t"])
def test_a_decimal_comma_where_no_comma_separates(prices, separator):
    page = "part;quantity;price;remark\ntl072-dip8;1;0,5;€ µ\ntl072-dip8;10;1,234;x\ntl072-dip8;11;2;x\n"
    assert prices(page.replace(";", separator)) == {"tl072-dip8": [(1, 0.5), (10, 1.234), (11, 2.0)]}


@pytest.mark.parametrize(
    ("mark", "encoding"),
    [(b"", "utf-8"), (b"\xef\xbb\xbf", "utf-8"), (b"\xff\xfe", "utf-16-le"), (b"\xfe\xff", "utf-16-be")],
)
def test_encodings(stock, mark, encoding):
    assert stock(mark + "part;größe;quantity\ntl072-dip8;µ;5\n".encode(encoding)) == {"tl072-dip8": 5}


def test_rows_without_any_text_hold_nothing(stock):
    assert stock("\n;;\npart;quantity;\n\n;;\ntl072-dip8;5;\n ; ;\n\n") == {"tl072-dip8": 5}
    assert stock("part,quantity\n") == {}


def test_without_a_list_of_keys_none_is_unknown(stock):
    assert stock("part,quantity\nanything,3\n", None) == {"anything": 3}


@pytest.mark.parametrize(("text", "held"), [("0", 0), ("007", 7), ("10000000", 10_000_000)])
def test_quantities_to_their_bounds(stock, text, held):
    assert stock(f"part,quantity\ntl072-dip8,{text}\n") == {"tl072-dip8": held}


# --- rows that cannot be used ---------------------------------------------------------------------


@pytest.mark.parametrize(
    "text", ["-1", "1.0", "1,5", "1 000", "1e3", "abc", "10000001", "9" * 500, "٣", "+3", "0x10", "nan"]
)
def test_a_quantity_that_is_none(said, text):
    shown = text if len(text) < 61 else text[:59] + "…"
    found = said(read_stock, f"part;quantity\ntl072-dip8;{text}\n")
    assert found == f"mine.csv:2:12: error: the quantity is '{shown}'\n{QUANTITY_WHY.format(0)}"


def test_an_empty_quantity_is_not_nothing_on_hand(said):
    found = said(read_stock, "part,quantity\ntl072-dip8,\n")
    assert found == f"mine.csv:2:12: error: the quantity is empty\n{QUANTITY_WHY.format(0)}"


def test_a_break_begins_at_one(said):
    found = said(read_prices, "part,quantity,price\ntl072-dip8,0,0.5\n")
    assert found == f"mine.csv:2:12: error: the quantity is '0'\n{QUANTITY_WHY.format(1)}"


@pytest.mark.parametrize("text", ["-0.5", "€ 0.5", "1.234,50", "1 234", "1e-2", ".5", "0.", "nan", "inf", "0,5,0"])
def test_a_price_that_is_none(said, text):
    found = said(read_prices, f"part;quantity;price\ntl072-dip8;1;{text}\n")
    assert found == f"mine.csv:2:14: error: the price is '{text}'\n{PRICE_WHY}"


@pytest.mark.parametrize("text", ["0", "0.000", "1000000.01"])
def test_a_price_out_of_bounds(said, text):
    found = said(read_prices, f"part;quantity;price\ntl072-dip8;1;{text}\n")
    assert found == f"mine.csv:2:14: error: the price is '{text}'\n{ABOVE_0}"


def test_prices_to_their_bounds(prices):
    page = "part,quantity,price\ntl072-dip8,1,1000000\ntl072-dip8,2,0.000000001\n"
    assert prices(page) == {"tl072-dip8": [(1, 1e6), (2, 1e-9)]}


def test_a_quoted_comma_is_no_decimal_comma_beside_commas(said):
    assert said(read_prices, 'part,quantity,price\ntl072-dip8,1,"0,40"\n') == (
        "mine.csv:2:14: error: the price is '0,40'\n"
        "    why: a comma separates the cells of this file, so it is no decimal comma\n"
        "    fix: write 0.40, or separate the cells with semicolons"
    )


def test_an_unquoted_decimal_comma_beside_commas_is_a_cell_too_many(said):
    assert said(read_prices, "part,quantity,price\ntl072-dip8,1,0,40\n") == (
        "mine.csv:2:16: error: this row has more than the 3 cells of the header\n"
        "    why: a comma separates the cells of this file\n"
        "    fix: give each column its cell; put a text that holds the separator between quotation marks"
    )


@pytest.mark.parametrize(
    ("one", "two", "named"), [("0,5", "1.234", "point"), ("0.5", "1,234", "comma"), ("12,000", "3.5", "point")]
)
def test_one_decimal_mark_in_a_file(said, one, two, named):
    page = f"part;quantity;price\ntl072-dip8;1;7\ntl072-dip8;2;{one}\ntl072-dip8;3;{two}\n"
    assert said(read_prices, page) == (
        f"mine.csv:4:14: error: the price '{two}' has a decimal {named}\n"
        "    why: the price at line 3 has the other one, so one of the two may set off thousands\n"
        "    fix: write all prices of a file with the same decimal mark"
    )


def test_an_unknown_part_with_the_nearest_key(said):
    why = (
        "    why: rows are matched by the catalogue's keys; "
        "one of your own goes in a catalogue file under build.catalogue\n"
    )
    assert said(read_stock, "part,quantity\nTL072-DIP8,3\nzzz,4\n") == (
        f"mine.csv:2:1: error: unknown part 'TL072-DIP8'\n{why}    fix: did you mean 'tl072-dip8'?\n"
        f"mine.csv:3:1: error: unknown part 'zzz'\n{why}    fix: `modgen catalogue` lists the keys"
    )


def test_a_part_twice(said):
    assert said(read_stock, "part,quantity\ntl072-dip8,3\njack-35-switched,1\ntl072-dip8,3\n") == (
        "mine.csv:4:1: error: the part 'tl072-dip8' stands twice\n"
        "    why: it stands at line 2 already\n"
        "    fix: write one row with the sum of both"
    )


def test_a_break_twice(said):
    assert said(read_prices, "part,quantity,price\ntl072-dip8,1,3\ntl072-dip8,2,3\ntl072-dip8,01,3\n") == (
        "mine.csv:4:1: error: the price of 'tl072-dip8' from 1 on stands twice\n"
        "    why: it stands at line 2 already\n"
        "    fix: leave one of the two rows"
    )


def test_every_bad_row_at_once(said):
    page = "part;quantity;price\n;x;0\ntl072-dip8;5\ntl072-dip8;-;\nnone;1;0,5\njack-35-switched;1;0,5;6\n;;;;9\n"
    found = [line for line in said(read_prices, page).splitlines() if not line.startswith("    ")]
    assert found == [
        "mine.csv:2:1: error: the part is empty",
        "mine.csv:2:2: error: the quantity is 'x'",
        "mine.csv:2:4: error: the price is '0'",
        "mine.csv:3:12: error: this row has 2 of the 3 cells of the header",
        "mine.csv:4:12: error: the quantity is '-'",
        "mine.csv:4:14: error: the price is empty",
        "mine.csv:5:1: error: unknown part 'none'",
        "mine.csv:6:24: error: this row has more than the 3 cells of the header",
        "mine.csv:7:5: error: this row has more than the 3 cells of the header",
    ]


def test_lines_are_counted_through_cells_that_hold_line_ends(said):
    page = 'part,note,quantity\r\ntl072-dip8,"two\r\nlines",1\r\n  jack-35-switched,"a",x\r\n'
    assert said(read_stock, page).startswith("mine.csv:4:24: error: the quantity is 'x'\n")


@pytest.mark.parametrize("cell", ['"tl072-dip8', '"tl072"-dip8', ' "tl072-dip8'])
def test_quotation_marks_that_do_not_pair(said, cell):
    assert said(read_stock, f"part,quantity\n{cell},3\njack-35-switched,x\n") == (
        "mine.csv:2:1: error: the quotation marks of this cell do not hold it whole\n"
        '    why: a cell that begins with " ends with ", and " inside it is written twice\n'
        "    fix: mend the quotation marks, or take them away\n"
        f"mine.csv:3:18: error: the quantity is 'x'\n{QUANTITY_WHY.format(0)}"
    )


def test_problems_beyond_those_that_are_told_are_counted(said):
    lines = said(read_stock, "part,quantity\n" + "tl072-dip8\n" * (MOST_PROBLEMS + 7)).splitlines()
    errors = [line for line in lines if ": error: " in line]
    assert len(errors) == MOST_PROBLEMS + 1
    assert errors[-1] == f"mine.csv:{MOST_PROBLEMS + 2}:1: error: 7 more problems from here on"


# --- files that cannot be used --------------------------------------------------------------------


def test_missing_columns_are_each_named(said):
    assert said(read_prices, "part;prices\ntl072-dip8;1\n") == (
        "mine.csv:1:1: error: this price file has no column 'price'\n"
        "    why: its first row, with a semicolon between, names 'part', 'prices'\n"
        "    fix: is it 'prices'? Call it price\n"
        "mine.csv:1:1: error: this price file has no column 'quantity'\n"
        "    why: its first row, with a semicolon between, names 'part', 'prices'\n"
        "    fix: name the columns part, quantity, price in the first row"
    )


def test_a_column_twice(said):
    assert said(read_stock, "part,quantity,Quantity\n") == (
        "mine.csv:1:15: error: the column 'quantity' stands twice\n"
        "    why: it stands at line 1, column 6 already\n"
        "    fix: leave one of the two"
    )


def test_columns_that_would_change_what_prices_mean(said):
    assert said(read_prices, "part,quantity,price,Pack,currency\n") == (
        "mine.csv:1:21: error: the column 'pack' is not read\n"
        "    why: pack sizes come from the catalogue\n"
        "    fix: remove the column; a catalogue file of your own can state pack\n"
        "mine.csv:1:26: error: the column 'currency' is not read\n"
        "    why: prices are numbers without a currency\n"
        "    fix: bring all prices into one currency and remove the column"
    )


@pytest.mark.parametrize("content", [b"", b"\n\n", b"  ,  \n", b"\xef\xbb\xbf"])
def test_an_empty_file(said, content):
    assert said(read_stock, content) == (
        "mine.csv:1:1: error: this stock file is empty\n    fix: begin it with the row part,quantity"
    )


@pytest.mark.parametrize(
    ("content", "what", "why"),
    [
        (
            b"part,quantity\ngr\xfcn,1\n",
            "2:3: error: this stock file is not UTF-8 text: byte 17 is 0xFC",
            "it is a binary file, or text in another encoding",
        ),
        (
            b"\xef\xbb\xbfpart\xff",
            "1:5: error: this stock file is not UTF-8 text: byte 8 is 0xFF",
            "it is a binary file, or text in another encoding",
        ),
        (
            b"\xff\xfe" + "part\nq".encode("utf-16-le") + b"u",
            "2:2: error: this stock file is not UTF-16 text: byte 15 is 0x75",
            "its first two bytes say UTF-16",
        ),
        (
            "part".encode("utf-16-le"),
            "1:2: error: the control character U+0000 stands in this stock file",
            "it is a binary file, or text in another encoding, such as UTF-16 without its byte order mark",
        ),
    ],
)
def test_bytes_that_are_no_text(said, content, what, why):
    assert said(read_stock, content) == f"mine.csv:{what}\n    why: {why}\n    fix: save it as CSV in UTF-8"


def test_files_out_of_bounds(said, tmp_path):
    size = LARGEST_TABLE + 2
    assert said(read_stock, b"x" * size) == (
        f"mine.csv: error: this stock file is too large: {size} bytes\n"
        f"    why: at most {LARGEST_TABLE} bytes are read\n"
        "    fix: check that this file is a stock file"
    )
    assert said(read_stock, "," * MOST_COLUMNS + "a") == (
        f"mine.csv:1:{MOST_COLUMNS + 1}: error: this stock file has more than {MOST_COLUMNS} columns\n"
        "    fix: check that it is a stock file"
    )
    with pytest.raises(InputError, match=r"^\S*absent.csv: error: this price file cannot be found\n"):
        read_prices(tmp_path / "absent.csv")
    with pytest.raises(InputError) as caught:
        read_prices(tmp_path)
    assert str(caught.value) == (
        f"{tmp_path}: error: this is a folder, not a price file\n"
        "    why: a price file is one CSV file\n"
        "    fix: name the file"
    )


# --- in the catalogue -----------------------------------------------------------------------------


def test_a_catalogue_with_prices_of_ones_own():
    shipped = load_catalogue()
    before = shipped.get("tl072-dip8")
    own = shipped.with_prices({"tl072-dip8": (PriceBreak(1, 0.5), PriceBreak(100, 0.31))}, "prices.csv")
    part = own.get("tl072-dip8")
    assert (part.unit_price, part.prices) == (0.5, (PriceBreak(1, 0.5), PriceBreak(100, 0.31)))
    evidence = [pair for pair in part.evidence if pair[0] == "prices"]
    assert evidence == [("prices", Evidence("own file", "prices.csv"))]
    assert [p for p in part.evidence if p[0] != "prices"] == [p for p in before.evidence if p[0] != "prices"]
    # what is looked up by type is the new record too, and nothing else has changed
    assert part in own.of(type(part))
    assert before not in own.of(type(part))
    assert [key for key in own.parts if own.get(key) != shipped.get(key)] == ["tl072-dip8"]
    assert list(own.parts) == list(shipped.parts)
    assert shipped.get("tl072-dip8") is before
    assert dict(before.evidence)["prices"].kind == "invented"


def test_a_price_for_no_part_is_an_error():
    with pytest.raises(KeyError, match="no-such-part"):
        load_catalogue().with_prices({"no-such-part": (PriceBreak(1, 1.0),)}, "prices.csv")
