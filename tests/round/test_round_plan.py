"""The plan: every key checked, every problem told at once with its line, defaults and tables completing it."""
# ruff: noqa: E501, ISC004  (messages stand here as they are printed)

from __future__ import annotations

from pathlib import Path

import pytest
from round_folder import CHLORIDE, COLUMNS, HEAD, POTASSIUM, ROWS, read, unusable

LEVELS = 'levels = [ {{ at = 5, {} }} ]\n'
NOT_HERE = "keys here: at, allowable, total_error, source"


def test_a_plan_gets_the_documented_defaults(tmp_path: Path) -> None:
    plan = read(tmp_path).plan
    comparison = plan.analytes[0].comparison
    assert comparison is not None
    assert (plan.seed, plan.resamples, plan.level, plan.limit_level, plan.page) == (1, 9999, 0.95, 0.90, "A4")
    assert (comparison.methods, comparison.report) == (("passing-bablok", "deming"), "passing-bablok")
    assert (comparison.interval, comparison.variance_ratio, comparison.difference) == ("calibrated", 1.0, "absolute")
    assert (comparison.minimum_n, comparison.recommended_n, comparison.levels) == (20, 40, ())
    assert plan.analytes[0].decimals == 2


@pytest.mark.parametrize(
    ("plan", "expected"),
    [
        (HEAD + POTASSIUM.replace("[analyte.comparison]", "decimal = 1\n[analyte.comparison]"),
         'round.toml:10: analyte[1].decimal: "1": is no key here, did you mean "decimals"; keys here: name, unit, '
         "decimals, measuring_interval, specimen_type, comparison, reference, elsewhere"),
        (HEAD.replace("seed = 1", 'seed = "1"') + POTASSIUM,
         'round.toml:6: round.seed: "1": must be a whole number; correct the value'),
        (HEAD.replace("seed = 1\n", "") + POTASSIUM, "round.toml:1: round.seed: is missing; add it"),
        (HEAD + "resamples = 9.5\n" + POTASSIUM,
         'round.toml:7: round.resamples: "9.5": must be a whole number; correct the value'),
        (HEAD + 'page = "A5"\n' + POTASSIUM,
         "round.toml:7: round.page: \"A5\": must be 'A4' or 'Letter'; choose one of these"),
        (HEAD + POTASSIUM + LEVELS.format('allowable = "8"'),
         'round.toml:13: analyte[1].comparison.levels[1].source: the allowance at 5 names no source; add source = "…": '
         "the report prints it"),
        (HEAD + POTASSIUM + LEVELS.format('allowable = 8, source = "s"'),
         'round.toml:13: analyte[1].comparison.levels[1].allowable: "8": must be text; write it in quotes'),
        (HEAD + POTASSIUM + LEVELS.format('alowable = "8"'),
         'round.toml:13: analyte[1].comparison.levels[1].alowable: "8": is no key here, did you mean "allowable"; '
         + NOT_HERE),
        (HEAD + POTASSIUM.replace('"B"', '"A"'),
         'round.toml:12: analyte[1].comparison.candidate: "A": is the comparative procedure too; name another candidate'),
        (HEAD + POTASSIUM + 'variance_ratio = "replicates"\n',
         'round.toml:13: analyte[1].comparison.variance_ratio: "replicates": is not available in this version; give a '
         "number"),
        (HEAD + POTASSIUM + "variance_ratio = 0\n",
         'round.toml:13: analyte[1].comparison.variance_ratio: "0": must be greater than 0; correct the value'),
        (HEAD + POTASSIUM + 'purpose = "lot"\n',
         'round.toml:13: analyte[1].comparison.purpose: "lot": studies of 5 to 20 specimens are not judged by this '
         'version; leave purpose out, or set it to "new"'),
        (HEAD + POTASSIUM + 'interval = "rank"\nreport = "deming"\n',
         'round.toml:13: analyte[1].comparison.interval: "rank": exists for passing-bablok only, and deming is '
         "reported; choose another interval"),
        (HEAD + POTASSIUM + "minimum_n = 10\n",
         'round.toml:13: analyte[1].comparison.minimum_n: "10": must be greater than or equal to 20; correct the value'),
        (HEAD + POTASSIUM.replace("[analyte.comparison]\n", "measuring_interval = [9, 1]\n[analyte.comparison]\n"),
         'round.toml:10: analyte[1].measuring_interval: "[9, 1]": must ascend; write [lowest, highest]'),
        (HEAD + POTASSIUM.split("[analyte.comparison]", maxsplit=1)[0],
         'round.toml:7: analyte[1]: "K": asks for no study; add [analyte.comparison] or [analyte.reference]'),
        (HEAD + POTASSIUM + POTASSIUM,
         'round.toml:14: analyte[2].name: "K": this analyte is in the plan twice; merge the two'),
        (HEAD + "[files]\ncomparison = 3\n" + POTASSIUM,
         'round.toml:8: files.comparison: "3": is of the wrong type; correct the value'),
        (HEAD + '[files]\ncomparison = { path = "comparison.csv", delimitr = ";" }\n' + POTASSIUM,
         'round.toml:8: files.comparison.delimitr: ";": is no key here, did you mean "delimiter"; keys here: path, '
         "delimiter, decimal, encoding, sheet, columns, constants, wide"),
        (HEAD + "[defaults.comparison]\nmethdos = []\n" + POTASSIUM,
         'round.toml:8: defaults.comparison.methdos: is no key here, did you mean "methods"; keys here: comparative, '
         "candidate, methods, report, interval, variance_ratio, levels, difference, purpose, minimum_n, recommended_n, "
         "ignore_procedures"),
    ],
)
def test_a_wrong_plan_is_one_message_with_line_key_value_and_remedy(tmp_path: Path, plan: str, expected: str) -> None:
    assert unusable(tmp_path, plan=plan) == [expected]


def test_a_wrong_default_is_told_once_however_many_analytes_inherit_it(tmp_path: Path) -> None:
    plan = HEAD + '[defaults.comparison]\nreport = "theil"\n' + POTASSIUM + POTASSIUM.replace('"K"', '"Na"')
    told = unusable(tmp_path, plan=plan, tables={"comparison.csv": COLUMNS + ROWS + ROWS.replace("K", "Na")})
    assert told == [
        "round.toml:8: defaults.comparison.report: \"theil\": must be 'ordinary', 'deming', 'weighted-deming' or "
        "'passing-bablok'; choose one of these"
    ]


@pytest.mark.parametrize(
    ("keys", "expected"),
    [
        ("limits = [0.9, 0.1]", '.limits: "[0.9, 0.1]": must ascend; write the lower probability first'),
        ("limits = [1.0]", '.limits[1]: "1.0": must be less than 1; correct the value'),
        ('method = "transformed"', '.method: "transformed": is not available in this version; use auto, rank or robust'),
        ("adopted = [ {} ]", ".adopted[1]: an adopted interval has neither low nor high; give at least one"),
        ("adopted = [ { low = 3, high = 1 } ]", '.adopted[1]: "3 to 1": must ascend; write the lower limit as low'),
        ("adopted = [ { low = 3 }, { low = 4 } ]",
         ".adopted[2]: this group has an adopted interval already; give each group one"),
        ('partition = ["sex"]\nadopted = [ { sx = "F", low = 1 } ]',
         '.adopted[1].sx: "F": is no column of the partition, did you mean "sex"; use low, high, sex'),
    ],
)
def test_a_wrong_reference_section_is_one_message(tmp_path: Path, keys: str, expected: str) -> None:
    tables = {"reference.csv": "analyte,subject,result,sex\nCl,1,100,F\n"}
    line = 11 + keys.count("\n")
    assert unusable(tmp_path, plan=HEAD + CHLORIDE + keys, tables=tables) == [
        f"round.toml:{line}: analyte[1].reference{expected}"
    ]


def test_a_text_that_is_no_toml_is_told_with_its_line(tmp_path: Path) -> None:
    told = unusable(tmp_path, plan=HEAD + "\nlevel = = 1\n")
    assert told == ["round.toml:8: is not well-formed TOML (Invalid value); correct the line"]


def test_all_problems_of_plan_and_tables_are_told_at_once(tmp_path: Path) -> None:
    plan = HEAD.replace("seed", "sed") + 'page = "A5"\n[files]\nreference = "gone.csv"\n' + POTASSIUM + LEVELS.format(
        'allowable = "8 percent", source = "s"'
    ) + POTASSIUM.replace('"K"', '"Na"')
    rows = "Na,1,A,x\nNa,1,B,1\n"
    told = unusable(tmp_path, plan=plan, tables={"comparison.csv": COLUMNS.replace("specimen", "specimn") + rows})
    for words in (
        'round.sed: "1": is no key here', "round.seed: is missing", 'round.page: "A5"', '"8 percent": is no allowance',
        "gone.csv: this file does not exist", 'comparison.csv:1: specimen: this column is missing, did you mean "specimn"',
    ):
        assert sum(words in message for message in told) == 1, words
    assert len(told) == 6


def test_a_bad_row_is_told_beside_a_bad_plan_when_its_analyte_is_sound(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM.replace("unit =", "unt =") + POTASSIUM.replace('"K"', '"Na"')
    rows = "K,1,Z,x\nNa,1,A,x\nNa,1,B,1\nMg,1,A,1\n"
    told = unusable(tmp_path, plan=plan, tables={"comparison.csv": COLUMNS + rows})
    assert [message.split(":")[:2] for message in told] == [
        ["round.toml", "7"], ["round.toml", "9"], ["comparison.csv", "3"],
    ]


@pytest.mark.parametrize(
    "plan", ["", "round = 3\nanalyte = 3\nfiles = [1]\n", "[round]\n[[analyte]]\n", "x = 1", "[analyte]\nname = 1",
     HEAD + "[[analyte]]\nname = {}\nunit = []\n", HEAD + POTASSIUM + "levels = 3\nmethods = [[]]\n",
     HEAD + '[files]\ncomparison = ""\nreference = [""]\n' + POTASSIUM]
)
def test_a_plan_that_is_hardly_one_ends_in_messages(tmp_path: Path, plan: str) -> None:
    assert unusable(tmp_path, plan=plan)[0].startswith("round.toml")


def test_an_analyte_inherits_the_defaults_and_overrides_them(tmp_path: Path) -> None:
    plan = HEAD + (
        '[defaults.comparison]\ncomparative = "A"\ncandidate = "B"\nmethods = ["deming"]\ninterval = "bca"\n'
        '[[analyte]]\nname = "K"\nunit = "mmol/L"\n'
        '[[analyte]]\nname = "Na"\nunit = "mmol/L"\n[analyte.comparison]\ninterval = "percentile"\n'
    )
    tables = {"comparison.csv": COLUMNS + ROWS + ROWS.replace("K", "Na")}
    plans = [analyte.comparison for analyte in read(tmp_path, plan=plan, tables=tables).plan.analytes]
    assert [(p.comparative, p.candidates, p.report, p.interval) for p in plans if p is not None] == [
        ("A", ("B",), "deming", "bca"), ("A", ("B",), "deming", "percentile"),
    ]


def test_forty_analytes_need_no_forty_blocks(tmp_path: Path) -> None:
    names = [f"N{i}" for i in range(40)]
    plan = HEAD + '[defaults.comparison]\ncomparative = "A"\ncandidate = "B"\n'
    tables = {
        "analytes.csv": "name,unit,decimals,low,high\n" + "".join(f"{name},mmol/L,1,0.5,40\n" for name in names),
        "allowances.csv": "analyte,at,allowable,source\n" + "".join(f"{name},5,8 or 10 %,QP\n" for name in names),
        "comparison.csv": COLUMNS + "".join(ROWS.replace("K,", f"{name},") for name in names),
    }
    data = read(tmp_path, plan=plan, tables=tables)
    assert [analyte.plan.name for analyte in data.analytes] == names
    comparison = data.analytes[39].plan.comparison
    assert comparison is not None
    assert [(level.at, level.source) for level in comparison.levels] == [(5.0, "QP")]
    assert data.analytes[39].plan.measuring_interval == (0.5, 40.0)
    assert data.analytes[39].plan.decimals == 1


def test_every_problem_of_the_tables_of_analytes_and_allowances_names_its_line(tmp_path: Path) -> None:
    plan = HEAD + '[defaults.comparison]\ncomparative = "A"\ncandidate = "B"\n' + POTASSIUM + LEVELS.format("source = 's'")
    tables = {
        "analytes.csv": "name,unit,low,high\nCa,mmol/L,,3\nK,mmol/L,,\nMg,mmol/L,3,1\n",
        "allowances.csv": "analyte,at,allowable,source\nK,5,8,QP\nk,6,8,QP\nK,x,8,QP\nK,7,8,\nK,8,8 percent,QP\n",
        "comparison.csv": COLUMNS + ROWS + ROWS.replace("K", "Mg"),
    }
    told = unusable(tmp_path, plan=plan, tables=tables)
    assert [message.split(": ")[:2] for message in told] == [
        ["analytes.csv:2", "low, high"], ["allowances.csv:3", "analyte"], ["allowances.csv:4", "at"],
        ["allowances.csv:2", "at"], ["allowances.csv:5", "source"], ["allowances.csv:6", "allowable"],
        ["analytes.csv:4", "measuring_interval"], ["analytes.csv:3", "name"],
    ]


def test_levels_of_an_analyte_without_a_comparison_are_refused(tmp_path: Path) -> None:
    tables = {"allowances.csv": "analyte,at,allowable,source\nCl,90,8,QP\n", "reference.csv": "analyte,subject,result\nCl,1,9\n"}
    assert unusable(tmp_path, plan=HEAD + CHLORIDE, tables=tables) == [
        'allowances.csv:2: at: "90": Cl has a level and no comparison; add [analyte.comparison], or remove the row'
    ]


def test_other_analytes_in_the_tables_are_ignored_when_the_plan_says_so(tmp_path: Path) -> None:
    plan = HEAD + '[files]\nother_analytes = "ignore"\n' + POTASSIUM
    tables = {
        "comparison.csv": COLUMNS + ROWS + "Na,1,A,1\nNa,1,B,1\n",
        "allowances.csv": "analyte,at,allowable,source\nNa,90,8,QP\n",
    }
    data = read(tmp_path, plan=plan, tables=tables)
    assert (data.stray, data.analytes[0].problems) == ({}, ())
    assert data.notes == (
        "files.allowances: 1 rows of analytes that the plan does not name ignored",
        'files.comparison: 2 rows of "Na" ignored: the plan does not name it',
    )


def criteria(folder: Path, plan: str) -> str:
    return read(folder, plan=plan).plan.criteria_hash


def test_the_hash_of_the_criteria_follows_the_criteria_and_nothing_else(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM + 'levels = [ { at = 5, allowable = "8", source = "s" }, { at = 9, allowable = "8", source = "s" } ]\n'
    first = criteria(tmp_path, plan)
    other_order = HEAD + POTASSIUM + (
        'levels = [ { at = 9, allowable = "8", source = "s" }, { at = 5.0, allowable = "8", source = "s" } ]\n'
    )
    assert criteria(tmp_path, other_order.replace("seed = 1", "seed = 2")) == first
    changed = [plan.replace("at = 5", "at = 6"), plan.replace('"8"', '"9"', 1), plan.replace('"s"', '"t"', 1)]
    assert len({first, *(criteria(tmp_path, each) for each in changed)}) == 4


def test_only_keeps_the_named_analytes_and_refuses_unknown_ones(tmp_path: Path) -> None:
    plan = HEAD + POTASSIUM + POTASSIUM.replace('"K"', '"Na"')
    tables = {"comparison.csv": COLUMNS + ROWS + ROWS.replace("K", "Na") + "Zz,1,A,1\n"}
    data = read(tmp_path, plan=plan, tables=tables, only=["Na"])
    assert [analyte.plan.name for analyte in data.analytes] == ["Na"]
    assert len(data.plan.analytes) == 2
    assert unusable(tmp_path, plan=plan, tables=tables, only=["na", "Q"]) == [
        'round.toml: analyte: "na": the plan does not know this analyte, did you mean "Na"; name one of: K, Na',
        'round.toml: analyte: "Q": the plan does not know this analyte; name one of: K, Na',
    ]


def test_dates_may_be_toml_dates_or_text(tmp_path: Path) -> None:
    plan = HEAD + 'issued = 2026-12-01\napproved = { by = "Director", on = "2026-11-01" }\n' + POTASSIUM
    read_plan = read(tmp_path, plan=plan).plan
    assert read_plan.issued == "2026-12-01"
    assert read_plan.approved is not None
    assert (read_plan.approved.by, read_plan.approved.on, read_plan.approved.criteria) == ("Director", "2026-11-01", None)
