"""The shifted median of the pair slopes for many resamples at once, without refitting.

In a resample with counts c, a pair (i, j) stands c_i * c_j times among the slopes, so the line's slope is a weighted
median of slopes that were sorted once. The weighted number of slopes before a position is a quadratic form in the
counts: one matrix product gives it for many resamples. Each resample's median is predicted by one Newton step
from the full sample's, and resamples sorted by prediction are solved in groups: one more product up to the
lower edge of the group's bracket, and a short cumulative sum inside it. All sums are whole numbers held exactly, so
that the result is that of refitting, to the last bit, whatever the grouping.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from labstat.comparison.pair_slopes import PairSlopes
from labstat.comparison.results import Array
from labstat.resample.counts import Counts

Index = npt.NDArray[np.int64]

_GROUP = 128
_EXACT_FLOAT32 = 2**24
_BRACKET_CELLS = 4_000_000


class ShiftedMedian:
    """Slope of each resample; NaN where the middle slopes are not positive and finite."""

    __slots__ = ("_full", "pairs")

    def __init__(self, pairs: PairSlopes) -> None:
        self.pairs = pairs
        self._full = self._adjacency(0, pairs.slopes.size, np.float32)

    def __call__(self, counts: Counts) -> Array:
        """Slopes of the rows of counts (rows, n)."""
        most = int(counts.sum(axis=1, dtype=np.int64).max(initial=0))
        # no sum exceeds half the square of a row's total: short floats hold it exactly up to here
        exact: type[np.float32] | type[np.float64] = np.float32 if most**2 < 2 * _EXACT_FLOAT32 else np.float64
        weights: npt.NDArray[np.floating] = np.ascontiguousarray(counts, dtype=exact)
        total = self._before(self._full.astype(weights.dtype, copy=False), weights)
        low_rank = (total + 1) // 2
        high_rank = total // 2 + 1
        low, high = self._positions(weights, total, low_rank, high_rank)
        return self._slopes(total, low, high)

    def _slopes(self, total: Index, low: Index, high: Index) -> Array:
        result = np.full(total.shape, np.nan)
        ok = (total > 0) & (high < self.pairs.wrapped)
        a, b = self.pairs.slopes[low[ok]], self.pairs.slopes[high[ok]]
        positive = (a > 0.0) & (b > 0.0)
        with np.errstate(invalid="ignore"):
            middle = np.where(a == b, a, np.sqrt(a * b))
        result[ok] = np.where(positive, middle, np.nan)
        return result

    def _adjacency(self, start: int, stop: int, dtype: npt.DTypeLike) -> npt.NDArray[np.floating]:
        matrix: npt.NDArray[np.floating] = np.zeros((self.pairs.n, self.pairs.n), dtype=dtype)
        self._add(matrix, start, stop)
        return matrix

    def _add(self, matrix: npt.NDArray[np.floating], start: int, stop: int) -> None:
        # each pair once, above the diagonal: the quadratic form is then the weighted number itself
        matrix[self.pairs.first[start:stop], self.pairs.second[start:stop]] = 1.0

    def _before(self, adjacency: npt.NDArray[np.floating], weights: npt.NDArray[np.floating]) -> Index:
        number: Index = np.rint(np.einsum("ij,ij->i", weights @ adjacency, weights)).astype(np.int64)
        return number

    def _positions(
        self, weights: npt.NDArray[np.floating], total: Index, low_rank: Index, high_rank: Index
    ) -> tuple[Index, Index]:
        """Index of the first slope at which the cumulated weight reaches each of the two ranks."""
        size = self.pairs.slopes.size
        rows = weights.shape[0]
        low, high = np.zeros(rows, dtype=np.int64), np.zeros(rows, dtype=np.int64)
        todo = np.flatnonzero(total > 0)
        if todo.size == 0:
            return low, high
        middle = size // 2
        cut = self._before(self._adjacency(0, middle, weights.dtype), weights)
        density = np.maximum(total, 1) / size
        guess = np.clip(middle + (low_rank - cut) / density, 0, size - 1).astype(np.int64)
        reach = max(16, size // 100)
        while todo.size:
            todo = todo[np.argsort(guess[todo], kind="stable")]
            todo = self._solve(weights, low_rank, high_rank, guess, todo, reach, low, high)
            reach *= 8
        return low, high

    def _solve(
        self, weights: npt.NDArray[np.floating], low_rank: Index, high_rank: Index,
        guess: Index, todo: Index, reach: int, low: Index, high: Index,
    ) -> Index:
        """Solve what lies within ``reach`` of its guess; returns the rows that do not."""
        size = self.pairs.slopes.size
        adjacency = self._adjacency(0, 0, weights.dtype)
        done_to = 0
        missed: list[Index] = []
        start = 0
        while start < todo.size:
            group = todo[start : start + _GROUP]
            begin = max(0, int(guess[group[0]]) - reach)
            end = min(size, int(guess[group[-1]]) + reach + 1)
            while group.size > 1 and (end - begin) * group.size > _BRACKET_CELLS:
                group = group[: -(-group.size // 2)]
                end = min(size, int(guess[group[-1]]) + reach + 1)
            start += group.size
            if begin > done_to:
                self._add(adjacency, done_to, begin)
                done_to = begin
            some = weights[group]
            base = self._before(adjacency, some)
            columns = np.ascontiguousarray(some.T)
            inside = columns[self.pairs.first[begin:end]] * columns[self.pairs.second[begin:end]]
            cumulated = np.cumsum(inside, axis=0, out=inside)
            before_low, before_high = low_rank[group] - base, high_rank[group] - base
            at_low = np.count_nonzero(cumulated < before_low.astype(weights.dtype), axis=0)
            at_high = at_low.copy()
            even = before_high > before_low
            if np.any(even):
                at_high[even] = np.count_nonzero(
                    cumulated[:, even] < before_high[even].astype(weights.dtype), axis=0
                )
            found = (before_low > 0) & (at_high < end - begin)
            low[group[found]] = begin + at_low[found]
            high[group[found]] = begin + at_high[found]
            lost = ~found
            if np.any(lost):
                missed.append(group[lost])
        return np.concatenate(missed) if missed else todo[:0]
