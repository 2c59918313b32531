"""The rows: each is used or left out for the first reason that holds; a bad one fails its analyte and no other."""
# ruff: noqa: E501, ISC004  (messages stand here as they are printed)

from __future__ import annotations

import itertools
from collections import Counter
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from round_folder import CHLORIDE, COLUMNS, HEAD, POTASSIUM, ROWS, messages, read, rows_of

from labstat.round.model import AnalyteData, RowCount

REPLICATES = "analyte,specimen,procedure,result,replicate,exclude,excluded_by,excluded_on,subject,day,unit\n"
REMEDY = "correct it, leave it empty, or give the row an exclude reason"


def number(data: AnalyteData) -> tuple[int, int, int, int, int, int]:
    c = data.rows["comparison"]
    return c.read, c.used, c.excluded, c.censored, c.missing, c.unpaired


@pytest.mark.parametrize(
    ("text", "value"),
    [("12", 12.0), (" 12.5 ", 12.5), ("−3", -3.0), ("+5", 5.0), ("1.", 1.0), (".5", 0.5), ("1e-3", 0.001), ("0", 0.0)],
)
def test_a_result_is_a_number_as_laboratories_write_it(tmp_path: Path, text: str, value: float) -> None:
    data = rows_of(tmp_path, f"K,1,A,{text}\nK,1,B,1.25\n")
    assert (data.comparisons[0].x.tolist(), data.problems) == ([value], ())


@pytest.mark.parametrize("text", ["nan", "inf", "-inf", "1e400", "1_000", "0x1", "١٢", "1 000", "1.2.3", "pos", "--", "#N/A"])
def test_what_is_no_number_is_a_problem_with_its_line_column_and_value(tmp_path: Path, text: str) -> None:
    data = rows_of(tmp_path, f"K,1,A,{text}\nK,1,B,1.25\n")
    assert messages(data) == [f'comparison.csv:2: result: "{text}": not a number; {REMEDY}']


def test_thousands_are_refused_and_never_misread(tmp_path: Path) -> None:
    data = rows_of(tmp_path, 'K,1,A,"1,234"\nK,1,B,1.5\nK,2,A,2.5\nK,2,B,"1,234.5"\n')
    assert messages(data) == [
        'comparison.csv:2: result: "1,234": not a number with decimal mark "." (thousands separators are not accepted; the '
        f"mark can be set as decimal in [files]); {REMEDY}",
        f'comparison.csv:5: result: "1,234.5": not a number; {REMEDY}',
    ]


@pytest.mark.parametrize(
    ("text", "side", "bound"),
    [("<0.5", "below", 0.5), ("< 0.5", "below", 0.5), ("≤0.5", "below", 0.5), ("<=0.5", "below", 0.5),
     (">1000", "above", 1000.0), ("≥ 1000", "above", 1000.0), (">=1000", "above", 1000.0)],
)
def test_a_censored_result_is_known_by_its_sign(tmp_path: Path, text: str, side: str, bound: float) -> None:
    data = rows_of(tmp_path, f"K,1,A,{text}\nK,1,B,7.25\n")
    assert number(data) == (2, 0, 0, 1, 0, 1)
    pair = data.comparisons[0].censored[0]
    assert (pair.comparative, pair.comparative_value, pair.comparative_side) == (text, bound, side)
    assert (pair.candidate, pair.candidate_value, pair.candidate_side) == ("7.25", 7.25, "inside")


def test_a_sign_without_a_number_is_a_problem(tmp_path: Path) -> None:
    assert messages(rows_of(tmp_path, "K,1,A,<\nK,1,B,1\n")) == [
        'comparison.csv:2: result: "<": no number after the sign; write it like <0.5 or >1000'
    ]


def test_replicates_are_averaged_and_kept(tmp_path: Path) -> None:
    data = rows_of(tmp_path, "K,1,A,1,1,,,,,,\nK,1,A,2,2,,,,,,\nK,1,B,4,1,,,,,,\n", columns=REPLICATES)
    pairs = data.comparisons[0]
    assert (pairs.x.tolist(), pairs.y.tolist()) == ([1.5], [4.0])
    assert (pairs.x_replicates, pairs.y_replicates) == (((1.0, 2.0),), ((4.0,),))


def test_a_number_beside_a_censored_replicate_is_not_averaged_alone(tmp_path: Path) -> None:
    rows = "K,1,A,0.6,1,,,,,,\nK,1,A,<0.5,2,,,,,,\nK,1,B,0.7,1,,,,,,\n"
    data = rows_of(tmp_path, rows, columns=REPLICATES)
    assert number(data) == (3, 0, 0, 1, 0, 2)
    assert {(row.line, row.why, row.reason) for row in data.left_out} == {
        (2, "unpaired", "another replicate of this specimen is censored: the mean of the rest would be biased"),
        (3, "censored", "below the measuring interval"),
        (4, "unpaired", "A is censored"),
    }


def test_each_row_counts_once_by_the_first_reason_that_holds(tmp_path: Path) -> None:
    rows = (
        "K,1,A,,,clot,Lead,2026-01-05,,,\nK,1,B,5,,,,,,,\n"  # excluded before missing, partner unpaired
        "K,2,A,<1,,clot,Lead,,,,\nK,2,B,<1,,,,,,,\n"  # excluded before censored
        "K,3,A,,,,,,,,\nK,3,B,5,,,,,,,\n"
        "K,4,A,x,,typing error,,,,,\nK,4,B,5,,,,,,,\n"  # the result of an excluded row is not looked at
        "K,5,A,5,,,,,,,\n"
        "K,6,A,5,,,,,,,\nK,6,B,5,,,,,,,\n"
    )
    data = rows_of(tmp_path, rows, columns=REPLICATES)
    assert (number(data), data.problems) == ((11, 2, 3, 1, 1, 4), ())
    assert [(row.line, row.why, row.reason) for row in sorted(data.left_out, key=lambda row: row.line)] == [
        (2, "excluded", "clot (Lead, 2026-01-05)"), (3, "unpaired", "A is excluded"),
        (4, "excluded", "clot (Lead)"), (5, "censored", "below the measuring interval"),
        (6, "missing", "no result"), (7, "unpaired", "A is missing"),
        (8, "excluded", "typing error"), (9, "unpaired", "A is excluded"),
        (10, "unpaired", "no result by B"),
    ]


def test_a_comparative_result_is_used_if_one_candidate_has_its_partner(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM.replace('"B"', '["B", "C"]')
    data = rows_of(tmp_path, "K,1,A,1\nK,1,B,2\nK,1,C,<3\nK,2,A,1\nK,2,C,2\n", plan=plan)
    assert [pairs.specimens for pairs in data.comparisons] == [("1",), ("2",)]
    assert [len(pairs.censored) for pairs in data.comparisons] == [0, 1]
    assert number(data) == (5, 4, 0, 1, 0, 0)


def test_a_duplicate_names_both_lines(tmp_path: Path) -> None:
    remedy = "number the replicates in a column replicate, or exclude one with its reason"
    data = rows_of(tmp_path, ROWS + "K,2,B,2.5\n")
    assert messages(data) == [
        f'comparison.csv:6: "2, B": says again what comparison.csv:5 says (same specimen, procedure and replicate); {remedy}'
    ]


def test_an_excluded_row_is_no_duplicate(tmp_path: Path) -> None:
    rows = "K,1,A,1,,clot,,,,,\nK,1,A,2,,,,,,,\nK,1,B,2,,,,,,,\n"
    data = rows_of(tmp_path, rows, columns=REPLICATES)
    assert (data.problems, number(data)) == ((), (3, 2, 1, 0, 0, 0))


def test_an_unknown_procedure_and_a_wrong_unit_fail_the_analyte(tmp_path: Path) -> None:
    data = rows_of(tmp_path, "K,1,A,1,,,,,,,mol/L\nK,1,b,1,,,,,,,mmol/L\nK,2,,1,,,,,,,\n", columns=REPLICATES)
    assert messages(data) == [
        'comparison.csv:2: unit: "mol/L": the plan has mmol/L for K; convert the results, or correct the plan',
        'comparison.csv:3: procedure: "b": the plan does not name this procedure for K, did you mean "B"; use A, B, or name '
        "it in ignore_procedures",
        'comparison.csv:4: procedure: "": the row names no procedure; use A, B, or name it in ignore_procedures',
    ]


def test_an_ignored_procedure_is_noted_and_no_part_of_the_study(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM + 'ignore_procedures = ["C"]\n'
    data = read(tmp_path, plan=plan, tables={"comparison.csv": COLUMNS + ROWS + "K,1,C,1\n"})
    assert data.analytes[0].rows["comparison"].read == 4
    assert data.notes == ("K: 1 rows of ignored procedures are not part of the study",)


def test_names_compare_after_blanks_and_composition(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM.replace('"B"', '"Gerät"')
    data = rows_of(tmp_path, "K,1, A,1\nK, 1 ,Gera\u0308t,2\n", plan=plan)
    assert (data.problems, data.comparisons[0].specimens) == ((), ("1",))


def test_a_bad_row_fails_its_analyte_and_only_that(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM + POTASSIUM.replace('"K"', '"Na"')
    rows = ROWS.replace("K", "Na") + "K,1,A,x\nK,1,B,1\nna,1,A,1\n,1,A,1\n"
    data = read(tmp_path, plan=plan, tables={"comparison.csv": COLUMNS + rows})
    assert [len(analyte.problems) for analyte in data.analytes] == [1, 0]
    assert {name: [str(p) for p in problems] for name, problems in data.stray.items()} == {
        "na": ['comparison.csv:8: analyte: "na": the plan does not know this analyte, did you mean "Na"; correct the name, '
               'add [[analyte]], or set other_analytes = "ignore" in [files]'],
        "(no analyte)": ['comparison.csv:9: analyte: "": the row names no analyte; name it, or remove the row'],
    }


def test_an_analyte_without_rows_is_a_problem_of_that_analyte(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM + POTASSIUM.replace('"K"', '"Na"')
    data = read(tmp_path, plan=plan)
    assert messages(data.analytes[1]) == [
        "comparison.csv: there is no row of Na; add its rows, or take [analyte.comparison] out of the plan"
    ]
    assert data.analytes[0].problems == ()


def test_a_flood_is_cut_short_and_counted(tmp_path: Path) -> None:
    data = rows_of(tmp_path, "".join(f"K,{i},A,x\n" for i in range(80)))
    assert len(data.problems) == 51
    assert messages(data)[-1] == "comparison.csv: 30 more problems like these are not listed; mend these first"


def test_a_wrong_analyte_column_does_not_make_an_analyte_of_every_row(tmp_path: Path) -> None:
    data = read(tmp_path, tables={"comparison.csv": COLUMNS + ROWS + "".join(f"Q{i},1,A,1\n" for i in range(300))})
    assert len(data.stray) == 21
    assert len(data.stray["(more unknown analytes)"]) == 51


def test_a_subject_is_one_for_all_rows_of_a_specimen(tmp_path: Path) -> None:
    data = rows_of(tmp_path, "K,1,A,1,,,,,P1,,\nK,1,B,1,,,,,P2,,\n", columns=REPLICATES)
    assert messages(data) == [
        'comparison.csv:3: subject: "P2": specimen "1" has subject "P1" at comparison.csv:2; correct one of them'
    ]


def test_the_day_is_the_candidates_first_replicates_else_the_comparatives(tmp_path: Path) -> None:
    rows = "K,1,A,1,1,,,,,d1,\nK,1,B,1,2,,,,,d3,\nK,1,B,1,1,,,,,d2,\nK,2,A,1,1,,,,,d1,\nK,2,B,1,1,,,,,,\n"
    assert rows_of(tmp_path, rows, columns=REPLICATES).comparisons[0].days == ("d2", "d1")


def test_a_day_is_the_date_of_a_moment_where_no_day_is_given(tmp_path: Path) -> None:
    columns = COLUMNS.replace("result", "result,measured_at,date")
    rows = "K,1,A,1,2026-01-05T08:00,\nK,1,B,1,2026-01-06 09:30,\nK,2,A,1,,\nK,2,B,1,,2026-01-07\n"
    assert rows_of(tmp_path, rows, columns=columns).comparisons[0].days == ("2026-01-06", "2026-01-07")


def test_results_outside_the_measuring_interval_are_used_and_noted(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM.replace("[analyte.c", "measuring_interval = [2, 9]\n[analyte.c")
    data = read(tmp_path, plan=plan)
    assert data.analytes[0].rows["comparison"].used == 4
    assert data.notes == ("K: 2 results lie outside the measuring interval and are used as numbers",)


SUBJECTS = "analyte,subject,result,sex,exclude\n"


def reference(folder: Path, rows: str, keys: str = 'partition = ["sex"]\n') -> AnalyteData:
    return read(folder, plan=HEAD + CHLORIDE + keys, tables={"reference.csv": SUBJECTS + rows}).analytes[0]


def test_reference_values_come_with_their_partition_sorted_by_subject(tmp_path: Path) -> None:
    data = reference(tmp_path, "Cl,10,101,M,\nCl,9,100,F,\nCl,11,99,M,ill\nCl,12,,M,\n")
    assert data.reference is not None
    assert (data.reference.subjects, data.reference.values.tolist()) == (("9", "10"), [100.0, 101.0])
    assert dict(data.reference.columns) == {"sex": ("F", "M")}
    assert data.rows["reference"] == RowCount(4, 2, 1, 0, 1, 0)
    assert data.rows["comparison"] == data.rows["precision"] == RowCount(0, 0, 0, 0, 0, 0)


def test_a_censored_reference_value_keeps_its_rank(tmp_path: Path) -> None:
    data = reference(tmp_path, "Cl,1,<90,M,\nCl,2,>120,M,\nCl,3,100,M,\n")
    assert data.reference is not None
    assert data.reference.values.tolist() == [-np.inf, np.inf, 100.0]
    assert data.reference.censored == (("1", "<90"), ("2", ">120"))
    assert data.rows["reference"].used == 3


def test_bad_reference_rows_are_problems(tmp_path: Path) -> None:
    data = reference(tmp_path, "Cl,1,100,M,\nCl,1,101,M,\nCl,2,100,,\nCl,3,high,M,\nCl,,100,M,\n")
    assert messages(data) == [
        'reference.csv:3: "1": this subject has a result already at reference.csv:2; give each subject one row, or exclude '
        "one with its reason",
        'reference.csv:4: sex: "": Cl is partitioned by this column, and it is empty; fill it in, or exclude the row with '
        "its reason",
        f'reference.csv:5: result: "high": not a number; {REMEDY}',
        'reference.csv:6: subject: "": the row names no subject; fill it in',
    ]


def test_an_interval_in_use_for_a_group_that_is_not_there_is_noted(tmp_path: Path) -> None:
    plan = HEAD + CHLORIDE + 'partition = ["sex"]\nadopted = [ { sex = "f", low = 1 } ]\n'
    data = read(tmp_path, plan=plan, tables={"reference.csv": SUBJECTS + "Cl,1,100,F,\n"})
    assert data.notes == ('Cl: an interval in use is for sex "f", which no individual has, did you mean "F"',)


def test_a_partition_by_a_missing_column_makes_the_round_unusable(tmp_path: Path) -> None:
    from round_folder import unusable

    plan = HEAD + CHLORIDE + 'partition = ["Sex"]\n'
    assert unusable(tmp_path, plan=plan, tables={"reference.csv": SUBJECTS + "Cl,1,100,F,\n"}) == [
        'reference.csv:1: Sex: Cl is partitioned by this column, which is missing, did you mean "sex"; columns found: '
        "analyte, subject, result, sex, exclude"
    ]


def test_precision_rows_are_accounted_for_and_said_not_to_be_computed(tmp_path: Path) -> None:
    header = "analyte,procedure,material,day,run,replicate,result,exclude\n"
    rows = "K,B,QC1,1,1,1,5,\nK,B,QC1,1,1,2,<1,\nK,B,QC1,1,1,3,,\nK,B,QC1,2,1,1,5,clot\nK,B,QC1,1,1,1,5,\n"
    tables = {"comparison.csv": COLUMNS + ROWS, "precision.csv": header + rows}
    data = read(tmp_path, tables=tables)
    assert data.analytes[0].rows["precision"] == RowCount(5, 2, 1, 1, 1, 0)
    assert len(data.analytes[0].problems) == 1
    assert data.notes == (
        "precision.csv: the precision rows are read, checked and accounted for; this version computes nothing from them",
    )


TEXTS = st.sampled_from(["1", "2.5", "3.125", "0.1", "0.7", "<0.5", ">9", ""])
REASONS = st.sampled_from(["", "", "", "clot"])
KEYS = list(itertools.product("1234", "ABC", "12"))
TABLES = st.lists(st.sampled_from(KEYS), unique=True, min_size=1, max_size=len(KEYS)).flatmap(
    lambda keys: st.tuples(st.just(keys), st.lists(st.tuples(TEXTS, REASONS), min_size=len(keys), max_size=len(keys)))
)
TWO = HEAD + POTASSIUM.replace('"B"', '["B", "C"]')


def lines(table: tuple[list[tuple[str, str, str]], list[tuple[str, str]]]) -> list[str]:
    keys, cells = table
    return [
        f"K,{specimen},{procedure},{text},{replicate},{reason},,,,d{specimen}{procedure}{replicate},\n"
        for (specimen, procedure, replicate), (text, reason) in zip(keys, cells, strict=True)
    ]


def fresh(rows: list[str]) -> AnalyteData:
    with TemporaryDirectory() as folder:
        return rows_of(Path(folder), "".join(rows), columns=REPLICATES, plan=TWO)


@given(TABLES)
def test_every_row_is_used_or_left_out_once(table: tuple[list[tuple[str, str, str]], list[tuple[str, str]]]) -> None:
    rows = lines(table)
    data = fresh(rows)
    count = data.rows["comparison"]
    assert data.problems == ()
    assert count.read == len(rows)
    assert count.read == count.used + count.excluded + count.censored + count.missing + count.unpaired
    assert len({row.line for row in data.left_out}) == len(data.left_out) == count.read - count.used
    why = Counter(row.why for row in data.left_out)
    assert (why["excluded"], why["censored"], why["missing"], why["unpaired"]) == (
        count.excluded, count.censored, count.missing, count.unpaired,
    )
    # what the numbers rest on is what is counted as used, a comparative result once for all candidates
    used = {(s, "A", i) for p in data.comparisons for s, r in zip(p.specimens, p.x_replicates, strict=True)
            for i in range(len(r))}
    used |= {(s, p.candidate, i) for p in data.comparisons for s, r in zip(p.specimens, p.y_replicates, strict=True)
             for i in range(len(r))}
    assert len(used) == count.used


@given(TABLES, st.randoms(use_true_random=False))
def test_the_order_of_the_rows_changes_nothing(table: tuple[list[tuple[str, str, str]], list[tuple[str, str]]], random) -> None:  # type: ignore[no-untyped-def]
    rows = lines(table)
    shuffled = list(rows)
    random.shuffle(shuffled)
    one, two = fresh(rows), fresh(shuffled)
    assert one.rows == two.rows
    for a, b in zip(one.comparisons, two.comparisons, strict=True):
        assert (a.specimens, a.x.tobytes(), a.y.tobytes()) == (b.specimens, b.x.tobytes(), b.y.tobytes())
        assert (a.x_replicates, a.y_replicates, a.days, a.censored) == (
            b.x_replicates, b.y_replicates, b.days, b.censored,
        )


def test_specimens_are_sorted_as_people_count(tmp_path: Path) -> None:
    rows = "".join(f"K,S{i},{p},1\n" for i in (10, 9, 100, 1) for p in "AB")
    assert rows_of(tmp_path, rows).comparisons[0].specimens == ("S1", "S9", "S10", "S100")
