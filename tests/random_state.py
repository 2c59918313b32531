"""The state of numpy's global generator, comparable."""

from __future__ import annotations

import numpy as np


def global_state() -> tuple[object, ...]:
    """Changes with every draw from, and every seeding of, numpy's global generator."""
    name, keys, position, has_gauss, gauss = np.random.get_state()
    return name, keys.tobytes(), position, has_gauss, gauss
