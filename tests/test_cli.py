"""The commands: exit codes, what goes to which stream, and that nothing is ever half-written."""

from __future__ import annotations

import os
import pty
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from tiny_round import command, content, labstat, rows_of, write_round

import labstat as package


@pytest.fixture(scope="module")
def good(tmp_path_factory):
    return write_round(tmp_path_factory.mktemp("cli") / "round", {"K": rows_of("K"), "Na": rows_of("Na", shift=-0.5)})


@pytest.fixture(scope="module")
def bad(tmp_path_factory):
    """Two bad rows in K, one row of an analyte that nobody planned."""
    rows = rows_of("K")
    rows[3], rows[7] = '"K",S001,Procedure B,twelve', '"K",S003,Procedure Z,30'
    tables = {"K": rows, "Na": rows_of("Na"), "Xx": ['"Xx",S1,Procedure A,1']}
    return write_round(tmp_path_factory.mktemp("cli") / "round", tables, planned=["K", "Na"])


def test_version_and_help_answer_and_are_quick():
    assert labstat("--version").stdout == f"labstat {package.__version__}\n"
    for words in (["--help"], ["run", "--help"], ["check", "-h"], ["start", "-h"]):
        done = labstat(*words)
        assert (done.returncode, done.stderr) == (0, "")
        assert done.stdout.startswith("Usage: labstat")
    heavy = "import sys, labstat.cli; print([m for m in ('numpy', 'scipy', 'reportlab', 'rich') if m in sys.modules])"
    assert subprocess.run([sys.executable, "-c", heavy], capture_output=True, text=True, check=True).stdout == "[]\n"


@pytest.mark.parametrize(
    "words",
    [
        [],
        ["fly"],
        ["run"],
        ["run", "x", "--fast"],
        ["run", "x", "--workers", "0"],
        ["run", "x", "--seed", "-1"],
        ["run", "x", "--resamples", "98"],
        ["check"],
        ["start"],
    ],
)
def test_an_unusable_command_line_ends_with_two(words, tmp_path):
    done = labstat(*words)
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr


def test_start_writes_a_round_that_checks_and_runs(tmp_path):
    done = labstat("start", tmp_path / "new")
    assert (done.returncode, done.stdout) == (0, f"new round: {tmp_path / 'new'}\n")
    assert "labstat check" in done.stderr
    assert labstat("check", tmp_path / "new").returncode == 0
    assert labstat("run", tmp_path / "new", "--resamples", "99", "--workers", "1").returncode == 0
    assert (tmp_path / "new" / "out" / "overview.pdf").exists()


def test_start_refuses_a_folder_that_is_not_empty(tmp_path):
    (tmp_path / "mine.txt").write_text("mine")
    done = labstat("start", tmp_path)
    assert done.returncode == 2
    assert "Traceback" not in done.stderr
    assert str(tmp_path) in done.stderr
    assert os.listdir(tmp_path) == ["mine.txt"]


def test_check_prints_what_it_understood_and_every_problem_on_standard_output(good, bad):
    clean = labstat("check", good)
    assert (clean.returncode, clean.stderr) == (0, "")
    for word in ("K", "Na", "Procedure A", "Procedure B", "24", "mmol/L"):
        assert word in clean.stdout
    done = labstat("check", bad)
    assert (done.returncode, done.stderr) == (1, "")
    assert 'comparison.csv:5: result: "twelve": ' in done.stdout
    assert 'comparison.csv:9: procedure: "Procedure Z": ' in done.stdout
    assert '"Xx"' in done.stdout
    assert not (good / "out").exists() or (good / "out" / "results.json").exists()


def test_check_of_an_unusable_round_ends_with_two_and_prints_every_problem(tmp_path):
    (tmp_path / "round.toml").write_text("[round]\ntitle = 3\nseeed = 1\n", encoding="utf-8")
    done = labstat("check", tmp_path)
    assert (done.returncode, done.stderr) == (2, "")
    assert "title" in done.stdout
    assert "seeed" in done.stdout
    none = labstat("check", tmp_path / "nowhere")
    assert none.returncode == 2
    assert "Traceback" not in none.stderr + none.stdout


def test_run_prints_one_line_an_analyte_and_where_the_reports_are(good, tmp_path):
    done = labstat("run", good, "--out", tmp_path / "out", "--workers", "1")
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    assert lines[0].startswith("K   ")
    assert lines[1].startswith("Na  ")
    assert lines[2] == f"reports: {tmp_path / 'out' / 'overview.pdf'}"
    assert len(lines) == 3


def test_run_names_what_it_could_not_compute_and_ends_with_one(bad, tmp_path):
    done = labstat("run", bad, "--out", tmp_path / "out", "--workers", "1")
    assert done.returncode == 1
    assert 'comparison.csv:5: result: "twelve": ' in done.stderr
    assert 'comparison.csv:9: procedure: "Procedure Z": ' in done.stderr
    assert "K   not computed: " in done.stdout
    assert "Xx  not computed: " in done.stdout
    assert sorted(os.listdir(tmp_path / "out" / "reports")) == ["Na.pdf"]


def test_run_of_an_unusable_round_ends_with_two_and_writes_nothing(tmp_path):
    (tmp_path / "round.toml").write_text("[round", encoding="utf-8")
    done = labstat("run", tmp_path)
    assert (done.returncode, done.stdout) == (2, "")
    assert "round.toml" in done.stderr
    assert os.listdir(tmp_path) == ["round.toml"]


def test_an_unknown_analyte_ends_with_two_and_names_the_nearest(good, tmp_path):
    done = labstat("run", good, "--out", tmp_path / "out", "--only", "na")
    assert (done.returncode, done.stdout) == (2, "")
    assert 'did you mean "Na"' in done.stderr
    assert os.listdir(tmp_path) == []


def test_only_workers_seed_and_resamples_are_heeded(good, tmp_path):
    words = ("--only", "Na", "--workers", "1", "--seed", "5", "--resamples", "99")
    assert labstat("run", good, "--out", tmp_path / "out", *words).returncode == 0
    results = (tmp_path / "out" / "results.json").read_text(encoding="utf-8")
    assert '"seed": 5' in results
    assert '"resamples": 99' in results
    assert os.listdir(tmp_path / "out" / "reports") == ["Na.pdf"]


def test_the_bytes_do_not_depend_on_hash_seed_workers_locale_or_time_zone(good, tmp_path):
    labstat(
        "run", good, "--out", tmp_path / "a", "--workers", "1", PYTHONHASHSEED="1", TZ="Pacific/Auckland", LC_ALL="C"
    )
    labstat("run", good, "--out", tmp_path / "b", "--workers", "2", PYTHONHASHSEED="2", TZ="America/Lima")
    assert content(tmp_path / "a") == content(tmp_path / "b")
    assert len(content(tmp_path / "a")) > 10


def test_an_output_that_cannot_be_written_ends_with_two(good, tmp_path):
    (tmp_path / "file").write_text("")
    done = labstat("run", good, "--out", tmp_path / "file" / "below")
    assert (done.returncode, done.stdout) == (2, "")
    assert "cannot be written" in done.stderr
    assert done.stderr.splitlines()[-1].startswith("hint: ")
    assert "Traceback" not in done.stderr


def test_a_reader_that_stops_reading_is_no_fault(good, tmp_path):
    process = subprocess.Popen(command("check", good), stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.close()
    error = process.stderr.read()
    assert process.wait(timeout=60) == 0
    assert error == ""
    process.stderr.close()


def test_a_name_cannot_steer_the_terminal(tmp_path):
    name = "K\u202eevil"
    folder = write_round(tmp_path / "round", {name: rows_of(name)})
    done = labstat("run", folder, "--resamples", "99")
    assert "\u202e" not in done.stdout + done.stderr
    assert "K\ufffdevil" in done.stdout


def test_an_ascii_terminal_ends_nothing(good, tmp_path):
    done = labstat("check", good, PYTHONIOENCODING="ascii", PYTHONUTF8="0")
    assert done.returncode == 0


def test_progress_is_shown_on_a_terminal_only(good, tmp_path):
    mine, theirs = pty.openpty()
    process = subprocess.Popen(
        command("run", good, "--out", tmp_path / "out", "--workers", "1"),
        stdout=subprocess.PIPE,
        stderr=theirs,
        env={**os.environ, "TERM": "xterm", "COLUMNS": "100"},
    )
    os.close(theirs)
    shown = b""
    while True:
        try:
            part = os.read(mine, 4096)
        except OSError:  # the other end is closed
            break
        if not part:
            break
        shown += part
    out, _ = process.communicate(timeout=60)
    os.close(mine)
    assert process.returncode == 0
    assert b"2/2" in shown
    assert out.splitlines()[0].startswith(b"K ")


def slow_round(folder: Path) -> Path:
    """A round that takes long enough to be interrupted."""
    names = [f"A{i}" for i in range(8)]
    return write_round(folder, {name: rows_of(name, 400) for name in names})


@pytest.mark.parametrize(
    ("workers", "number", "status"), [("1", signal.SIGTERM, 143), ("2", signal.SIGTERM, 143), ("2", signal.SIGINT, 130)]
)
def test_an_interrupted_run_leaves_the_previous_output_and_no_litter(tmp_path, workers, number, status):
    folder = slow_round(tmp_path / "round")
    package.run_round(folder, only=["A0"], resamples=399, workers=1)
    before = content(folder / "out")
    process = subprocess.Popen(
        command("run", folder, "--workers", workers, "--resamples", "99999"),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    lock = folder / ".out.labstat-lock"
    deadline = time.monotonic() + 60
    while not lock.exists() and time.monotonic() < deadline:
        time.sleep(0.01)
    time.sleep(0.5)
    assert process.poll() is None, "the round was too quick to be interrupted"
    os.killpg(process.pid, number) if number == signal.SIGINT else process.send_signal(number)
    out, error = process.communicate(timeout=60)
    assert (process.returncode, out) == (status, "")
    assert error == ("interrupted\n" if number == signal.SIGINT else "ended\n")
    assert content(folder / "out") == before
    assert sorted(os.listdir(folder)) == ["comparison.csv", "out", "round.toml"]


def test_a_run_that_was_killed_outright_hinders_no_later_one(tmp_path):
    folder = slow_round(tmp_path / "round")
    process = subprocess.Popen(
        command("run", folder, "--workers", "1", "--resamples", "99999"), stderr=subprocess.DEVNULL
    )
    while not (folder / ".out.labstat-lock").exists():
        time.sleep(0.01)
    with pytest.raises(package.OutputError, match="another run is writing this output"):
        package.run_round(folder, resamples=99)
    process.kill()
    process.wait(timeout=60)
    assert package.run_round(folder, only=["A0"], resamples=399, workers=1).exit_status == 0
    assert sorted(os.listdir(folder)) == ["comparison.csv", "out", "round.toml"]
