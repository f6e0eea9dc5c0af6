"""The planted structure of the invented saltmarsh moss.

How it is drawn, in this order:

1. Every protein has a *propensity*, drawn from a Pareto law that is cut at its upper end. It scales how many
   partners the protein has wherever it can have any.
2. Most proteins belong to one of 32 *groups* of unequal size; four groups in a row form a *programme*. Most of a
   group is divided into *complexes* of 4 to 60 proteins; some proteins then join a second or third complex, in their
   own group or in another one.
3. A few proteins are *bridges*: they reach into complexes of one to three other groups.
4. A *region without modules* has no groups: inside it the propensities alone decide who meets whom.
5. A few *small components* touch nothing else.

`moss_interactions.py` says how interactions follow from this plan.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]

PROTEINS = 1600
GROUPS = 32
PROGRAMME = 4
GROUP_SIZES = (16, 95)
COMPLEX_SIZES = (4, 60)
COMPLEX_TAIL = 1.25
REGION_SIZE = 160
SMALL_COMPONENTS = (7, 5, 4, 3, 3, 2, 2)
SHARED = 130
BRIDGES = 40
PROPENSITY_TAIL = 1.15
PROPENSITY_RATIO = 80.0


@dataclass(frozen=True)
class Complex:
    """Proteins that are planted to work as one unit; `home` is the group it was made in."""

    home: int
    members: Ints


@dataclass(frozen=True)
class Plan:
    """What is planted: all of it known, none of it in the files.

    Attributes
    ----------
    propensity : float array, shape (PROTEINS,)
        Mean one.
    group_of : int array, shape (PROTEINS,)
        Group of each protein, -1 for the region and the small components.
    complexes : tuple of Complex
        All complexes, those of the first group first.
    bridges : dict of int to tuple of int
        Bridge protein to the complexes (positions in `complexes`) it reaches into.
    region : int array
        Proteins of the region without modules.
    small : tuple of int array
        Proteins of each small component.
    """

    propensity: Floats
    group_of: Ints
    complexes: tuple[Complex, ...]
    bridges: dict[int, tuple[int, ...]]
    region: Ints
    small: tuple[Ints, ...]

    def group(self, number: int) -> Ints:
        """Return the proteins of one group."""
        return np.flatnonzero(self.group_of == number)


def draw(rng: np.random.Generator, pool: Ints, count: int, weight: Floats | None = None) -> Ints:
    """Draw without replacement, with weights where given (Efraimidis & Spirakis 2006).

    Only `Generator.random` is used, the stream that NumPy is least likely to change.
    """
    keys = rng.random(len(pool))
    if weight is not None:
        keys = keys ** (1.0 / weight)
    return np.asarray(pool[np.argsort(-keys, kind="stable")[:count]])


def pareto(rng: np.random.Generator, count: int, tail: float, ratio: float) -> Floats:
    """Draw from a Pareto law of density `x^-(1 + tail)` between 1 and `ratio`."""
    below = 1.0 - 1.0 / ratio**tail
    return np.asarray((1.0 - below * rng.random(count)) ** (-1.0 / tail))


def split_total(share: Floats, total: int, low: int, high: int) -> Ints:
    """Round shares to whole sizes within bounds that add up to the total."""
    sizes: Ints = np.clip(np.rint(share * total / share.sum()), low, high).astype(np.int64)
    step = 1 if sizes.sum() < total else -1
    position = 0
    while sizes.sum() != total:
        if low <= sizes[position] + step <= high:
            sizes[position] += step
        position = (position + 1) % len(sizes)
    return sizes


def complex_sizes(rng: np.random.Generator, room: int) -> list[int]:
    """Draw sizes of complexes until the room in a group is used up."""
    low, high = COMPLEX_SIZES
    sizes: list[int] = []
    while room >= low:
        wanted = low * float(pareto(rng, 1, COMPLEX_TAIL, high / low)[0])
        sizes.append(min(int(wanted), room))
        room -= sizes[-1]
    return sizes


def plan_complexes(rng: np.random.Generator, group_of: Ints) -> list[list[int]]:
    """Divide about nine tenths of each group into complexes, apart from one another so far.

    Returns one list a complex: its group, then its proteins.
    """
    found = []
    for home in range(GROUPS):
        members = draw(rng, np.flatnonzero(group_of == home), PROTEINS)
        start = 0
        for size in complex_sizes(rng, int(0.92 * len(members))):
            found.append([home, *members[start : start + size].tolist()])
            start += size
    return found


def share_proteins(rng: np.random.Generator, complexes: list[list[int]], group_of: Ints) -> None:
    """Put some proteins into a second complex, and every sixth of them into a third.

    Seven in ten of these go to a complex of their own group, where there is another one.
    """
    home = np.array([entry[0] for entry in complexes])
    seated = np.unique([protein for entry in complexes for protein in entry[1:]])
    for turn, protein in enumerate(draw(rng, seated, SHARED).tolist()):
        free = np.array([protein not in entry[1:] and len(entry) <= COMPLEX_SIZES[1] for entry in complexes])
        near = np.flatnonzero(free & (home == group_of[protein]))
        for _ in range(2 if turn % 6 == 0 else 1):
            stays = rng.random() < 0.7 and len(near) > 0
            chosen = int(draw(rng, near if stays else np.flatnonzero(free), 1)[0])
            near = near[near != chosen]
            free[chosen] = False
            complexes[chosen].append(protein)


def plan_bridges(
    rng: np.random.Generator, complexes: list[list[int]], group_of: Ints, propensity: Floats
) -> dict[int, tuple[int, ...]]:
    """Choose the bridges, well connected ones more often, and the complexes they reach into."""
    home = np.array([entry[0] for entry in complexes])
    grouped = np.flatnonzero(group_of >= 0)
    bridges = {}
    for protein in draw(rng, grouped, BRIDGES, np.sqrt(propensity[grouped])).tolist():
        abroad = np.flatnonzero(home != group_of[protein])
        bridges[protein] = tuple(draw(rng, abroad, 1 + int(3 * rng.random())).tolist())
    return bridges


def make_plan(rng: np.random.Generator) -> Plan:
    """Draw propensities, groups, complexes, shared proteins and bridges."""
    grouped = PROTEINS - REGION_SIZE - sum(SMALL_COMPONENTS)
    share = np.exp(0.5 * rng.standard_normal(GROUPS))
    group_of = np.full(PROTEINS, -1, np.int64)
    group_of[:grouped] = np.repeat(np.arange(GROUPS), split_total(share, grouped, *GROUP_SIZES))
    propensity = pareto(rng, PROTEINS, PROPENSITY_TAIL, PROPENSITY_RATIO)
    propensity /= propensity.mean()
    complexes = plan_complexes(rng, group_of)
    share_proteins(rng, complexes, group_of)
    bridges = plan_bridges(rng, complexes, group_of, propensity)
    borders = grouped + REGION_SIZE + np.cumsum((0, *SMALL_COMPONENTS))
    return Plan(
        propensity,
        group_of,
        tuple(Complex(entry[0], np.array(sorted(entry[1:]))) for entry in complexes),
        bridges,
        np.arange(grouped, grouped + REGION_SIZE),
        tuple(np.arange(*ends) for ends in pairwise(borders.tolist())),
    )
