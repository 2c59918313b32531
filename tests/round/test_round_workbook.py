"""Workbooks: read like a table; broken, hostile or half-calculated ones are refused, never read in part."""
# ruff: noqa: E501  (messages stand here as they are printed)

from __future__ import annotations

import io
import zipfile
from collections.abc import Callable
from datetime import date
from pathlib import Path

import openpyxl
from round_folder import HEAD, POTASSIUM, messages, read, unusable

DAY = date(2026, 1, 5)
HEADER = ["analyte", "specimen", "procedure", "result", "day"]
GOOD: list[list[object]] = [
    HEADER, ["K", 1, "A", 1.5, DAY], ["K", 1, "B", 1.75, DAY], ["K", "0002", "A", "<0.5", DAY], [],
    ["K", "0002", "B", 1e-7, DAY],
]


def workbook(rows: list[list[object]], *, sheets: int = 1) -> bytes:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "Results"
    for row in rows:
        sheet.append(row)
    for number in range(sheets - 1):
        book.create_sheet(f"More {number}")
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def changed(data: bytes, change: Callable[[bytes], bytes]) -> bytes:
    """The workbook with another text for its sheet."""
    stream = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(stream, "w") as new:
        for name in old.namelist():
            content = old.read(name)
            new.writestr(name, change(content) if "sheet1" in name else content)
    return stream.getvalue()


def plan(keys: str = "") -> str:
    return HEAD + f'[files]\ncomparison = {{ path = "c.xlsx"{keys} }}\n' + POTASSIUM


def refused(folder: Path, data: bytes, keys: str = "") -> str:
    told = unusable(folder, plan=plan(keys), tables={"c.xlsx": data})
    assert len(told) == 1
    return told[0]


def test_a_workbook_is_read_with_numbers_texts_and_dates(tmp_path: Path) -> None:
    data = read(tmp_path, plan=plan(), tables={"c.xlsx": workbook(GOOD)}).analytes[0]
    pairs = data.comparisons[0]
    assert (pairs.specimens, pairs.x.tolist(), pairs.y.tolist(), pairs.days) == (("1",), [1.5], [1.75], ("2026-01-05",))
    assert [(row.line, row.identity, row.result, row.why) for row in data.left_out] == [
        (4, "0002", "<0.5", "censored"), (6, "0002", "1e-07", "unpaired"),
    ]


def test_texts_with_a_decimal_comma_stand_beside_numbers(tmp_path: Path) -> None:
    rows = [*GOOD, ["K", 3, "A", "2,5", DAY], ["K", 3, "B", 2.25, DAY]]
    rows[3] = ["K", "0002", "A", "<0,5", DAY]
    data = read(tmp_path, plan=plan(', decimal = ","'), tables={"c.xlsx": workbook(rows)}).analytes[0]
    assert (data.problems, data.comparisons[0].x.tolist(), data.comparisons[0].y.tolist()) == (
        (), [1.5, 2.5], [1.75, 2.25],
    )


def test_error_cells_dates_and_truth_values_are_no_results(tmp_path: Path) -> None:
    rows = [*GOOD, ["K", 4, "A", "#N/A", DAY], ["K", 4, "B", DAY, DAY], ["K", 5, "B", True, DAY]]
    data = read(tmp_path, plan=plan(), tables={"c.xlsx": workbook(rows)}).analytes[0]
    assert [message.split(": not a number")[0] for message in messages(data)] == [
        'c.xlsx:7: result: "#N/A"', 'c.xlsx:8: result: "2026-01-05"', 'c.xlsx:9: result: "TRUE"',
    ]


def test_a_formula_without_a_stored_value_is_refused(tmp_path: Path) -> None:
    assert refused(tmp_path, workbook([*GOOD, ["K", 4, "A", "=1+1", DAY]])) == (
        "c.xlsx:7: column 4 holds a formula without a stored value; open the workbook, let it calculate and save it again"
    )


def test_a_sheet_must_be_named_where_there_are_several(tmp_path: Path) -> None:
    book = workbook(GOOD, sheets=2)
    assert refused(tmp_path, book) == "c.xlsx: has 2 sheets; set sheet to one of: Results, More 0"
    assert refused(tmp_path, book, ', sheet = "Result"') == (
        'c.xlsx: has no sheet "Result"; set sheet to one of: Results, More 0'
    )
    data = read(tmp_path, plan=plan(', sheet = "Results"'), tables={"c.xlsx": book})
    assert data.analytes[0].rows["comparison"].read == 4


def test_broken_archives_are_refused(tmp_path: Path) -> None:
    good = workbook(GOOD)
    broken = [b"", good[:-300], good[:200], b"analyte,specimen\n", changed(good, lambda xml: xml[: len(xml) // 2])]
    for data in broken:
        message = refused(tmp_path, data)
        assert message.startswith("c.xlsx: is no readable workbook (")
        assert message.endswith("; save it again as XLSX or CSV")


def test_an_archive_that_unpacks_to_far_more_than_it_is_is_refused(tmp_path: Path) -> None:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("xl/worksheets/sheet1.xml", b"\0" * 30_000_000)
    assert refused(tmp_path, stream.getvalue()) == (
        "c.xlsx: unpacks to 30000000 bytes, more than a sheet of results would; export the table as CSV"
    )


def test_a_row_with_an_impossible_number_does_not_end_the_reading_unseen(tmp_path: Path) -> None:
    data = changed(workbook(GOOD), lambda xml: xml.replace(b'<row r="3"', b'<row r="99999999999"'))
    assert refused(tmp_path, data) == "c.xlsx: numbers a row that no sheet can have; save it again as XLSX or CSV"


def test_a_sheet_far_wider_than_a_table_is_refused(tmp_path: Path) -> None:
    assert refused(tmp_path, workbook([HEADER, ["K", *range(600)]])) == (
        "c.xlsx:2: has 601 columns, more than 500; export the table as CSV"
    )


def test_what_the_file_says_of_its_own_size_is_not_believed(tmp_path: Path) -> None:
    data = changed(workbook(GOOD), lambda xml: xml.replace(b'ref="A1:E6"', b'ref="A1:E2"'))
    assert read(tmp_path, plan=plan(), tables={"c.xlsx": data}).analytes[0].rows["comparison"].read == 4


def test_an_empty_sheet_and_a_cell_beyond_the_header_are_told(tmp_path: Path) -> None:
    assert refused(tmp_path, workbook([])) == 'c.xlsx: sheet "Results" is empty; name the sheet that holds the table'
    data = read(tmp_path, plan=plan(), tables={"c.xlsx": workbook([*GOOD, ["K", 4, "A", 1, DAY, "zz"]])}).analytes[0]
    assert [message.split(";")[0] for message in messages(data)] == [
        "c.xlsx:7: the row has 6 fields and the header 5"
    ]
