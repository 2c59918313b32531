"""How fast the resampling is, as ratios measured in one run: ``python tests/benchmarks/ratios.py``.

Each work is timed beside the plain way of doing it, in turn, several times; the median ratio is printed. A ratio holds
where a time does not: both ways share the machine and its moods.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable

import numpy as np
import numpy.typing as npt
from scipy import stats
from threadpoolctl import threadpool_limits

from labstat.comparison.moments import deming
from labstat.comparison.pair_slopes import pair_slopes
from labstat.comparison.passing_bablok import passing_bablok
from labstat.resample.engine import bootstrap

Array = npt.NDArray[np.float64]
RESAMPLES = 9999
ROUNDS = 3


def comparison(n: int) -> tuple[Array, Array]:
    """Results over two decades, both procedures with a CV of 5 %."""
    rng = np.random.default_rng(n)
    truth = 10.0 ** rng.uniform(0.0, 2.0, n)
    return truth * (1 + 0.05 * rng.standard_normal(n)), truth * (1 + 0.05 * rng.standard_normal(n))


def refit_passing_bablok(x: Array, y: Array) -> tuple[float, float]:
    """The line refitted from all pair slopes, as a loop over resamples would do it."""
    i, j = np.triu_indices(x.size, 1)
    dx, dy = x[j] - x[i], y[j] - y[i]
    keep = ((dx != 0) | (dy != 0)) & (dx + dy != 0)
    with np.errstate(divide="ignore"):
        slopes = np.sort(dy[keep] / dx[keep])
    size, below = slopes.size, int(np.count_nonzero(slopes < -1.0))
    if size % 2:
        slope = slopes[(size - 1) // 2 + below]
    else:
        slope = np.sqrt(slopes[size // 2 - 1 + below] * slopes[size // 2 + below])
    return float(slope), float(np.median(y - slope * x))


def loop(x: Array, y: Array, resamples: int) -> None:
    """The plain refit loop."""
    rng = np.random.default_rng(1)
    for _ in range(resamples):
        drawn = rng.integers(0, x.size, x.size)
        slope, intercept = refit_passing_bablok(x[drawn], y[drawn])
        _ = [intercept + (slope - 1.0) * at for at in (2.0, 10.0, 50.0)]


def by_counts(x: Array, y: Array) -> None:
    """Slope, intercept and three biases from counts."""
    draws = bootstrap(passing_bablok(x, y, pair_slopes(x, y)), x.size, resamples=RESAMPLES, seed=1)
    for at in (2.0, 10.0, 50.0):
        draws.combined([at, 1.0], -at)


def deming_vectorised(x: Array, y: Array) -> None:
    """scipy.stats.bootstrap with the Deming slope written for whole arrays."""

    def slope(a: Array, b: Array, axis: int) -> Array:
        da, db = a - a.mean(axis=axis, keepdims=True), b - b.mean(axis=axis, keepdims=True)
        u, q, p = (da * da).sum(axis=axis), (db * db).sum(axis=axis), (da * db).sum(axis=axis)
        found: Array = ((q - u) + np.sqrt((u - q) ** 2 + 4 * p * p)) / (2 * p)
        return found

    stats.bootstrap(
        (x, y), slope, paired=True, vectorized=True, n_resamples=RESAMPLES, method="percentile", batch=1000,
        rng=np.random.default_rng(1),
    )


def deming_by_counts(x: Array, y: Array) -> None:
    """Slope, intercept and three biases from counts."""
    draws = bootstrap(deming(x, y, 1.0), x.size, resamples=RESAMPLES, seed=1)
    for at in (2.0, 10.0, 50.0):
        draws.combined([at, 1.0], -at)


def seconds(work: Callable[[], None]) -> float:
    started = time.perf_counter()
    work()
    return time.perf_counter() - started


def ratio(name: str, plain: Callable[[], None], ours: Callable[[], None], *, scale: float = 1.0) -> None:
    """Time both in turn; ``scale`` makes up for a plain way that did a part of the work only."""
    ours()
    pairs = [(scale * seconds(plain), seconds(ours)) for _ in range(ROUNDS)]
    middle = statistics.median(a / b for a, b in pairs)
    print(f"{name}: {middle:.0f} times faster (plain {pairs[-1][0]:.2f} s, by counts {pairs[-1][1]:.3f} s)")


def main() -> None:
    with threadpool_limits(limits=1):
        for n, part in ((40, 300), (100, 200), (1000, 6)):
            x, y = comparison(n)
            ratio(
                f"Passing-Bablok against a refit loop, n = {n}, {RESAMPLES} resamples",
                lambda x=x, y=y, part=part: loop(x, y, part),  # type: ignore[misc]
                lambda x=x, y=y: by_counts(x, y),  # type: ignore[misc]
                scale=RESAMPLES / part,
            )
        x, y = comparison(100)
        ratio(
            f"Deming against scipy.stats.bootstrap, n = 100, {RESAMPLES} resamples",
            lambda: deming_vectorised(x, y), lambda: deming_by_counts(x, y),
        )


if __name__ == "__main__":
    main()
