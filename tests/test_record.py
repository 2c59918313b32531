"""results.json holds everything, in the order of the interface, and the tables hold the same for a spreadsheet."""

from __future__ import annotations

import csv
import io
import json
import math
import sys
from dataclasses import replace
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent / "judgement"))

from studies import ROUND, bias, comparison, estimate, group, level, limit, line, study

from labstat.batch.versions import versions
from labstat.judgement import judge
from labstat.record import analyte_record, as_bytes, failed_record, round_record, stray_record
from labstat.record.tables import tables
from labstat.record.values import estimate_record
from labstat.report.model import RunContext
from labstat.round.model import Approval, InputFile, LeftOut, Problem, RowCount

CONTEXT = RunContext(ROUND, (InputFile("comparison.csv", "ab" * 32),), versions(), 7, 999, ("read as cp1252",))
EST = [
    "estimate",
    "low",
    "high",
    "level",
    "interval",
    "resamples",
    "monte_carlo_error",
    "failed_resamples",
    "attained",
]
ANALYTE = [
    "name",
    "unit",
    "outcome",
    "reason",
    "rows",
    "comparison",
    "reference",
    "precision",
    "findings",
    "cautions",
    "proposal",
]


def record(made):
    return analyte_record(made, judge(made, ROUND))


FULL = study(
    comparison(
        level(by_day=bias(90.0, 1.0, -1.0, 3.0)),
        level(at=250.0, allowable=None, source=None),
        level(at=0.0, near=0),
        fits=(line(slope=estimate(1.0, 0.97, 1.03, has_rank=True, rank_low=0.96, rank_high=1.04, rank_attained=0.95)),),
    ),
    groups=(group(), group(sex="M", upper=limit(90.0, None, None, reason="none"))),
    rows=RowCount(130, 120, 4, 3, 2, 1),
    left_out=(
        LeftOut("comparison", "comparison.csv", 9, "0003", "Procedure A", None, "=1+1", "excluded", "haemolysed"),
    ),
)


def first_keys(mapping, keys):
    return list(mapping)[: len(keys)] == keys


def test_the_keys_of_the_interface_come_first_and_in_order():
    whole = round_record(CONTEXT, [record(FULL)])
    assert first_keys(whole, ["format", "program", "inputs", "round", "analytes"])
    assert whole["format"] == "labstat results 1"
    assert list(whole["program"]) == ["labstat", "python", "numpy", "scipy", "pandas", "statsmodels", "reportlab"]
    assert whole["inputs"] == [{"path": "comparison.csv", "sha256": "ab" * 32}]
    assert first_keys(whole["round"], ["title", "laboratory", "seed", "resamples", "level", "limit_level"])
    analyte = whole["analytes"][0]
    assert first_keys(analyte, ANALYTE)
    assert list(analyte["rows"]) == ["comparison", "reference", "precision"]
    assert list(analyte["rows"]["comparison"]) == ["read", "used", "excluded", "censored", "missing", "unpaired"]
    compared = analyte["comparison"][0]
    assert first_keys(compared, ["comparative", "candidate", "n", "range", "fits", "bias", "difference", "linearity"])
    assert first_keys(compared["fits"][0], ["method", "slope", "intercept"])
    assert first_keys(compared["bias"][0], ["at", "bias", "percent", "allowable", "source", "finding", "settles_at_n"])
    assert first_keys(compared["difference"], ["scale", "n", "mean", "sd", "lower", "upper"])
    assert list(compared["linearity"]) == ["statistic", "p_value"]
    assert first_keys(analyte["reference"][0], ["partition", "n", "method", "lower", "upper"])
    assert first_keys(
        analyte["findings"][0],
        ["study", "question", "where", "estimate", "low", "high", "allowance", "source", "finding", "counts"],
    )
    assert all(list(caution) == ["code", "weight", "text", "question"] for caution in analyte["cautions"])


def test_an_estimate_has_its_keys_in_order_and_rank_keys_only_where_they_belong():
    assert list(estimate_record(estimate(1.0, 0.9, 1.1))) == EST
    rank = estimate_record(limit(45.0, 44.0, 47.0, rank_low=None, rank_high=None, rank_attained=None))
    assert list(rank) == [*EST, "rank_low", "rank_high", "rank_attained"]
    assert rank["rank_low"] is None
    replaced = estimate_record(estimate(1.0, 0.9, 1.1, replaced="bca", reason="all equal"))
    assert (replaced["replaced"], replaced["reason"]) == ("bca", "all equal")


def test_what_could_not_be_computed_is_null_and_never_nan():
    bare = record(study(comparison(level(), difference=None, linearity=None, correlation=math.nan)))["comparison"][0]
    assert (bare["difference"], bare["linearity"], bare["correlation"]) == (None, None, None)
    assert estimate_record(estimate(math.inf, math.nan, None))["estimate"] is None
    with pytest.raises(ValueError, match="not finite"):
        as_bytes({"x": math.nan})


def test_numbers_are_unrounded_and_read_back_the_same():
    third = 1 / 3
    made = study(comparison(level(value=third, low=third - 1, high=third + 1)))
    back = json.loads(as_bytes(round_record(CONTEXT, [record(made)])))
    assert back["analytes"][0]["comparison"][0]["bias"][0]["bias"]["estimate"] == third
    assert back["analytes"][0]["findings"][0]["low"] == third - 1


def test_percent_is_null_at_a_level_of_zero_and_a_finding_null_without_an_allowance():
    first, second, zero = record(FULL)["comparison"][0]["bias"]
    assert first["percent"]["estimate"] == pytest.approx(100 / 90)
    assert (second["allowable"], second["source"], second["finding"]) == (None, None, None)
    assert zero["percent"] is None


def test_an_analyte_that_was_not_computed_has_every_key():
    problem = Problem("comparison.csv", 14, "result", "abc", "is not a number", "correct it", "Creatinine")
    made = failed_record(replace(FULL.data, problems=(problem,)), "row 14")
    stray = stray_record("Unobtainium", "unknown", (problem,))
    for failed in (made, stray):
        assert list(failed) == [key for key in record(FULL) if key in failed]
        assert first_keys(failed, ANALYTE)
        assert failed["outcome"] == "not computed"
        assert failed["comparison"] == failed["reference"] == failed["precision"] == failed["findings"] == []
        assert failed["problems"] == ['comparison.csv:14: result: "abc": is not a number; correct it']
    assert made["rows"]["comparison"]["read"] == 130
    assert stray["rows"]["comparison"] == dict.fromkeys(
        ["read", "used", "excluded", "censored", "missing", "unpaired"], 0
    )


def test_bytes_are_utf8_end_with_a_line_and_do_not_change():
    plan = replace(ROUND, title="Хімія \ud800", approved=Approval("A", "2026-11-01", None))
    once = as_bytes(round_record(replace(CONTEXT, plan=plan), [record(FULL)]))
    assert once == as_bytes(round_record(replace(CONTEXT, plan=plan), [record(FULL)]))
    assert once.endswith(b"}\n")
    assert json.loads(once)["round"]["title"] == "Хімія \ufffd"
    assert "µmol/L".encode() in once


def rows_of(content: bytes) -> list[list[str]]:
    return list(csv.reader(io.StringIO(content.decode("utf-8-sig"), newline=""), strict=True))


def test_the_tables_hold_the_same_numbers():
    files = tables([record(FULL)])
    assert sorted(files) == [
        "README.txt",
        "analytes.csv",
        "bias.csv",
        "cautions.csv",
        "differences.csv",
        "findings.csv",
        "left_out.csv",
        "lines.csv",
        "reference.csv",
    ]
    for name, content in files.items():
        if name.endswith(".csv"):
            header, *rows = rows_of(content)
            assert {len(row) for row in rows} <= {len(header)}
    header, *rows = rows_of(files["reference.csv"])
    assert [dict(zip(header, row, strict=True))["estimate"] for row in rows] == ["45.0", "84.0", "45.0", "90.0"]
    header, *rows = rows_of(files["bias.csv"])
    assert [row[header.index("resampled")] for row in rows[:4]] == ["specimens", "specimens", "days", "days"]


def test_a_text_that_a_spreadsheet_would_run_is_made_harmless_and_numbers_stay():
    names = ["=HYPERLINK(1)", "+1+1", "-2+3", "@SUM(A1)", "\tx", "\rx", "-1.5", "Na"]
    files = tables([stray_record(name, "unknown", ()) for name in names])
    found = [row[0] for row in rows_of(files["analytes.csv"])[1:]]
    assert found == ["'=HYPERLINK(1)", "'+1+1", "'-2+3", "'@SUM(A1)", "'\tx", "'\rx", "-1.5", "Na"]
    assert b"apostrophe" in files["README.txt"]
    header, row = rows_of(tables([record(FULL)])["left_out.csv"])
    assert row[header.index("result")] == "'=1+1"


def test_tables_of_nothing_have_their_headers():
    assert all(len(rows_of(content)) == 1 for name, content in tables([]).items() if name.endswith(".csv"))
