"""Bench tables as labs save them: encodings, delimiters, heading styles, workbooks; and what is wrong with a table."""

from __future__ import annotations

import csv
import io
from pathlib import Path
from tempfile import TemporaryDirectory

import openpyxl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from settlelab.errors import InputFaults
from settlelab.study import read_table


def table_of(folder: Path, content: str, encoding: str = "utf-8", name: str = "table.csv") -> Path:
    path = folder / name
    path.write_bytes(content.encode(encoding))
    return path


def faults_of(path: Path) -> list[str]:
    with pytest.raises(InputFaults) as refused:
        read_table(path)
    return str(refused.value).splitlines()


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
def test_encodings(tmp_path: Path, encoding: str) -> None:
    table = read_table(table_of(tmp_path, "particle,temperature [°C]\nKörnung²,21.4 ± 0.2\n", encoding))
    assert [column.heading for column in table.columns] == ["particle", "temperature [°C]"]
    assert [column.cells for column in table.columns] == [("Körnung²",), ("21.4 ± 0.2",)]


@pytest.mark.parametrize("encoding", ["utf-16-le", "utf-16-be"])
def test_utf_16_by_its_byte_order_mark(tmp_path: Path, encoding: str) -> None:
    table = read_table(table_of(tmp_path, "\ufeffparticle\nA-01\n", encoding))
    assert table.columns[0].name == "particle"


@pytest.mark.parametrize("delimiter", [",", ";", "\t"])
def test_delimiters(tmp_path: Path, delimiter: str) -> None:
    lines = ['particle|mass [mg]|"note, free"', "A-01|12.4|wet; then dry"]
    content = "\n".join(line.replace("|", delimiter) for line in lines)
    if delimiter == ";":
        content = content.replace("wet; then dry", '"wet; then dry"')
    table = read_table(table_of(tmp_path, content))
    assert [column.cells[0] for column in table.columns] == ["A-01", "12.4", "wet; then dry"]


def test_names_stay_as_typed(tmp_path: Path) -> None:
    table = read_table(table_of(tmp_path, "particle\n007\n1E5\nNA\n nan \n"))
    assert table.columns[0].cells == ("007", "1E5", "NA", "nan")


@pytest.mark.parametrize("units", ["-,rpm,deg", ",[rpm],[deg]", ",(rpm),(deg)"])
def test_a_row_of_units_below_the_headings(tmp_path: Path, units: str) -> None:
    table = read_table(table_of(tmp_path, f"no,speed,dial\n{units}\n1,600,54\n"))
    assert [column.unit for column in table.columns[1:]] == ["rpm", "deg"]
    assert table.rows == (3,)


def test_rows_count_as_a_spreadsheet_counts(tmp_path: Path) -> None:
    table = read_table(table_of(tmp_path, "\nparticle,mass [mg]\n\nA-01,1\n,\nA-02,2\n"))
    assert table.heading_row == 2
    assert table.rows == (4, 6)


CELLS = st.text(st.characters(codec="utf-8", exclude_categories=["C", "Z"]), max_size=8)


@given(
    cells=st.lists(st.tuples(CELLS, CELLS), min_size=1, max_size=5).map(lambda rows: [("A-01", "x"), *rows]),
    delimiter=st.sampled_from(",;\t"),
    encoding=st.sampled_from(["utf-8", "utf-8-sig", "utf-16"]),
)
def test_every_cell_comes_back_as_typed(cells: list[tuple[str, str]], delimiter: str, encoding: str) -> None:
    file = io.StringIO(newline="")
    csv.writer(file, delimiter=delimiter).writerows([("particle", "remark"), *cells])
    with TemporaryDirectory() as folder:
        table = read_table(table_of(Path(folder), file.getvalue(), encoding))
    assert list(zip(*(column.cells for column in table.columns), strict=True)) == [row for row in cells if any(row)]


def test_empty_cells_beyond_the_last_heading_do_not_count(tmp_path: Path) -> None:
    table = read_table(table_of(tmp_path, "particle,mass [mg],,\nA-01,1,,\n"))
    assert len(table.columns) == 2


@pytest.mark.parametrize(
    ("content", "is_comma"),
    [
        ("a;b\nx;12,5\n", True),
        ("a;b\nx;1,234\n", True),
        ("a;b\nx;12.5\n", False),
        ('a,b\nx,"12,5 ± 0,1"\n', True),
        ('a,b\nx,"1,234"\n', False),
    ],
)
def test_decimal_comma_is_taken_only_where_it_is_certain(tmp_path: Path, content: str, is_comma: bool) -> None:
    assert read_table(table_of(tmp_path, content)).decimal_comma is is_comma


def test_all_rows_of_the_wrong_length_are_named(tmp_path: Path) -> None:
    path = table_of(tmp_path, "particle,mass [mg],lot\nA-01,1\nA-02,2,B\nA-03,3,C,?\n")
    assert faults_of(path) == [
        'table.csv, row 2: "A-01 | 1" is not a row of 3 cells as the headings have (it has 2)',
        'table.csv, row 4: "A-03 | 3 | C | ?" is not a row of 3 cells as the headings have (it has 4)',
    ]


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        ("", "table.csv: missing, expected a row of headings and rows below it"),
        ("particle,lot\n", "table.csv, row 2: missing, expected a row below the headings"),
        ("lot,lot\nA,B\n", 'table.csv, row 1: "lot" is not a heading that stands only once'),
        ("lot,\nA,B\n", 'table.csv, row 2: "A | B" is not a row of 1 cells as the headings have (it has 2)'),
        ("lot,,mass\nA,B,1\n", "table.csv, row 1: missing, expected a heading for the cells below it"),
        ('lot\n"A\n', 'table.csv, row 2: "unexpected end of data" is not a table whose quotes are closed'),
        (
            "U(mass) [mg]\n1\n",
            'table.csv, row 1: "U(mass) [mg]" is not certain: give the standard uncertainty (k = 1) as "u(mass)"',
        ),
        ("mass [mg]\n[g]\n1\n", 'table.csv, row 1: "mass [mg]" is not in one unit: the row below says "g"'),
    ],
)
def test_what_is_wrong_with_a_table(tmp_path: Path, content: str, sentence: str) -> None:
    assert faults_of(table_of(tmp_path, content)) == [sentence]


def test_missing_file(tmp_path: Path) -> None:
    assert faults_of(tmp_path / "table.csv") == ["table.csv: missing, expected a table that can be read"]


def test_bytes_that_are_no_text(tmp_path: Path) -> None:
    path = tmp_path / "table.csv"
    path.write_bytes(bytes(range(256)))
    accepted = "text in UTF-8, UTF-16 with byte order mark, or Windows-1252"
    assert faults_of(path) == [f'table.csv: "other bytes" is not {accepted}']


def test_a_kind_of_file_that_is_not_read(tmp_path: Path) -> None:
    sentence = 'table.ods: "table.ods" is not a table as CSV or XLSX file'
    assert faults_of(table_of(tmp_path, "a\n1\n", name="table.ods")) == [sentence]


def workbook_of(folder: Path, *rows: list[object]) -> tuple[openpyxl.Workbook, Path]:
    book = openpyxl.Workbook()
    for row in rows:
        book.active.append(row)
    return book, folder / "table.xlsx"


def test_workbook(tmp_path: Path) -> None:
    book, path = workbook_of(
        tmp_path,
        ["particle", "lot", "mass [mg]", "share [%]", "seen"],
        [7, "007", 12.4, 0.625, True],
        [None, None, None, None, None],
        ["1E5", "NA", "12,5 ± 0,1", 1, False],
    )
    book.active["A2"].number_format = "000"
    book.active["D2"].number_format = "0.0%"
    book.create_sheet("remarks")
    book.save(path)
    table = read_table(path)
    assert [column.cells for column in table.columns] == [
        ("007", "1E5"),
        ("007", "NA"),
        ("12.4", "12,5 ± 0,1"),
        ("62.5 %", "1"),
        ("True", "False"),
    ]
    assert table.rows == (2, 4)
    assert table.notes == ('table.xlsx: sheet "Sheet" was read, not "remarks"',)


def test_workbook_with_a_formula_that_was_never_calculated(tmp_path: Path) -> None:
    book, path = workbook_of(tmp_path, ["mass [mg]"], ["=12+1"])
    book.save(path)
    sentence = '"=12+1" is not a value (cell A2: save the workbook once, so that it is calculated)'
    assert faults_of(path) == [f"table.xlsx, row 2: {sentence}"]


def test_what_is_no_workbook(tmp_path: Path) -> None:
    sentence = 'table.xlsx: "table.xlsx" is not an XLSX workbook'
    assert faults_of(table_of(tmp_path, "a,b\n", name="table.xlsx")) == [sentence]
