"""A round is computed as a whole: what fails is named, the others are written, the same inputs give the same bytes."""

from __future__ import annotations

import json
import os
import signal
from pathlib import Path

import pytest
from tiny_round import content, only_analyte, rows_of, write_round

import labstat
from labstat import batch
from labstat.batch import job as one_job
from labstat.batch.output import OutputError
from labstat.errors import ArgumentError, RoundError


@pytest.fixture(scope="module")
def good(tmp_path_factory):
    """A round of two analytes and the report of its run."""
    folder = write_round(
        tmp_path_factory.mktemp("good") / "round", {"K": rows_of("K"), "Na": rows_of("Na", shift=-0.5)}
    )
    return folder, labstat.run_round(folder, workers=1)


def results(out: str | Path) -> dict:
    return json.loads((Path(out) / "results.json").read_text(encoding="utf-8"))


def test_a_run_writes_reports_overview_results_and_tables(good):
    folder, report = good
    assert (report.exit_status, report.problems) == (0, ())
    assert report.out == str((folder / "out").resolve())
    files = content(folder / "out")
    assert {"overview.pdf", "reports/K.pdf", "reports/Na.pdf", "results.json", "tables/bias.csv", "SHA256SUMS"} <= set(
        files
    )
    assert all(files[name].startswith(b"%PDF-") for name in files if name.endswith(".pdf"))
    assert [entry.name for entry in report.entries] == ["K", "Na"]
    assert [entry.file for entry in report.entries] == ["reports/K.pdf", "reports/Na.pdf"]
    found = results(report.out)
    assert found["format"] == "labstat results 1"
    assert [analyte["outcome"] for analyte in found["analytes"]] == ["computed", "computed"]
    assert (found["round"]["seed"], found["round"]["resamples"]) == (1, 399)
    assert only_analyte(found, "K")["comparison"][0]["n"] == 24


def test_the_numbers_are_those_of_a_fit_of_the_same_rows(good):
    """The constant shift of 0.5 with a wobble of mean 0.06 over whole cycles: the bias at 50 lies within the wobble."""
    bias = only_analyte(results(good[1].out), "K")["comparison"][0]["bias"][0]
    assert 0.2 < bias["bias"]["estimate"] < 0.9
    assert bias["bias"]["low"] < bias["bias"]["estimate"] < bias["bias"]["high"]
    assert bias["allowed"] == [-5.0, 5.0]


@pytest.mark.parametrize("workers", [2, 3])
def test_the_bytes_do_not_depend_on_the_workers(good, tmp_path, workers):
    labstat.run_round(good[0], out=tmp_path / "out", workers=workers)
    assert content(tmp_path / "out") == content(good[0] / "out")


def test_an_analyte_has_the_same_numbers_whatever_stands_beside_it(good, tmp_path):
    swapped = write_round(tmp_path / "round", {"Na": rows_of("Na", shift=-0.5), "K": rows_of("K")})
    there = results(labstat.run_round(swapped, workers=1).out)
    here = results(good[1].out)
    for name in ("K", "Na"):
        assert only_analyte(there, name) == only_analyte(here, name)


def test_only_some_analytes_may_be_asked_for(good, tmp_path):
    report = labstat.run_round(good[0], out=tmp_path / "out", only=["Na"], workers=1)
    found = results(report.out)
    assert [analyte["name"] for analyte in found["analytes"]] == ["Na"]
    assert found["round"]["only"] == ["Na"]
    assert only_analyte(found, "Na") == only_analyte(results(good[1].out), "Na")
    assert not (tmp_path / "out" / "reports" / "K.pdf").exists()


def test_an_unknown_analyte_is_refused_with_the_nearest_name(good, tmp_path):
    with pytest.raises(RoundError, match=r'"NA": .*did you mean "Na"'):
        labstat.run_round(good[0], out=tmp_path / "out", only=["NA"])
    assert os.listdir(tmp_path) == []


@pytest.mark.parametrize(
    ("argument", "value"),
    [
        ("workers", 0),
        ("workers", True),
        ("seed", -1),
        ("seed", 2**63),
        ("resamples", 98),
        ("resamples", 1.5),
        ("only", "K"),
    ],
)
def test_an_argument_that_breaks_its_rule_is_refused(good, argument, value):
    with pytest.raises(ArgumentError, match=argument):
        labstat.run_round(good[0], **{argument: value})


def test_seed_and_resamples_stand_in_for_the_plans(good, tmp_path):
    found = results(labstat.run_round(good[0], out=tmp_path / "out", seed=2, resamples=499, workers=1).out)
    assert (found["round"]["seed"], found["round"]["resamples"]) == (2, 499)
    before = only_analyte(results(good[1].out), "K")["comparison"][0]["fits"][0]["slope"]
    after = only_analyte(found, "K")["comparison"][0]["fits"][0]["slope"]
    assert after["estimate"] == before["estimate"]
    assert after["low"] != before["low"]
    assert after["resamples"] == 499


def test_a_bad_row_fails_its_analyte_and_no_other(tmp_path):
    rows = rows_of("K")
    rows[3] = '"K",S001,Procedure B,twelve'
    folder = write_round(tmp_path / "round", {"K": rows, "Na": rows_of("Na")})
    report = labstat.run_round(folder, workers=1)
    assert report.exit_status == 1
    assert [entry.outcome for entry in report.entries] == ["not computed", "computed"]
    assert "comparison.csv:5" in (report.entries[0].reason or "")
    assert str(report.problems[0]).startswith("comparison.csv:5:")
    failed = only_analyte(results(report.out), "K")
    assert failed["outcome"] == "not computed"
    assert "twelve" in failed["reason"]
    assert set(content(folder / "out")) >= {"reports/Na.pdf"}
    assert not (folder / "out" / "reports" / "K.pdf").exists()


def test_an_analyte_that_the_plan_does_not_know_is_named_and_ends_with_one(tmp_path):
    folder = write_round(tmp_path / "round", {"K": rows_of("K"), "Xx": rows_of("Xx", 3)}, planned=["K"])
    report = labstat.run_round(folder, workers=1)
    assert report.exit_status == 1
    assert [(entry.name, entry.outcome) for entry in report.entries] == [("K", "computed"), ("Xx", "not computed")]
    assert only_analyte(results(report.out), "Xx")["outcome"] == "not computed"
    again = labstat.run_round(folder, workers=1, only=["K"])
    assert (again.exit_status, len(again.entries)) == (0, 1)


def test_too_few_specimens_are_a_stop_and_no_failure(tmp_path):
    report = labstat.run_round(write_round(tmp_path / "round", {"K": rows_of("K", 14)}), workers=1)
    assert report.exit_status == 0
    found = only_analyte(results(report.out), "K")
    assert ("few-specimens", "stop") in [(caution["code"], caution["weight"]) for caution in found["cautions"]]
    assert "14 specimens, 20 needed" in found["proposal"]


def test_a_comparison_whose_line_does_not_exist_ends_with_one(tmp_path):
    flat = [f'"K",S{i:03d},{p},{v}' for i in range(24) for p, v in (("Procedure A", 50), ("Procedure B", 50 + i))]
    report = labstat.run_round(write_round(tmp_path / "round", {"K": flat, "Na": rows_of("Na")}), workers=1)
    assert report.exit_status == 1
    assert report.entries[0].reason
    assert report.entries[1].outcome == "computed"


def test_an_unusable_plan_writes_nothing_and_leaves_the_previous_output(tmp_path):
    folder = write_round(tmp_path / "round", {"K": rows_of("K")})
    labstat.run_round(folder, workers=1)
    before = content(folder / "out")
    (folder / "round.toml").write_text("[round]\ntitel = 1\n", encoding="utf-8")
    with pytest.raises(RoundError):
        labstat.run_round(folder, workers=1)
    assert content(folder / "out") == before
    with pytest.raises(RoundError):
        labstat.run_round(tmp_path / "nowhere", workers=1)
    assert sorted(os.listdir(tmp_path)) == ["round"]


def test_a_run_that_fails_at_the_overview_leaves_the_previous_output(tmp_path, monkeypatch):
    folder = write_round(tmp_path / "round", {"K": rows_of("K")})
    labstat.run_round(folder, workers=1)
    before = content(folder / "out")

    def fails(entries, context):
        raise RuntimeError("no ink")

    monkeypatch.setattr(batch, "overview_report", fails)
    with pytest.raises(RuntimeError, match="no ink"):
        labstat.run_round(folder, workers=1, seed=5)
    assert content(folder / "out") == before
    assert sorted(os.listdir(folder)) == ["comparison.csv", "out", "round.toml"]


def test_an_unexpected_error_in_one_analyte_costs_only_that_analyte(tmp_path, monkeypatch):
    folder = write_round(tmp_path / "round", {"K": rows_of("K"), "Na": rows_of("Na")})
    compute = one_job.compute

    def breaks(data, plan):
        if data.plan.name == "K":
            raise ZeroDivisionError("division by zero")
        return compute(data, plan)

    monkeypatch.setattr(one_job, "compute", breaks)
    report = labstat.run_round(folder, workers=1)
    assert report.exit_status == 1
    assert report.entries[0].reason == "unexpected ZeroDivisionError: division by zero"
    assert report.entries[1].outcome == "computed"


def killed_at_k(job):
    """Stands in for the work on an analyte: K kills its worker."""
    if job.data.plan.name == "K":
        os.kill(os.getpid(), signal.SIGKILL)
    return one_job.work(job)


def test_a_killed_worker_names_its_analyte_and_the_others_are_computed(tmp_path, monkeypatch):
    folder = write_round(tmp_path / "round", {"K": rows_of("K"), "Na": rows_of("Na"), "Cl": rows_of("Cl")})
    monkeypatch.setattr(batch, "work", killed_at_k)
    report = labstat.run_round(folder, workers=2)
    assert report.exit_status == 1
    assert [entry.outcome for entry in report.entries] == ["not computed", "computed", "computed"]
    assert "the process that computed it died" in (report.entries[0].reason or "")


def test_hostile_names_stay_inside_the_output(tmp_path):
    names = ["../../x", "CON", "na", "NA", "µ" * 90, "a/b", "=1+1"]
    folder = write_round(tmp_path / "round", {name: rows_of(name) for name in names})
    report = labstat.run_round(folder, workers=1)
    assert report.exit_status == 0
    reports = os.listdir(folder / "out" / "reports")
    assert len({name.casefold() for name in reports}) == len(names)
    assert sorted(f"reports/{name}" for name in reports) == sorted(entry.file or "" for entry in report.entries)
    assert sorted(os.listdir(folder)) == ["comparison.csv", "out", "round.toml"]
    assert sorted(os.listdir(tmp_path)) == ["round"]


def test_progress_is_told_each_analyte(tmp_path, good):
    told = []
    labstat.run_round(good[0], out=tmp_path / "out", workers=1, progress=lambda *news: told.append(news))
    assert told == [("K", 1, 2), ("Na", 2, 2)]


def test_the_round_folder_is_never_the_output(good):
    with pytest.raises(OutputError, match="the round itself"):
        labstat.run_round(good[0], out=good[0], workers=1)


def test_the_fewest_resamples_are_enough_to_run(tmp_path, good):
    """With so few, no specimen is missing from a hundred resamples: nothing is said about any, and nothing fails."""
    report = labstat.run_round(good[0], out=tmp_path / "out", resamples=99, workers=1)
    assert [entry.reason for entry in report.entries] == [None, None]
