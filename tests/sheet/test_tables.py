"""Tables of data: what is read from a captioned table, and where its mistakes are."""

from __future__ import annotations

from pathlib import Path

import pytest

import loadpath
from loadpath.formula.canonical import text
from loadpath.formula.statements import Column, Faulty, Statement, Table
from loadpath.sheet import Sheet
from loadpath.sheet.tables import MOST_COLUMNS, MOST_ROWS

HEAD = "---\ntitle: Tables\n---\n\n"
PLATES = """Table plates: the pieces of the girder [draw]

| piece      | b [mm] | n   |
|------------|--------|-----|
| top flange | 2*45   | 2   |
| web        | 1 in   | n_0 |
"""


def sheet_of(body: str) -> Sheet:
    return loadpath.read_text(HEAD + body)


def statements(body: str) -> tuple[Statement, ...]:
    sheet = sheet_of(body)
    assert sheet.findings == ()
    return sheet.statements


def columns(body: str) -> dict[str, Column]:
    return {each.name: each for each in statements(body) if isinstance(each, Column)}


def cells(body: str, name: str = "t.a") -> list[str]:
    """The cells of a column as canonical text."""
    return [text(cell) for cell in columns(body)[name].cells]


def found(body: str) -> list[tuple[int, str, str]]:
    """Line within the body, what the caret stands under, and slug, of each finding."""
    sheet = sheet_of(body)
    above = HEAD.count("\n")
    return [(f.line - above, sheet.source.cut(f.span) if f.span else "", f.slug) for f in sheet.findings]


def table(*rows: str, caption: str = "Table t: a table", head: str = "| r | a [mm] |") -> str:
    rule = "|---" * (head.replace("\\|", "").count("|") - 1) + "|"
    return "\n".join((caption, "", head, rule, *rows)) + "\n"


# --- captions -----------------------------------------------------------------------------------------------


def test_a_table_is_a_statement_and_each_column_one() -> None:
    sheet = sheet_of(PLATES)
    assert sheet.findings == ()
    whole, b, n = sheet.statements
    assert isinstance(whole, Table) and isinstance(b, Column) and isinstance(n, Column)
    assert (whole.name, whole.head, whole.rows) == ("plates", "piece", 2)
    assert whole.labels == b.labels == n.labels == ("top flange", "web")
    assert (b.name, b.table, b.place, n.name, n.place) == ("plates.b", "plates", 0, "plates.n", 1)
    assert b.unit is not None and b.unit.text == "mm" and n.unit is None
    assert [text(cell) for cell in b.cells] == ["2 * 45 mm", "1 in"]
    assert [text(cell) for cell in n.cells] == ["2", "n_0"]
    assert {each.notes[0].text for each in sheet.statements} == {"the pieces of the girder [draw]"}


def test_places_in_a_table_are_places_in_the_sheet() -> None:
    sheet = sheet_of(PLATES)
    whole, b, n = sheet.statements
    assert isinstance(whole, Table) and isinstance(b, Column) and isinstance(n, Column)
    cut = sheet.source.cut
    assert cut(whole.name_span) == "plates"
    assert cut(whole.span) == PLATES.rstrip("\n")
    assert (cut(b.name_span), cut(b.span), cut(n.span)) == ("b", "b [mm]", "n")
    assert b.unit is not None and cut(b.unit.span) == "mm"
    assert [cut(cell.span) for cell in (*b.cells, *n.cells)] == ["2*45", "1 in", "2", "n_0"]  # type: ignore[attr-defined]
    ((key, place),) = whole.notes[0].citations
    assert (key, cut(place)) == ("draw", "draw")


@pytest.mark.parametrize("gap", ["\n", "\n\n", "\n\n\n\n"])
def test_blank_lines_between_caption_and_table_mean_nothing(gap: str) -> None:
    assert cells(f"Table t: a table{gap}| r | a [mm] |\n|---|---|\n| p | 2 |\n") == ["2 mm"]


def test_a_caption_of_several_lines_and_sources() -> None:
    caption = "Table t: the pieces\nof the girder, with\ttheir   widths [draw] [basis]"
    (whole, column) = statements(table("| p | 2 |", caption=caption))
    assert whole.notes == column.notes
    assert whole.notes[0].text == "the pieces of the girder, with their widths [draw] [basis]"
    assert [key for key, _ in whole.notes[0].citations] == ["draw", "basis"]


@pytest.mark.parametrize("caption", ["Table t:", "Table  t : x", "Table t:x", "Table t: `x` *y* [a]"])
def test_captions_that_are_captions(caption: str) -> None:
    assert cells(table("| p | 2 |", caption=caption)) == ["2 mm"]


@pytest.mark.parametrize(
    "caption",
    ["Table 3: x", "table t: x", "The table t: x", "Tablet: x", "Table t", "Table: x", "*Table t:* x"],
)
def test_captions_that_are_prose(caption: str) -> None:
    assert statements(table("| p | 2 |", caption=caption)) == ()


def test_a_table_without_a_caption_is_prose() -> None:
    assert statements("| r | a [mm] |\n|---|---|\n| p | no number |\n") == ()
    assert statements("Words above.\n\n| r | a [mm] |\n|---|---|\n| p |\n") == ()


@pytest.mark.parametrize("below", ["", "Words.\n", "    x = 2\n", "## Heading\n", "* a list\n"])
def test_a_caption_that_no_table_follows(below: str) -> None:
    sheet = sheet_of(f"Table t: a table\n\n{below}")
    assert [f.slug for f in sheet.findings] == ["table-shape"]
    faulty = next(each for each in sheet.statements if isinstance(each, Faulty))
    assert faulty.names == ("t",)


def test_a_greek_name_is_its_spelled_one() -> None:
    assert list(columns(table("| p | 2 |", caption="Table σ_t: x", head="| r | Δ_1 [mm] |"))) == [
        "sigma_t.Delta_1"
    ]


@pytest.mark.parametrize("frame", ["> {}", "* {}", "  {}"])
def test_a_table_in_a_quotation_or_a_list_is_no_table_of_data(frame: str) -> None:
    body = table("| p | 2 |")
    lines = [
        frame.format(line) if i == 0 or frame[0] == ">" else f"  {line}"
        for i, line in enumerate(body.split("\n"))
    ]
    sheet = sheet_of("\n".join(lines) + "\n")
    if frame == "  {}":  # two spaces in front change nothing
        assert [type(each) for each in sheet.statements] == [Table, Column]
    else:
        assert sheet.statements == ()


@pytest.mark.parametrize("end", ["\r\n", "\r", "\n"])
def test_line_ends_of_other_systems(end: str, tmp_path: Path) -> None:
    file = tmp_path / "plates.sheet.md"
    file.write_bytes((HEAD + PLATES + "\n    A = plates.b\n").replace("\n", end).encode())
    sheet = loadpath.read(file)
    assert sheet.findings == ()
    assert [getattr(each, "name", "") for each in sheet.statements] == ["plates", "plates.b", "plates.n", "A"]
    (b,) = [each for each in sheet.statements if isinstance(each, Column) and each.name == "plates.b"]
    assert [text(cell) for cell in b.cells] == ["2 * 45 mm", "1 in"]
    assert sheet.source.cut(b.cells[1].span) == "1 in"  # type: ignore[attr-defined]


# --- labels -------------------------------------------------------------------------------------------------


def test_labels_are_what_a_reader_sees() -> None:
    rows = [
        "| **web** `x` | 1 |",
        "| a \\| b | 2 |",
        "| *top*  flange | 3 |",
        "| [rib](https://a.example) | 4 |",
        "| 3 kN*m | 5 |",
    ]
    column = columns(table(*rows))["t.a"]
    assert column.labels == ("web x", "a | b", "top flange", "rib", "3 kN*m")


def test_a_first_column_of_numbers_labels_nothing() -> None:
    found = columns(table("| 1 | 2 |", "| -3 mm | 4 |", "| 2 1/2 in | 6 |", head="| r [mm] | a |"))
    assert list(found) == ["t.r", "t.a"]
    assert [each.place for each in found.values()] == [0, 1]
    assert all(each.labels == () for each in found.values())
    assert [text(cell) for cell in found["t.r"].cells] == ["1 mm", "-3 mm", "2 1/2 in"]


def test_one_word_among_numbers_makes_labels() -> None:
    assert columns(table("| 1 | 2 |", "| two | 4 |"))["t.a"].labels == ("1", "two")


def test_an_expression_in_the_first_column_is_a_label() -> None:
    assert columns(table("| 1 + 2 | 2 |", "| a*b | 4 |"))["t.a"].labels == ("1 + 2", "a*b")


def test_two_rows_of_one_label() -> None:
    assert found(table("| **p** | 2 |", "| q | 3 |", "| p | 4 |")) == [(7, "p", "duplicate-row")]


def test_a_row_without_a_label() -> None:
    ((line, _, slug),) = found(table("| p | 2 |", "|  | 3 |"))
    assert (line, slug) == (6, "table-cell")


# --- headers ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("head", "place", "slug"),
    [
        ("| r | a mm |", "mm", "table-shape"),
        ("| r | a (mm) |", "(mm)", "table-shape"),
        ("| r | a [mm] b |", "b", "table-shape"),
        ("| r | a.b |", "a.b", "bad-syntax"),
        ("| r | sum |", "sum", "reserved-word"),
        ("| r | from [mm] |", "from", "reserved-word"),
        ("| r | a [] |", "]", "bad-unit"),
    ],
)
def test_header_cells_that_are_none(head: str, place: str, slug: str) -> None:
    assert found(table("| p | 2 |", head=head)) == [(3, place, slug)]


def test_an_empty_header_cell() -> None:
    ((line, _, slug),) = found(table("| p | 2 | 3 |", head="| r |  | a |"))
    assert (line, slug) == (3, "table-shape")


@pytest.mark.parametrize("name", ["a.b", "sum", "when"])
def test_names_that_a_table_cannot_have(name: str) -> None:
    ((line, place, _),) = found(table("| p | 2 |", caption=f"Table {name}: x"))
    assert (line, place) == (1, name)


def test_a_column_twice() -> None:
    assert [slug for _, _, slug in found(table("| p | 2 | 3 |", head="| r | σ | sigma |"))] == [
        "defined-twice"
    ]


# --- cells --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("typed", "read"),
    [
        ("45", "45 mm"), ("-45", "-45 mm"), ("1_000", "1_000 mm"), ("1.5e3", "1.5e3 mm"),
        ("2*45", "2 * 45 mm"), ("90/2", "90 mm / 2"), ("2*(40 + 5)", "2*(40 mm + 5 mm)"),
        ("45 - 2*3", "45 mm - 2 * 3 mm"), ("-(40 + 5)", "-(40 mm + 5 mm)"), ("2*90/4", "2 * 90 mm / 4"),
        ("1 in", "1 in"), ("2*1 in", "2 * 1 in"), ("1/2 in", "1/2 in"), ("b", "b"),
        ("2*b_1 + 1 mm", "2*b_1 + 1 mm"),
        ("t.a at \"p\"", 't.a at "p"'),
    ],
)  # fmt: skip
def test_a_number_takes_the_unit_of_its_header(typed: str, read: str) -> None:
    assert cells(table(f"| p | {typed} |")) == [read]


@pytest.mark.parametrize("typed", ["2^3", "sqrt(4)", "max(2, 3)*4", "(2 + 3)^2/5", "6/(2 + 1)", "<5 - 2>^2"])
def test_whatever_is_typed_in_numbers_takes_the_unit_once(typed: str) -> None:
    """The cell in millimetres is as large as the number by itself."""
    body = table(f"| p | {typed} |") + f'\n    x = t.a at "p"\n    y = ({typed})*(1 mm)\n'
    trace = loadpath.evaluate(sheet_of(body))
    assert [f.message for f in trace.findings if f.severity == "error"] == []
    assert trace["x"].si == pytest.approx(trace["y"].si, rel=1e-15)
    assert trace["x"].unit.dimension == trace["y"].unit.dimension


def test_a_header_of_plain_numbers_gives_no_unit() -> None:
    assert cells(table("| p | 2 |", "| q | 3/4 |", head="| r | a [1] |")) == ["2", "3/4"]
    assert cells(table("| p | 2 |", "| q | 3 kN |", head="| r | a |")) == ["2", "3 kN"]


@pytest.mark.parametrize(
    ("typed", "place", "slug"),
    [
        ("n/a", "", ""),
        ("about 3", "3", "table-cell"),
        ("3 [mm]", "[", "table-cell"),
        ("3,5", ",", "decimal-comma"),
        ("3mm", "mm", "table-cell"),
        ("-", "-", "table-cell"),
        ("3 mm/m/s", "", ""),
        ("(3", "(", "unbalanced-bracket"),
        ("a = 3", "=", "table-cell"),
        ('"b"', '"', "unknown-choice"),
        ("3 -- note", "--", "table-cell"),
    ],
)
def test_cells_that_cannot_be_read(typed: str, place: str, slug: str) -> None:
    sheet = sheet_of(table(f"| p | {typed} | 4 |", "| q | 2 | 5 |", head="| r | a [mm] | b |"))
    if not slug:  # read as a quotient of names, or as a unit that is not one: not for the reader to say
        assert sheet.findings == ()
        return
    ((line, at, what),) = found(table(f"| p | {typed} | 4 |", "| q | 2 | 5 |", head="| r | a [mm] | b |"))
    assert (line, at, what) == (5, place, slug)
    faulty = next(each for each in sheet.statements if isinstance(each, Faulty))
    assert faulty.names == ("t.a",)
    assert [each.name for each in sheet.statements if isinstance(each, Column)] == ["t.b"]


@pytest.mark.parametrize(("row", "column"), [("| p |  | 3 |", 8), ("|p||3|", 4), ("p |  | 3", 6)])
def test_an_empty_cell_is_on_the_stroke_that_closes_it(row: str, column: int) -> None:
    (finding,) = sheet_of(table(row, "| q | 1 | 2 |", head="| r | a | b |")).findings
    assert (finding.slug, finding.line - HEAD.count("\n"), finding.column) == ("table-cell", 5, column)


def test_strokes_within_a_cell_are_escaped() -> None:
    rows = ["| a \\| b | 2 |", "| `c \\| d` | 3 |"]
    assert columns(table(*rows))["t.a"].labels == ("a | b", "c | d")
    ((line, _, slug),) = found(table("| a | b | 2 |"))
    assert (line, slug) == (5, "table-shape")


def test_strokes_at_the_ends_may_be_left_out() -> None:
    assert cells("Table t: x\n\nr | a [mm]\n--|--\np | 2\nq | 3\n") == ["2 mm", "3 mm"]


@pytest.mark.parametrize(
    ("row", "says"), [("| p |", "1 cell"), ("| p | 2 | 3 |", "3 cells"), ("p", "1 cell")]
)
def test_rows_of_another_length(row: str, says: str) -> None:
    (finding,) = sheet_of(table("| q | 1 |", row)).findings
    assert (finding.slug, finding.line - HEAD.count("\n")) == ("table-shape", 6)
    assert says in finding.message and "2" in finding.message


def test_a_table_without_rows() -> None:
    ((line, _, slug),) = found(table())
    assert (line, slug) == (3, "table-shape")


def test_a_faulty_table_keeps_the_names_of_its_columns() -> None:
    """So that what hangs on them names this line."""
    (faulty,) = sheet_of(table("| p |", head="| r | a [mm] | b |")).statements
    assert isinstance(faulty, Faulty)
    assert {"t", "t.a", "t.b"} <= set(faulty.names)


# --- two-way tables -----------------------------------------------------------------------------------------


def test_a_table_of_quantities_in_the_header_is_two_way() -> None:
    (whole,) = statements(
        table("| 1 | 10 kN | 2*3 kN |", "| 3 ft | 30 kN | F |", head="| h [m] | 1 m | 2 m |")
    )
    assert isinstance(whole, Table) and whole.two_way is not None
    two_way = whole.two_way
    assert (whole.labels, whole.rows, whole.head) == ((), 2, "h [m]")
    assert [text(each) for each in two_way.across] == ["1 m", "2 m"]
    assert [text(each) for each in two_way.down] == ["1 m", "3 ft"]
    assert [[text(cell) for cell in row] for row in two_way.cells] == [["10 kN", "2 * 3 kN"], ["30 kN", "F"]]


def test_a_two_way_table_of_plain_numbers() -> None:
    (whole,) = statements(table("| 0.5 | 1 | 2 |", head="|  | -1 | 2.5 |"))
    assert isinstance(whole, Table) and whole.two_way is not None
    assert [text(each) for each in whole.two_way.across] == ["-1", "2.5"]
    assert [text(each) for each in whole.two_way.down] == ["0.5"]


def test_an_empty_cell_of_a_two_way_table() -> None:
    ((line, _, slug),) = found(table("| 1 | 2 |  |", head="| h | 1 | 2 |"))
    assert (line, slug) == (5, "table-cell")


def test_a_label_in_a_two_way_table() -> None:
    (finding,) = sheet_of(table("| top side | 2 | 3 |", head="| h | 1 | 2 |")).findings
    assert finding.slug == "table-cell"


# --- limits -------------------------------------------------------------------------------------------------


def test_the_number_of_columns() -> None:
    def wide(count: int) -> str:
        names = [f"c{i}" for i in range(count - 1)]
        return table("| p |" + " 1 |" * (count - 1), head=f"| r | {' | '.join(names)} |")

    assert len(columns(wide(MOST_COLUMNS))) == MOST_COLUMNS - 1
    assert [slug for _, _, slug in found(wide(MOST_COLUMNS + 1))] == ["over-limit"]


def test_a_table_of_ordinary_width_may_have_as_many_rows() -> None:
    rows = (f"| bolt {i} | 20 mm | 12.5 |" for i in range(MOST_ROWS))
    assert len(columns(table(*rows, head="| bolt | d | F [kN] |"))["t.d"].cells) == MOST_ROWS


def test_the_number_of_rows() -> None:
    def tall(count: int) -> str:
        return table(*("|1|2|" for _ in range(count)), head="|r|a [mm]|")

    assert len(cells(tall(MOST_ROWS))) == MOST_ROWS
    assert [slug for _, _, slug in found(tall(MOST_ROWS + 1))] == ["over-limit"]
