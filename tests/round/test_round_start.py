"""A new round: commented, invented, clean, and never written over what is there."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from labstat.errors import ArgumentError
from labstat.round.reading import read_round
from labstat.round.start import FILES, write_start


def test_a_new_round_reads_without_problem_or_note(tmp_path: Path) -> None:
    folder = tmp_path / "deep" / "new"
    write_start(folder)
    data = read_round(folder)
    assert sorted(path.name for path in folder.iterdir()) == sorted(FILES)
    assert (data.stray, data.notes) == ({}, ())
    assert [(analyte.plan.name, analyte.problems) for analyte in data.analytes] == [("Creatinine", ()), ("Glucose", ())]
    for analyte in data.analytes:
        assert len(analyte.comparisons[0].specimens) == 24
        assert len(set(analyte.comparisons[0].days)) >= 5
    assert data.analytes[0].reference is not None
    assert len(data.analytes[0].reference.subjects) == 120


def test_a_new_round_shows_every_kind_of_row(tmp_path: Path) -> None:
    write_start(tmp_path)
    data = read_round(tmp_path)
    assert {row.why for analyte in data.analytes for row in analyte.left_out} == {
        "excluded", "censored", "missing", "unpaired",
    }


def test_a_new_round_says_that_it_is_invented_and_defers_to_review(tmp_path: Path) -> None:
    write_start(tmp_path)
    text = (tmp_path / "round.toml").read_text(encoding="utf-8")
    assert "INVENTED" in text
    assert "Not a medical device, and no substitute for qualified review" in text
    assert "invented" in tomllib.loads(text)["round"]["laboratory"]


@pytest.mark.parametrize("key", ["issued", "report_number", "deviations"])
def test_what_is_commented_out_in_a_new_plan_is_a_plan_too(tmp_path: Path, key: str) -> None:
    write_start(tmp_path)
    plan = tmp_path / "round.toml"
    text = plan.read_text(encoding="utf-8")
    assert f"# {key} = " in text
    plan.write_text(text.replace(f"# {key} = ", f"{key} = "), encoding="utf-8")
    assert read_round(tmp_path).analytes[0].problems == ()


def test_an_empty_folder_is_filled_and_any_other_refused(tmp_path: Path) -> None:
    (tmp_path / "empty").mkdir()
    write_start(tmp_path / "empty")
    before = {path.name: path.read_bytes() for path in (tmp_path / "empty").iterdir()}
    with pytest.raises(ArgumentError, match=r"^folder must be new or empty: "):
        write_start(tmp_path / "empty")
    assert {path.name: path.read_bytes() for path in (tmp_path / "empty").iterdir()} == before
    file = tmp_path / "file"
    file.write_text("mine")
    with pytest.raises(ArgumentError, match=r"^folder must be a folder: "):
        write_start(file)
    with pytest.raises(ArgumentError, match=r"^folder cannot be written "):
        write_start(file / "below")
    assert file.read_text() == "mine"
