"""Named streams of random numbers, so that no figure depends on what else is in the campaign."""

from __future__ import annotations

import hashlib

import numpy as np


def named_stream(seed: int, name: str) -> np.random.Generator:
    """Generator that depends on `seed` and `name` alone.

    Parameters
    ----------
    seed : int
        The campaign's seed, 0 or above.
    name : str
        What is drawn, such as ``"median R212Q"``: another order of rows, another construct beside this
        one or another number of workers leaves its draws as they are.
    """
    words = np.frombuffer(hashlib.sha256(name.encode("utf-8", "surrogatepass")).digest(), dtype="<u4")
    return np.random.Generator(np.random.PCG64(np.random.SeedSequence([seed, *map(int, words)])))
