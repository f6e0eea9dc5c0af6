"""Compiled edge swaps. Importing this module loads numba: import it inside the function that needs it.

The set of edges is an open-addressing hash table of 64-bit keys with linear probing; a key is removed by moving later
keys back (Knuth 1998, The Art of Computer Programming, vol. 3, section 6.4, algorithm R), so no tombstones pile up.
Random numbers are splitmix64 (Steele, Lea & Flood 2014): a few lines, so that a seed gives the same network under
every version of the libraries.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit
from numpy.typing import NDArray

# All of them unsigned 64-bit: numba turns a mixture of signed and unsigned integers into floats.
EMPTY = np.uint64(0xFFFFFFFFFFFFFFFF)
ONE = np.uint64(1)
HALF = np.uint64(32)
LOW_HALF = np.uint64(0xFFFFFFFF)
SPREAD = np.uint64(0x9E3779B97F4A7C15)
MIX_1 = np.uint64(0xBF58476D1CE4E5B9)
MIX_2 = np.uint64(0x94D049BB133111EB)
SHIFT_1, SHIFT_2, SHIFT_3 = np.uint64(30), np.uint64(27), np.uint64(31)


@njit(cache=True)
def _draw(state: Any) -> Any:
    """Return the next 64 random bits; `state` is a uint64 array of one element."""
    state[0] += SPREAD
    mixed = state[0]
    mixed = (mixed ^ (mixed >> SHIFT_1)) * MIX_1
    mixed = (mixed ^ (mixed >> SHIFT_2)) * MIX_2
    return mixed ^ (mixed >> SHIFT_3)


@njit(cache=True)
def _key(one: Any, other: Any) -> Any:
    """Return the key of an edge, the same in both directions."""
    if one < other:
        return (np.uint64(one) << HALF) | np.uint64(other)
    return (np.uint64(other) << HALF) | np.uint64(one)


@njit(cache=True)
def _home(key: Any, mask: Any) -> Any:
    """Return the slot at which the search for a key begins."""
    mixed = key * SPREAD
    return (mixed ^ (mixed >> HALF)) & mask


@njit(cache=True)
def _holds(table: Any, mask: Any, key: Any) -> Any:
    slot = _home(key, mask)
    while table[slot] != EMPTY:
        if table[slot] == key:
            return True
        slot = (slot + ONE) & mask
    return False


@njit(cache=True)
def _insert(table: Any, mask: Any, key: Any) -> None:
    slot = _home(key, mask)
    while table[slot] != EMPTY:
        slot = (slot + ONE) & mask
    table[slot] = key


@njit(cache=True)
def _remove(table: Any, mask: Any, key: Any) -> None:
    """Remove a key that is there, and move back those that it had pushed on."""
    hole = _home(key, mask)
    while table[hole] != key:
        hole = (hole + ONE) & mask
    slot = (hole + ONE) & mask
    while table[slot] != EMPTY:
        wanted = _home(table[slot], mask)
        if ((slot - wanted) & mask) >= ((slot - hole) & mask):
            table[hole] = table[slot]
            hole = slot
        slot = (slot + ONE) & mask
    table[hole] = EMPTY


@njit(cache=True)
def swap_edges(
    sources: NDArray[np.int32], targets: NDArray[np.int32], chosen: NDArray[np.int64], trials: int, seed: np.uint64
) -> int:
    """Swap ends among chosen edges, in place; return the number of swaps made.

    Each trial draws two of the chosen edges and an orientation, ``(a, b), (c, d) → (a, d), (c, b)``, and leaves both
    as they are where that would make a self-loop or an edge that the network has. Trials that change nothing count:
    without that, networks with many possible swaps would be drawn too often (Fosdick, Larremore, Nishimura & Ugander
    2018).

    Parameters
    ----------
    sources, targets : int32 arrays, shape (edges,)
        A simple network; changed in place, and no longer in canonical order.
    chosen : int64 array
        Positions of the edges that take part.
    trials : int
        Number of trials.
    seed : uint64
        Start of the random numbers.
    """
    size = np.uint64(4)
    while size < np.uint64(2 * len(sources)):
        size = size << ONE
    mask = size - ONE
    table = np.full(size, EMPTY, np.uint64)
    for edge in range(len(sources)):
        _insert(table, mask, _key(sources[edge], targets[edge]))
    state = np.array([seed], np.uint64)
    count = np.uint64(len(chosen))
    made = 0
    for _ in range(trials):
        bits = _draw(state)
        first = chosen[((bits >> HALF) * count) >> HALF]
        second = chosen[((bits & LOW_HALF) * count) >> HALF]
        a, b = sources[first], targets[first]
        c, d = sources[second], targets[second]
        if _draw(state) & ONE:
            c, d = d, c
        if a == d or b == c:
            continue
        new_first, new_second = _key(a, d), _key(c, b)
        if new_first == new_second or _holds(table, mask, new_first) or _holds(table, mask, new_second):
            continue
        _remove(table, mask, _key(a, b))
        _remove(table, mask, _key(c, d))
        _insert(table, mask, new_first)
        _insert(table, mask, new_second)
        sources[first], targets[first] = a, d
        sources[second], targets[second] = c, b
        made += 1
    return made
