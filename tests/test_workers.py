"""Work is shared among processes without changing a result, and a dying process takes no other work with it."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import textwrap
import time

import numpy as np
import pytest

from labstat.batch.workers import DIED, ONE_THREAD, run_all


def square(job: int) -> int:
    return job * job


def kills_itself_at_three(job: int) -> int:
    if job == 3:
        os.kill(os.getpid(), signal.SIGKILL)
    return job * job


def raises(job: int) -> int:
    raise ZeroDivisionError(job)


def environment(job: int) -> list[str | None]:
    return [os.environ.get(name) for name in ONE_THREAD]


def product(job: int) -> bytes:
    values = np.random.Generator(np.random.PCG64(job)).normal(size=(300, 300))
    return (values @ values).tobytes()


def everything(work, jobs, workers, told=None):
    return run_all(
        work,
        jobs,
        workers=workers,
        failed=lambda job, reason: reason,
        done=([] if told is None else told).append,
        preload=["numpy"],
    )


@pytest.mark.parametrize("workers", [1, 2])
def test_results_come_in_the_order_of_the_jobs_and_each_end_is_told(workers):
    told = []
    assert everything(square, [4, 3, 2, 1], workers, told) == [16, 9, 4, 1]
    assert sorted(told) == [1, 2, 3, 4]


def test_a_killed_worker_costs_only_its_own_job():
    told = []
    assert everything(kills_itself_at_three, [1, 2, 3, 4, 5], 2, told) == [1, 4, DIED, 16, 25]
    assert sorted(told) == [1, 2, 3, 4, 5]


@pytest.mark.parametrize("workers", [1, 2])
def test_an_error_of_the_work_itself_is_passed_on(workers):
    with pytest.raises(ZeroDivisionError):
        everything(raises, [1, 2], workers)


def test_workers_have_one_thread_and_the_caller_keeps_its_environment(monkeypatch):
    monkeypatch.setenv("OMP_NUM_THREADS", "7")
    monkeypatch.delenv("MKL_NUM_THREADS", raising=False)
    assert everything(product, [1, 2, 3], 2) == everything(product, [1, 2, 3], 1)
    assert os.environ["OMP_NUM_THREADS"] == "7"
    assert "MKL_NUM_THREADS" not in os.environ


SCRIPT = """
import sys, time
print("started", flush=True)
import os
sys.path.insert(0, {here!r})
import test_workers
print(test_workers.everything(test_workers.{work}, list(range(8)), 2), flush=True)
"""


def sleeps(job: int) -> int:
    time.sleep(60)
    return job


def script(tmp_path, work):
    path = tmp_path / "script.py"
    path.write_text(textwrap.dedent(SCRIPT).format(here=os.path.dirname(__file__), work=work))
    return subprocess.Popen(
        [sys.executable, str(path)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )


def test_a_script_without_a_guard_runs_once(tmp_path):
    process = script(tmp_path, "square")
    out, err = process.communicate(timeout=60)
    assert (process.returncode, err) == (0, "")
    assert out.splitlines() == ["started", "[0, 1, 4, 9, 16, 25, 36, 49]"]


def members(group: int) -> list[int]:
    """Processes of a process group that are alive, read from the process table."""
    found = []
    for entry in os.listdir("/proc"):
        if entry.isdigit():
            try:
                with open(f"/proc/{entry}/stat", encoding="utf-8") as stat:
                    fields = stat.read().rpartition(")")[2].split()
            except OSError:
                continue
            if int(fields[2]) == group and fields[0] != "Z":
                found.append(int(entry))
    return found


@pytest.mark.skipif(not os.path.isdir("/proc/self"), reason="needs the process table")
@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGKILL])
def test_no_worker_outlives_the_main_process(tmp_path, number):
    process = script(tmp_path, "sleeps")
    try:
        deadline = time.monotonic() + 30
        while len(members(process.pid)) < 4 and time.monotonic() < deadline:  # main, fork server, two workers at least
            time.sleep(0.05)
        time.sleep(0.3)
        process.send_signal(number)
        process.communicate(timeout=20)
        deadline = time.monotonic() + 20
        while members(process.pid) and time.monotonic() < deadline:
            time.sleep(0.05)
        assert members(process.pid) == []
    finally:
        for left in members(process.pid):
            os.kill(left, signal.SIGKILL)
