"""Streams of random numbers that depend on a seed and on words, never on the order of work."""

from __future__ import annotations

import hashlib
import json
import secrets

import numpy as np


def derived_seed(seed: int, *words: str | int) -> int:
    """A 63-bit seed from a seed and words, the same on every machine.

    Words are hashed (SHA-256 of their JSON), so that the seed of one part never depends on how many other parts
    there are or in which order they are computed.
    """
    text = json.dumps([seed, *words], ensure_ascii=True, separators=(",", ":"))
    return int.from_bytes(hashlib.sha256(text.encode("ascii")).digest()[:8], "big") >> 1


def generator(seed: int, *words: str | int) -> np.random.Generator:
    """A generator of its own for a seed and words (PCG64DXSM, seeded through SHA-256)."""
    return np.random.Generator(np.random.PCG64DXSM(derived_seed(seed, *words)))


def fresh_seed() -> int:
    """A seed from the operating system, to be recorded with the result."""
    return secrets.randbits(63)
