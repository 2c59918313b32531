"""What check prints: everything that was understood, in numbers and with places."""

from __future__ import annotations

from pathlib import Path

from round_folder import HEAD, POTASSIUM, read

from labstat.round.understood import describe

PLAN = HEAD.replace('title = "Example"', 'title = "Example"\nissued = 2026-12-01') + """\
deviations = ["one reagent lot only"]
[[analyte]]
name = "Creatinine"
unit = "µmol/L"
decimals = 0
measuring_interval = [10, 1500]
[analyte.comparison]
comparative = "A"
candidate = "B"
levels = [
    { at = 90, allowable = "8 or 10 %", source = "Quality plan, table 3" },
    { at = 250, allowable = "-4 to 8", total_error = "10 %", source = "QP" },
    { at = 700 },
]
[analyte.reference]
partition = ["sex"]
adopted = [ { sex = "F", low = 45, high = 84 }, { sex = "M", high = 104 } ]
fasting = "overnight"
[[analyte.elsewhere]]
item = "Interference"
document = "V-12"
outcome = "accepted"
"""
COMPARISON = """\
analyte,specimen,procedure,result,replicate,exclude,excluded_by,excluded_on,day,comment
Creatinine,1,A,80,1,,,,d1,
Creatinine,1,A,82,2,,,,d1,
Creatinine,1,B,85,1,,,,d1,
Creatinine,2,A,90,1,,,,d2,
Creatinine,2,B,91,1,,,,d2,
Creatinine,3,A,<10,1,,,,,
Creatinine,3,B,12,1,,,,,
Creatinine,4,B,500,1,clot,Lead,2026-01-05,,
"""
REFERENCE = "analyte,subject,result,sex\nCreatinine,1,60,F\nCreatinine,2,70,F\nCreatinine,3,<10,M\nCreatinine,4,,M\n"

EXPECTED = """\
round: Example, Example laboratory
prepared by Validation lead, reviewed by Laboratory director
issued 2026-12-01, page A4
seed 1, 9999 resamples, confidence 0.95 (reference limits 0.9)
deviation: one reagent lot only
analytes: 1

Creatinine: unit µmol/L, 0 decimals, measuring interval 10 to 1500
  comparison of B (candidate, y) with A (comparative, x)
    2 paired specimens; A 81 to 90 µmol/L, B 85 to 91 µmol/L
    A: 3 results (1 of 1 specimen, 2 of 1 specimen)
    B: 2 results, 1 a specimen
    days: 2 (d1 to d2)
    1 specimen with a censored result
    lines: passing-bablok (reported), deming; calibrated interval; variance ratio 1; absolute differences
    fewer than 20 specimens: no proposal; fewer than 40: a caution
    at 90 µmol/L: -9 to 9 allowed (8 or 10 %), Quality plan, table 3
    at 250 µmol/L: -4 to 8 allowed (-4 to 8), QP
    at 250 µmol/L: total error -25 to 25 allowed (10 %), QP (not assessed by this version)
    at 700 µmol/L: no allowance, estimates only
    rows: 8 read = 5 used + 1 excluded + 1 censored + 0 missing + 1 unpaired
  reference limits
    limits 0.025 and 0.975; method auto; percentile interval; by sex
    sex F: 2 individuals, 60 to 70 µmol/L
    sex M: 1 individual, of them 1 censored
    interval in use, sex F: 45 to 84 µmol/L
    interval in use, sex M: up to 104 µmol/L
    fasting: overnight
    rows: 4 read = 3 used + 0 excluded + 0 censored + 1 missing + 0 unpaired
  examined elsewhere: Interference, V-12, accepted

rows not used: 4
  comparison.csv:7: Creatinine, specimen 3, A, replicate 1: "<10": censored: below the measuring interval
  comparison.csv:8: Creatinine, specimen 3, B, replicate 1: "12": unpaired: A is censored
  comparison.csv:9: Creatinine, specimen 4, B, replicate 1: "500": excluded: clot (Lead, 2026-01-05)
  reference.csv:5: Creatinine, subject 4: "": missing: no result

notes:
  comparison.csv: columns not read: comment

criteria: {hash}
  not marked as approved in the plan"""


def test_everything_that_was_understood_is_printed(tmp_path: Path) -> None:
    data = read(tmp_path, plan=PLAN, tables={"comparison.csv": COMPARISON, "reference.csv": REFERENCE})
    assert describe(data) == EXPECTED.format(hash=data.plan.criteria_hash)


def test_an_analyte_with_bad_rows_is_said_not_to_be_computed(tmp_path: Path) -> None:
    data = read(tmp_path, tables={"comparison.csv": "analyte,specimen,procedure,result\nK,1,A,x\nK,1,B,1\n"})
    lines = describe(data).splitlines()
    assert "  will not be computed: 1 problem, see the messages" in lines
    assert "    no paired specimens" in lines


def approved(folder: Path, criteria: str) -> list[str]:
    by = f'approved = {{ by = "Director", on = 2026-11-01{criteria} }}\n'
    return describe(read(folder, plan=HEAD + by + POTASSIUM)).splitlines()


def test_the_approval_of_the_criteria_is_compared_with_them(tmp_path: Path) -> None:
    known = read(tmp_path).plan.criteria_hash
    assert approved(tmp_path, f', criteria = "{known}"')[-1] == "  as approved by Director on 2026-11-01"
    assert approved(tmp_path, ', criteria = "abc"')[-1] == "  CHANGED since Director approved abc on 2026-11-01"
    assert approved(tmp_path, "")[-1] == (
        "  approved by Director on 2026-11-01, without their hash: a later change would not show"
    )
