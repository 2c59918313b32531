"""The guard against global random state has teeth."""

from __future__ import annotations

import numpy as np
from random_state import global_state


def test_the_guard_sees_one_draw_from_the_global_random_state() -> None:
    """One number drawn from numpy's global generator changes the state that every test is checked for."""
    before = np.random.get_state()
    seen = global_state()
    np.random.random()
    changed = global_state() != seen
    np.random.set_state(before)
    assert changed
