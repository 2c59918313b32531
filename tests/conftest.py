"""What holds for every test: no global random state, and the same examples on every run."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

# The second implementations in tests/slow are imported as ``slow.…`` whatever the import mode of pytest.
HERE = str(Path(__file__).resolve().parent)
if HERE not in sys.path:
    sys.path.insert(0, HERE)

from random_state import global_state  # noqa: E402

settings.register_profile(
    "labstat",
    derandomize=True,
    database=None,
    deadline=None,
    max_examples=30,
    suppress_health_check=[HealthCheck.too_slow],
)
settings.load_profile("labstat")


@pytest.fixture(autouse=True)
def global_random_state_untouched() -> Iterator[None]:
    """Fail a test that reads from, or seeds, numpy's global random state: results must not depend on it."""
    before = global_state()
    yield
    if global_state() != before:
        pytest.fail("the test touched numpy's global random state")
