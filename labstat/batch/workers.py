"""Work on many analytes at once: one process a worker, one thread of linear algebra in each.

The results do not depend on how many workers there are: each analyte is computed by itself, from a seed of its own.
"""

from __future__ import annotations

import multiprocessing
import multiprocessing.connection
import os
import signal
import sys
import threading
import types
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from multiprocessing import resource_tracker
from typing import TypeVar

from threadpoolctl import threadpool_limits  # type: ignore[import-untyped]

J = TypeVar("J")
R = TypeVar("R")

ONE_THREAD = (
    "OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "BLIS_NUM_THREADS", "VECLIB_MAXIMUM_THREADS",
    "NUMEXPR_NUM_THREADS",
)
DIED = "the process that computed it died (killed, or out of memory)"


def run_all(
    work: Callable[[J], R],
    jobs: Sequence[J],
    *,
    workers: int,
    failed: Callable[[J, str], R],
    done: Callable[[J], None],
    preload: Sequence[str] = (),
) -> list[R]:
    """``work`` done on every job, in the order of the jobs.

    ``failed`` makes a result for a job whose worker died; such jobs are tried once more by themselves, so that a job
    that kills its worker takes no other with it. ``done`` is told about each job that has ended. With one worker
    everything runs in this process. On an interruption the workers are ended before it is passed on.
    """
    with threadpool_limits(limits=1):  # one thread or two can differ in the last bits
        if workers == 1:
            return [_alone(work, job, done) for job in jobs]
        results: dict[int, R] = {}
        everything = list(range(len(jobs)))
        _pool(work, jobs, everything, workers, results, done, preload)
        for index in everything:
            if index not in results:
                _pool(work, jobs, [index], 1, results, done, preload)
            if index not in results:
                results[index] = failed(jobs[index], DIED)
                done(jobs[index])
        return [results[index] for index in everything]


def _alone(work: Callable[[J], R], job: J, done: Callable[[J], None]) -> R:
    result = work(job)
    done(job)
    return result


def _pool(
    work: Callable[[J], R], jobs: Sequence[J], indices: Sequence[int], workers: int, results: dict[int, R],
    done: Callable[[J], None], preload: Sequence[str],
) -> None:
    """Put into ``results`` what one pool of workers can do; what is missing afterwards was lost with a worker."""
    methods = multiprocessing.get_all_start_methods()
    context = multiprocessing.get_context("forkserver" if "forkserver" in methods else "spawn")
    context.set_forkserver_preload(list(preload))
    executor = ProcessPoolExecutor(min(workers, len(indices)), mp_context=context, initializer=_begin)
    try:
        pending: dict[Future[R], int] = {}
        with _single_threaded_environment(), _without_main(), _undisturbed():
            try:
                for index in indices:
                    pending[executor.submit(work, jobs[index])] = index
            except BrokenProcessPool:
                pass  # a worker died while jobs were still handed out: those are missing, and tried again
        while pending:
            ended, _ = wait(pending, return_when=FIRST_COMPLETED)
            for future in ended:
                index = pending.pop(future)
                error = future.exception()
                if error is None:
                    results[index] = future.result()
                    done(jobs[index])
                elif not isinstance(error, BrokenProcessPool):
                    raise error
    except BaseException:
        _kill(executor)
        raise
    finally:
        executor.shutdown(wait=True, cancel_futures=True)


def _kill(executor: ProcessPoolExecutor) -> None:
    """End the workers: shutting down would wait for the work they are at."""
    for process in list((executor._processes or {}).values()):
        process.kill()


def _begin() -> None:
    """In a worker: one thread, interruptions left to the main process, no life beyond the main process's."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    if hasattr(signal, "pthread_sigmask"):
        signal.pthread_sigmask(signal.SIG_UNBLOCK, _HELD)
    threadpool_limits(limits=1)
    parent = multiprocessing.parent_process()
    if parent is not None:
        threading.Thread(target=_end_with, args=(parent.sentinel,), daemon=True).start()


def _end_with(sentinel: int) -> None:
    multiprocessing.connection.wait([sentinel])
    os._exit(1)


@contextmanager
def _single_threaded_environment() -> Iterator[None]:
    """What a process started now inherits: libraries read these when they are loaded."""
    before = {name: os.environ.get(name) for name in ONE_THREAD}
    os.environ.update(dict.fromkeys(ONE_THREAD, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                os.environ.pop(name, None)
            else:
                os.environ[name] = value


_HELD = (signal.SIGINT, signal.SIGTERM)


@contextmanager
def _undisturbed() -> Iterator[None]:
    """Hold interruptions back while workers are started; they arrive afterwards.

    A worker that is interrupted while it starts, or that the main process has not yet taken note of, would write its
    own tale of woe to the terminal. What is started here inherits that interruptions are held back.
    """
    resource_tracker.ensure_running()  # starting it would let interruptions through again
    came: list[int] = []
    handlers = {}
    if threading.current_thread() is threading.main_thread():
        # the mask below does not reach the threads of libraries, which may take the signal in our place
        handlers = {number: signal.signal(number, lambda number, _: came.append(number)) for number in _HELD}
    masks = hasattr(signal, "pthread_sigmask")
    before = signal.pthread_sigmask(signal.SIG_BLOCK, _HELD) if masks else set()
    try:
        yield
    finally:
        for held, handler in handlers.items():
            signal.signal(held, handler)
        if masks:
            signal.pthread_sigmask(signal.SIG_SETMASK, before)
        for number in dict.fromkeys(came):
            signal.raise_signal(number)


@contextmanager
def _without_main() -> Iterator[None]:
    """Keep workers from importing the caller's script again.

    A started worker imports the main module of its parent. A script that calls ``run_round`` without a guard would
    then call it once more in each worker. Workers need nothing from there: they are handed labstat's own functions.
    """
    main = sys.modules["__main__"]
    sys.modules["__main__"] = types.ModuleType("__main__")
    try:
        yield
    finally:
        sys.modules["__main__"] = main
