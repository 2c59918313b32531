"""Reading sorted values at a rank or a tail area."""

from __future__ import annotations

from labstat.resample.engine import Array


def at_rank(ordered: Array, rank: float) -> float:
    """Value at a rank counted from 1, linear between ranks, held at the ends."""
    position = min(max(rank, 1.0), float(ordered.size)) - 1.0
    below = int(position)
    part = position - below
    if part == 0.0:
        return float(ordered[below])
    return float(ordered[below] + part * (ordered[below + 1] - ordered[below]))


def at_tail(ordered: Array, area: float) -> float:
    """Bound at tail area ``area``: rank ``area * (B + 1)`` of B sorted values."""
    return at_rank(ordered, area * (ordered.size + 1))
