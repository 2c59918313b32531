"""The files: any delimiter, decimal mark and encoding are read as they are; what is doubtful or broken is refused."""
# ruff: noqa: E501, ISC004  (messages stand here as they are printed)

from __future__ import annotations

from pathlib import Path

import pytest
from round_folder import COLUMNS, HEAD, POTASSIUM, ROWS, messages, read, rows_of, unusable

GOOD = COLUMNS + ROWS
FILES = '[files]\ncomparison = {{ path = "comparison.csv", {} }}\n'


def mapped(keys: str) -> str:
    return HEAD + FILES.format(keys) + POTASSIUM


@pytest.mark.parametrize(
    ("content", "noted"),
    [
        (GOOD.encode(), ()),
        (b"\xef\xbb\xbf" + GOOD.encode(), ()),
        (GOOD.encode("utf-16"), ()),
        (GOOD.encode("utf-16-le"), ("comparison.csv: read as utf-16-le: it has no byte order mark",)),
        (GOOD.encode("utf-16-be"), ("comparison.csv: read as utf-16-be: it has no byte order mark",)),
        (GOOD.replace("\n", "\r\n").encode(), ()),
        (GOOD.replace("\n", "\r").encode(), ()),
        (GOOD.replace(",", "\t").encode(), ()),
        (GOOD.replace(",", "|").encode(), ()),
        (GOOD.replace(",", ";").replace(".", ",").encode(), ()),
        (("\n\n" + GOOD + "\n ,,,\n").encode(), ()),
        (GOOD.replace("K", '"K"').replace(",A", ", A ").encode(), ()),
        (GOOD.upper().replace("ANALYTE", " Analyte ").encode(), ()),
    ],
)
def test_a_table_is_read_as_it_is(tmp_path: Path, content: bytes, noted: tuple[str, ...]) -> None:
    data = read(tmp_path, tables={"comparison.csv": content})
    pairs = data.analytes[0].comparisons[0]
    assert (pairs.specimens, pairs.x.tolist(), pairs.y.tolist()) == (("1", "2"), [1.5, 2.0], [1.75, 2.5])
    assert (data.analytes[0].problems, data.notes) == ((), noted)


def test_a_table_in_cp1252_is_read_with_a_note(tmp_path: Path) -> None:
    columns = COLUMNS.replace("result", "result,unit")
    rows = "K,1,A,1.5,µmol/L\nK,1,B,1.5,µmol/L\n"
    plan = HEAD + POTASSIUM.replace("mmol", "µmol")
    data = read(tmp_path, plan=plan, tables={"comparison.csv": (columns + rows).encode("cp1252")})
    assert data.analytes[0].problems == ()
    assert data.notes == ("comparison.csv: read as cp1252: it is not UTF-8; set encoding in [files] if that is wrong",)


def test_an_encoding_that_the_plan_names_is_used_without_a_note(tmp_path: Path) -> None:
    data = read(tmp_path, plan=mapped('encoding = "utf-8"'), tables={"comparison.csv": b"\xef\xbb\xbf" + GOOD.encode()})
    assert (data.analytes[0].rows["comparison"].used, data.notes) == (4, ())


@pytest.mark.parametrize(
    ("content", "expected"),
    [
        ("", "comparison.csv: is empty; export it again with a header row"),
        (GOOD + "K,3,A,\0\n", "comparison.csv:6: holds a NUL character, so it is no text table; export it again as CSV or XLSX"),
        (GOOD + 'K,"3,A,1\n',
         "comparison.csv:6: is not well-formed CSV (unexpected end of data); close the quotation mark or export the file "
         "again"),
        (GOOD.encode("utf-16")[:-1],
         "comparison.csv: cannot be decoded (neither UTF-8 nor utf-16: byte 146 cannot be read); set encoding in [files]"),
        (GOOD.replace("specimen", "specimen,result"),
         "comparison.csv:1: result: this column stands twice in the header; rename or remove one of them"),
        (GOOD.replace("specimen", "specimn"),
         'comparison.csv:1: specimen: this column is missing, did you mean "specimn"; add it, or map it in [files]; '
         "columns found: analyte, specimn, procedure, result"),
        ("analyte;specimen;procedure;result\nK;1;A;1,234\nK;1;B;2,345\n",
         'comparison.csv: "1,234": it is not clear whether "," is a decimal mark or separates thousands; say decimal = '
         '"." or "," for this file in [files]'),
        ("analyte;specimen;procedure;result\nK;1;A;1.234\nK;1;B;2.345\n",
         'comparison.csv: "1.234": it is not clear whether "." is a decimal mark or separates thousands; say decimal = '
         '"." or "," for this file in [files]'),
        (GOOD.replace("1.75", "1.750").replace("1.5", "1.500").replace("2.5", "2.500"),
         'comparison.csv: "1.500": it is not clear whether "." is a decimal mark or separates thousands; say decimal = '
         '"." or "," for this file in [files]'),
    ],
)
def test_a_broken_or_doubtful_file_is_one_message(tmp_path: Path, content: str | bytes, expected: str) -> None:
    assert unusable(tmp_path, tables={"comparison.csv": content}) == [expected]


def test_a_decimal_mark_that_the_plan_names_settles_the_doubt(tmp_path: Path) -> None:
    table = "analyte;specimen;procedure;result\nK;1;A;1,234\nK;1;B;2,345\n"
    data = read(tmp_path, plan=mapped('decimal = ","'), tables={"comparison.csv": table})
    assert data.analytes[0].comparisons[0].x.tolist() == [1.234]


def test_a_header_without_rows_is_told(tmp_path: Path) -> None:
    assert unusable(tmp_path, tables={"comparison.csv": COLUMNS})[0] == (
        "comparison.csv: holds a header and no rows; export it again"
    )


def test_a_missing_file_a_missing_plan_and_a_missing_folder_are_told(tmp_path: Path) -> None:
    assert unusable(tmp_path, tables={}) == [
        "comparison.csv: this file does not exist; add it, or correct files.comparison"
    ]
    (tmp_path / "round.toml").unlink()
    empty = tmp_path / "empty"
    empty.mkdir()
    from labstat.errors import RoundError
    from labstat.round.reading import read_round

    with pytest.raises(RoundError, match=r"^round\.toml: this file does not exist; add it, or correct the plan$"):
        read_round(empty)
    with pytest.raises(RoundError, match=r"this folder does not exist; name the folder that holds round\.toml"):
        read_round(tmp_path / "gone")


@pytest.mark.parametrize("path", ["/etc/hostname", "../comparison.csv", "a/../../b.csv", "C:\\\\x.csv", "..\\\\x.csv"])
def test_a_plan_cannot_make_the_program_read_outside_its_folder(tmp_path: Path, path: str) -> None:
    plan = HEAD + f'[files]\ncomparison = "{path}"\n' + POTASSIUM
    told = unusable(tmp_path, plan=plan)
    assert len(told) == 1
    assert told[0].endswith("lies outside the round's folder; copy it into it")


@pytest.mark.parametrize(
    "keys",
    [r'delimiter = "\n"', r'delimiter = "\""', r'delimiter = "\u0000"', 'delimiter = "a"', 'encoding = "undefined"',
     'encoding = "hex"', r'encoding = "a\u0000b"', 'encoding = "ascii"', 'delimiter = ";"'],
)
def test_settings_that_cannot_read_the_file_end_in_messages(tmp_path: Path, keys: str) -> None:
    table = GOOD + "K,3,Ä,1\n"
    told = unusable(tmp_path, plan=mapped(keys), tables={"comparison.csv": table})
    assert told
    assert all(message.startswith("comparison.csv") for message in told)


@pytest.mark.parametrize("path", [".", r"a\u0000b"])
def test_a_path_that_is_no_file_ends_in_a_message(tmp_path: Path, path: str) -> None:
    told = unusable(tmp_path, plan=HEAD + f'[files]\ncomparison = "{path}"\n' + POTASSIUM)
    assert len(told) == 1
    assert "cannot be read" in told[0]


def test_a_ragged_row_fails_its_analyte_and_shifts_nothing(tmp_path: Path) -> None:
    data = rows_of(tmp_path, ROWS + "K,3,A\nK,3,B,1,2\nK,4,A,1,,\nK,4,B,1\n")
    assert messages(data) == [
        "comparison.csv:6: the row has 3 fields and the header 4; quote fields that hold the delimiter, or export the file "
        "again",
        "comparison.csv:7: the row has 5 fields and the header 4; quote fields that hold the delimiter, or export the file "
        "again",
    ]
    assert data.comparisons[0].specimens == ("1", "2", "4")


def test_line_numbers_stay_true_behind_line_breaks_in_quotes_and_blank_rows(tmp_path: Path) -> None:
    data = rows_of(tmp_path, 'K,"1\n1",A,1\n\nK,"1\n1",B,x\n')
    assert messages(data) == [
        'comparison.csv:5: result: "x": not a number; correct it, leave it empty, or give the row an exclude reason'
    ]


def test_columns_are_mapped_and_one_may_be_constant(tmp_path: Path) -> None:
    plan = mapped('columns = { specimen = "Probe", result = "Wert" }, constants = { analyte = "K" }')
    table = "Probe;procedure;Wert;Kommentar\n7;A;1,5;\n7;B;1,75;ok\n"
    data = read(tmp_path, plan=plan, tables={"comparison.csv": table})
    assert data.analytes[0].comparisons[0].y.tolist() == [1.75]
    assert data.notes == ("comparison.csv: columns not read: Kommentar",)


def test_a_wide_export_is_read_with_replicates(tmp_path: Path) -> None:
    plan = mapped('columns = { specimen = "Probe" }, wide = { A = "a", B = ["b1", "b2"] }, constants = { analyte = "K" }')
    table = "Probe;a;b1;b2\n1;1,5;1,5;1,75\n2;2,5;<0,5;1\n3;3;;\n"
    data = read(tmp_path, plan=plan, tables={"comparison.csv": table}).analytes[0]
    pairs = data.comparisons[0]
    assert (pairs.specimens, pairs.x.tolist(), pairs.y.tolist()) == (("1",), [1.5], [1.625])
    assert pairs.y_replicates == ((1.5, 1.75),)
    count = data.rows["comparison"]
    assert (count.read, count.used, count.censored, count.missing, count.unpaired) == (9, 3, 1, 2, 3)
    assert {(row.line, row.procedure, row.replicate, row.why) for row in data.left_out} == {
        (3, "A", "1", "unpaired"), (3, "B", "1", "censored"), (3, "B", "2", "unpaired"), (4, "A", "1", "unpaired"),
        (4, "B", "1", "missing"), (4, "B", "2", "missing"),
    }


def test_a_mapping_to_columns_that_are_not_there_names_those_that_are(tmp_path: Path) -> None:
    told = unusable(tmp_path, plan=mapped('columns = { result = "Resultt", specimn = "x" }, wide = { A = "a" }'))
    assert told == [
        'comparison.csv:1: result: "Resultt": no such column, did you mean "result"; columns found: analyte, specimen, '
        "procedure, result",
        'round.toml: files.columns: "specimn": is no column of ours, did you mean "specimen"; columns here: analyte, '
        "specimen, procedure, result, replicate, subject, date, exclude, excluded_by, excluded_on, measured_at, day, run, "
        "instrument, reagent_lot, calibrator_lot, operator, unit, flag, specimen_type, rerun",
        'comparison.csv:1: A: "a": no such column; columns found: analyte, specimen, procedure, result',
    ]


def test_several_files_make_one_table_and_every_input_has_its_hash(tmp_path: Path) -> None:
    plan = HEAD + '[files]\ncomparison = ["one.csv", { path = "two.tsv" }]\n' + POTASSIUM
    one, two = COLUMNS + "K,1,A,1.5\n", (COLUMNS + "K,1,B,1.75\n").replace(",", "\t")
    data = read(tmp_path, plan=plan, tables={"one.csv": one, "two.tsv": two})
    assert data.analytes[0].comparisons[0].y.tolist() == [1.75]
    import hashlib

    expected = {"round.toml": plan, "one.csv": one, "two.tsv": two}
    assert {i.path: i.sha256 for i in data.inputs} == {
        name: hashlib.sha256(text.encode()).hexdigest() for name, text in expected.items()
    }
