"""The one bridge from integer seeds to igraph's random numbers."""

from __future__ import annotations

import random
import threading
from collections.abc import Iterator
from contextlib import contextmanager

import numpy as np

_LOCK = threading.RLock()


@contextmanager
def igraph_seed(seed: int) -> Iterator[None]:
    """Let igraph draw from a generator of its own, seeded with `seed`, and from Python's again afterwards.

    igraph holds one generator per process, hence the lock.
    """
    import igraph

    with _LOCK:
        igraph.set_random_number_generator(random.Random(seed))
        try:
            yield
        finally:
            igraph.set_random_number_generator(random)


def child_seeds(seed: int, count: int, *, purpose: int = 0) -> list[int]:
    """Spawn `count` independent seeds from one; the first ones do not depend on how many are asked for.

    Parameters
    ----------
    purpose : int
        Keeps the streams of different uses of one seed apart.
    """
    children = np.random.SeedSequence([seed, purpose]).spawn(count)
    return [int(child.generate_state(1, np.uint32)[0]) for child in children]
