"""Resamples as counts: how often each unit was drawn.

A resample of n units is a vector of n counts. Matrices of counts have one row a resample. Rows are drawn in chunks
of fixed size with a stream each, and second-level rows with a stream for each first-level row: what is drawn depends
neither on the size of the blocks in which it is consumed nor on who consumes it.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
import numpy.typing as npt

from labstat.resample.seeds import generator

Counts = npt.NDArray[np.integer[Any]]

_CHUNK = 256


def counts_dtype(units: int) -> type[np.uint16] | type[np.uint32]:
    """The smallest type that holds any count: a row can hold one unit ``units`` times."""
    return np.uint16 if units < 2**16 else np.uint32


def tally(drawn: npt.NDArray[Any], units: int) -> Counts:
    """Counts of each unit in each row of indices; shape (rows, draws) to (rows, units)."""
    rows = drawn.shape[0]
    offsets = (np.arange(rows, dtype=np.int64) * units)[:, None]
    flat = np.bincount((drawn + offsets).ravel(), minlength=rows * units)
    return flat.reshape(rows, units).astype(counts_dtype(units))


def first_level(units: int, resamples: int, *, seed: int, block: int = 4096) -> Iterator[Counts]:
    """Multinomial counts of ``resamples`` bootstrap draws, in blocks of about ``block`` rows, in order."""
    held: list[Counts] = []
    rows = 0
    for chunk in range(-(-resamples // _CHUNK)):
        size = min(_CHUNK, resamples - chunk * _CHUNK)
        # a whole chunk is drawn always, so that the first rows do not depend on how many are asked for
        drawn = generator(seed, "first", chunk).integers(0, units, size=(_CHUNK, units), dtype=np.uint32)
        held.append(tally(drawn[:size], units))
        rows += size
        if rows >= block:
            yield np.concatenate(held)
            held, rows = [], 0
    if held:
        yield np.concatenate(held)


def second_level(
    first: Counts, start: int, resamples: int, *, seed: int
) -> Counts:
    """Second-level counts of each row of ``first``: shape (rows * resamples, units), row by row.

    ``start`` is the number of the first row among all first-level rows: each has a stream of its own.
    """
    rows, units = first.shape
    result = np.empty((rows * resamples, units), dtype=counts_dtype(units))
    for row in range(rows):
        members = np.repeat(np.arange(units, dtype=np.int64), first[row])
        stream = generator(seed, "second", start + row)
        drawn = stream.integers(0, units, size=(resamples, units), dtype=np.uint32)
        result[row * resamples : (row + 1) * resamples] = tally(members[drawn], units)
    return result


def leave_one_out(units: int) -> Counts:
    """Counts of the delete-one jackknife: ones with one zero a row."""
    counts = np.ones((units, units), dtype=counts_dtype(units))
    np.fill_diagonal(counts, 0)
    return counts
