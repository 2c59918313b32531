"""An output appears complete or not at all, and nobody else's files are ever replaced."""

from __future__ import annotations

import hashlib
import os
from pathlib import Path

import pytest

from labstat.batch.output import SUMS, OutputError, reserved

FILES = {"results.json": b'{"format": "labstat results 1"}\n', "reports/A.pdf": b"%PDF", "tables/bias.csv": b"at\r\n"}


def write(out: Path, files=FILES) -> None:
    with reserved(out, folder=out.parent / "round") as output:
        output.publish(files)


def content(folder: Path) -> dict[str, bytes]:
    return {p.relative_to(folder).as_posix(): p.read_bytes() for p in sorted(folder.rglob("*")) if p.is_file()}


def test_everything_is_written_with_its_sums_and_nothing_is_left_beside(tmp_path):
    write(tmp_path / "out")
    found = content(tmp_path / "out")
    sums = found.pop(SUMS).decode().splitlines()
    assert found == FILES
    assert sums == [f"{hashlib.sha256(FILES[name]).hexdigest()}  {name}" for name in sorted(FILES)]
    assert os.listdir(tmp_path) == ["out"]


def test_a_second_run_replaces_the_first_as_a_whole(tmp_path):
    write(tmp_path / "out")
    write(tmp_path / "out", {"results.json": FILES["results.json"], "reports/B.pdf": b"%PDF 2"})
    assert set(content(tmp_path / "out")) == {SUMS, "results.json", "reports/B.pdf"}
    assert os.listdir(tmp_path) == ["out"]


def test_missing_parents_are_made_and_go_again_when_nothing_is_written(tmp_path):
    write(tmp_path / "a" / "b" / "out")
    assert (tmp_path / "a" / "b" / "out" / "results.json").exists()
    with pytest.raises(RuntimeError), reserved(tmp_path / "c" / "d" / "out", folder=tmp_path / "round"):
        raise RuntimeError
    assert sorted(os.listdir(tmp_path)) == ["a"]


def test_a_failure_between_the_two_moves_brings_the_previous_output_back(tmp_path, monkeypatch):
    write(tmp_path / "out")
    before = content(tmp_path / "out")
    rename = Path.rename

    def failing(self, target):
        if self.name.endswith("labstat-new"):
            raise OSError(28, "No space left on device")
        return rename(self, target)

    monkeypatch.setattr(Path, "rename", failing)
    with pytest.raises(OutputError, match="No space left on device"):
        write(tmp_path / "out", {"results.json": FILES["results.json"]})
    assert content(tmp_path / "out") == before
    assert os.listdir(tmp_path) == ["out"]


def test_a_failure_while_writing_leaves_the_previous_output_as_it_was(tmp_path, monkeypatch):
    write(tmp_path / "out")
    before = content(tmp_path / "out")
    monkeypatch.setattr(os, "fsync", lambda handle: (_ for _ in ()).throw(OSError(5, "Input/output error")))
    with pytest.raises(OutputError, match="Input/output error"):
        write(tmp_path / "out", {"results.json": FILES["results.json"]})
    assert content(tmp_path / "out") == before
    assert os.listdir(tmp_path) == ["out"]


def test_a_run_killed_between_the_two_moves_is_recovered_by_the_next(tmp_path):
    write(tmp_path / "out")
    before = content(tmp_path / "out")
    (tmp_path / "out").rename(tmp_path / ".out.labstat-old")
    (tmp_path / ".out.labstat-new").mkdir()
    with reserved(tmp_path / "out", folder=tmp_path / "round"):
        assert content(tmp_path / "out") == before
    assert os.listdir(tmp_path) == ["out"]


def test_two_runs_cannot_hold_one_output(tmp_path):
    with (
        reserved(tmp_path / "out", folder=tmp_path / "round"),
        pytest.raises(OutputError, match="another run is writing this output"),
        reserved(tmp_path / "out", folder=tmp_path / "round"),
    ):
        pass
    write(tmp_path / "out")


def refused(tmp_path, words, out=None):
    with (
        pytest.raises(OutputError, match=words) as caught,
        reserved(out or tmp_path / "out", folder=tmp_path / "round"),
    ):
        pass
    assert caught.value.hint
    return caught.value


def test_a_folder_of_somebody_else_is_refused(tmp_path):
    (tmp_path / "out").mkdir()
    (tmp_path / "out" / "thesis.txt").write_text("years of work")
    refused(tmp_path, "was not written by labstat")
    (tmp_path / "out" / "results.json").write_text('{"format": "another program"}')
    refused(tmp_path, "was not written by labstat")
    (tmp_path / "out" / "results.json").write_text("[")
    refused(tmp_path, "was not written by labstat")
    assert (tmp_path / "out" / "thesis.txt").read_text() == "years of work"


def test_an_empty_folder_is_used(tmp_path):
    (tmp_path / "out").mkdir()
    write(tmp_path / "out")
    assert SUMS in content(tmp_path / "out")


def test_a_file_that_was_added_or_changed_since_is_not_lost(tmp_path):
    write(tmp_path / "out")
    (tmp_path / "out" / "reports" / "A.pdf").write_bytes(b"%PDF signed")
    refused(tmp_path, "was changed since labstat wrote it: .*A.pdf")
    (tmp_path / "out" / "reports" / "A.pdf").write_bytes(b"%PDF")
    (tmp_path / "out" / "notes.txt").write_text("ask the supplier")
    refused(tmp_path, "did not write: .*notes.txt")
    (tmp_path / "out" / "notes.txt").unlink()
    (tmp_path / "out" / ".DS_Store").write_text("clutter")
    write(tmp_path / "out")


def test_an_output_without_its_list_is_known_by_what_a_run_writes(tmp_path):
    write(tmp_path / "out")
    (tmp_path / "out" / SUMS).unlink()
    write(tmp_path / "out")
    (tmp_path / "out" / SUMS).unlink()
    (tmp_path / "out" / "reports" / "letter.docx").write_text("dear director")
    refused(tmp_path, r"did not write: .*letter\.docx")


def test_a_file_added_while_the_round_is_computed_is_not_lost(tmp_path):
    write(tmp_path / "out")
    with reserved(tmp_path / "out", folder=tmp_path / "round") as output:
        (tmp_path / "out" / "notes.txt").write_text("ask the supplier")
        with pytest.raises(OutputError, match=r"notes\.txt"):
            output.publish(FILES)
    assert (tmp_path / "out" / "notes.txt").exists()
    assert os.listdir(tmp_path) == ["out"]


def test_the_round_itself_is_never_the_output(tmp_path):
    (tmp_path / "round").mkdir()
    refused(tmp_path, "would replace the round itself", out=tmp_path / "round")
    refused(tmp_path, "would replace the round itself", out=tmp_path)
    refused(tmp_path, "would replace the round itself", out=tmp_path / "round" / "x" / "..")


def test_a_file_in_place_of_the_folder_is_refused(tmp_path):
    (tmp_path / "out").write_text("")
    refused(tmp_path, "is a file")
    refused(tmp_path, "cannot be written", out=tmp_path / "out" / "below")


def test_a_link_to_a_folder_is_followed_and_stays_a_link(tmp_path):
    (tmp_path / "real").mkdir()
    (tmp_path / "out").symlink_to(tmp_path / "real")
    write(tmp_path / "out")
    assert (tmp_path / "out").is_symlink()
    assert (tmp_path / "real" / "results.json").exists()


@pytest.mark.skipif(os.geteuid() == 0, reason="nothing is unwritable for the superuser")
def test_a_place_without_permission_is_refused(tmp_path):
    (tmp_path / "closed").mkdir(mode=0o500)
    refused(tmp_path, "Permission denied", out=tmp_path / "closed" / "out")


def test_an_impossible_place_is_refused():
    with pytest.raises(OutputError, match="cannot be written"), reserved(Path("/proc/none/out"), folder=Path("round")):
        pass
