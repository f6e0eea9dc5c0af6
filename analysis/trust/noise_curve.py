"""How a partition drifts away as the network is perturbed, beside networks of pure chance.

A partition that rests on many edges survives the loss of a few; one that chance made, or that hangs on a thread, does
not. The same curve on null networks says how much of the drift any network of these degrees would show.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from analysis.agreement import adjusted_mutual_information, variation_of_information
from analysis.compute import Compute
from analysis.errors import SettingError
from analysis.methods import Method
from analysis.methods.randomness import child_seeds
from analysis.network import FloatArray, IntArray, Network, locked
from analysis.progress import Progress, silent
from analysis.trust.chance import bounded
from analysis.trust.noise import REWIRED, Noise
from analysis.trust.nulls import rewire

SHARES = (0.02, 0.05, 0.1, 0.15, 0.2, 0.3, 0.4)
COPIES = 5
PURPOSE = 6
PASSES = 2
SPOKEN_SHARE = 0.1
CLEARLY = 2.0


@dataclass(frozen=True, slots=True)
class CurveRun:
    """Task: one run on a perturbed copy of the network, or of a null network; returns labels, shape (nodes,).

    Attributes
    ----------
    null_seed : int or None
        Seed of the null network to begin with; None for the network itself.
    share : float
        Share of edges perturbed; 0 for the reference.
    kind : str
        `analysis.trust.noise.REWIRED` or `LEFT_OUT`.
    """

    method: Method
    null_seed: int | None
    share: float
    kind: str
    seed: int

    def run(self, network: Network) -> IntArray:
        """Make the copy and run the method on it."""
        noise_seed, run_seed = child_seeds(self.seed, 2)
        base = network if self.null_seed is None else rewire(network, self.null_seed)
        copy = Noise(self.share, noise_seed, self.kind).apply(base)
        return self.method.find(copy, seed=run_seed).full_labels


@dataclass(frozen=True, eq=False)
class NoiseCurve:
    """Distance from the unperturbed partition against the share of edges perturbed; NaN where not computed yet.

    Attributes
    ----------
    kind : str
        How edges are perturbed: `rewired` (degrees kept) or `left out`.
    shares : float64 array, shape (points,)
        Ascending shares of edges.
    vi, ami : float64 arrays, shape (points, copies)
        Of each copy with the reference: variation of information over ``ln n`` (0 the same, 1 the furthest apart that
        two partitions can be; Karrer, Levina & Newman 2008), and adjusted mutual information (1 the same).
    null_vi, null_ami : float64 arrays, shape (points, copies)
        The same on null networks, another one in each column.
    """

    kind: str
    shares: FloatArray
    vi: FloatArray
    ami: FloatArray
    null_vi: FloatArray
    null_ami: FloatArray

    @property
    def complete(self) -> bool:
        """Whether every point has come."""
        return not any(np.isnan(table).any() for table in (self.vi, self.null_vi))

    @property
    def z(self) -> FloatArray:
        """How far apart the two curves are at each share, shape (points,).

        Mean VI on null networks less mean VI on the network, over the standard error of the difference (Welch); 0 where
        nothing varies and nothing differs.
        """
        difference = self.null_vi.mean(axis=1) - self.vi.mean(axis=1)
        copies = self.vi.shape[1]
        error = np.sqrt((self.vi.var(axis=1, ddof=1) + self.null_vi.var(axis=1, ddof=1)) / copies)
        with np.errstate(divide="ignore", invalid="ignore"):
            ratio: FloatArray = np.where(difference == 0, 0.0, difference / error)
        return ratio

    def sentence(self) -> str:
        """Say what the curve shows, at the share nearest to one edge in ten."""
        point = int(np.argmin(np.abs(self.shares - SPOKEN_SHARE)))
        share = f"{self.shares[point]:.0%}".replace("%", " %")
        own, null = float(self.ami[point].mean()), float(self.null_ami[point].mean())
        figures = f"AMI {own:.2f}, on random networks with the same degrees {null:.2f}"
        start = f"With {share} of the edges {self.kind}"
        if not self.complete:
            return f"{start}: not all copies have been computed yet."
        if own <= null or self.z[point] < CLEARLY:
            return (
                f"{start}, the modules drift as far as those of a random network do ({figures}): they are not robust."
            )
        return f"{start}, the modules stay nearer to where they were than those of a random network do ({figures})."


def ignore(_curve: NoiseCurve) -> None:
    """Take no notice of the curve so far."""


def noise_curve(
    network: Network,
    method: Method,
    *,
    seed: int,
    compute: Compute,
    shares: Sequence[float] = SHARES,
    copies: int = COPIES,
    kind: str = REWIRED,
    progress: Progress = silent,
    on_point: Callable[[NoiseCurve], None] = ignore,
) -> NoiseCurve:
    """Compute the noise curve of a network and of null networks (Karrer, Levina & Newman 2008).

    Each curve starts from the partition of one run on the unperturbed network, the null networks' as well as the
    network's own: were the network's the best of many runs, it would look steadier for no reason but the choice. For a
    cover the partition is by each gene's largest module; genes in no module stand alone.

    Parameters
    ----------
    method : Method
        The method whose modules are in question, with the same settings. Leiden until stable is held to two passes on
        large networks, in every run (`analysis.trust.chance.bounded`).
    seed : int
        Seed; a copy does not depend on how many shares or copies there are.
    shares : sequence of float
        Ascending shares of edges to perturb, above 0 and below 1.
    copies : int
        Perturbed copies at each share, and as many null networks with one each; 2 or more.
    kind : str
        `analysis.trust.noise.REWIRED` or `LEFT_OUT`.
    on_point : callable
        Is given the curve so far whenever a point has come.

    Raises
    ------
    SettingError
        Where a share, the kind, or the number of copies is out of range.
    """
    if not shares or list(shares) != sorted(set(shares)) or not shares[0] > 0:
        raise SettingError("the noise curve needs shares of edges in ascending order, above 0")
    if copies < 2:
        raise SettingError(f"the noise curve needs 2 copies or more at each share, not {copies}")
    for share in shares:
        Noise(share, 0, kind)  # refuses what cannot be done before any work begins
    cells, tasks = _plan(bounded(method, network, PASSES), tuple(shares), copies, kind, seed)
    curve = _Growing(kind, shares, copies)
    stream = compute.stream(network, tasks, progress=progress, phrase=f"copies with a share of the edges {kind}")
    for position, labels in stream:
        if curve.add(cells[position], labels):
            on_point(curve.so_far())
    return curve.so_far()


@dataclass(frozen=True, slots=True)
class _Cell:
    """Where a run belongs: on the network (row 0) or nulls (row 1), which share (−1 for a reference), which copy."""

    row: int
    point: int
    copy: int

    @property
    def reference(self) -> tuple[int, int]:
        """The network has one reference, each null network its own."""
        return (self.row, self.copy if self.row else 0)


def _plan(
    method: Method, shares: Sequence[float], copies: int, kind: str, seed: int
) -> tuple[list[_Cell], list[CurveRun]]:
    """Lay out the runs: references first, then a first copy at every share, so that the whole curve shows early."""
    nulls = child_seeds(seed, copies, purpose=PURPOSE)
    cells = [_Cell(0, -1, 0), *(_Cell(1, -1, copy) for copy in range(copies))]
    cells += [_Cell(row, point, copy) for copy in range(copies) for point in range(len(shares)) for row in (0, 1)]
    tasks = []
    for cell in cells:
        share = 0.0 if cell.point < 0 else shares[cell.point]
        place = [seed, cell.row, cell.copy, round(share * 1e9)]
        own = int(np.random.SeedSequence(place).generate_state(1)[0])
        tasks.append(CurveRun(method, nulls[cell.copy] if cell.row else None, share, kind, own))
    return cells, tasks


class _Growing:
    """A curve to which runs are added in any order; a run waits until its reference is there."""

    def __init__(self, kind: str, shares: Sequence[float], copies: int) -> None:
        self._kind = kind
        self._shares = np.array(shares, np.float64)
        self._vi = np.full((2, len(shares), copies), np.nan)
        self._ami = np.full((2, len(shares), copies), np.nan)
        self._references: dict[tuple[int, int], IntArray] = {}
        self._waiting: dict[tuple[int, int], list[tuple[_Cell, IntArray]]] = {}

    def add(self, cell: _Cell, labels: IntArray) -> bool:
        """Take a run; return whether a point has come of it."""
        if cell.point < 0:
            self._references[cell.reference] = labels
            ready = self._waiting.pop(cell.reference, [])
        elif cell.reference in self._references:
            ready = [(cell, labels)]
        else:
            self._waiting.setdefault(cell.reference, []).append((cell, labels))
            ready = []
        for each, found in ready:
            self._compare(each, found)
        return bool(ready)

    def so_far(self) -> NoiseCurve:
        """Return the curve with what has come."""
        own, null = ((locked(self._vi[row].copy()), locked(self._ami[row].copy())) for row in (0, 1))
        return NoiseCurve(self._kind, locked(self._shares), *own, *null)

    def _compare(self, cell: _Cell, labels: IntArray) -> None:
        reference = self._references[cell.reference]
        place = (cell.row, cell.point, cell.copy)
        furthest = np.log(len(labels)) if len(labels) > 1 else 1.0
        self._vi[place] = variation_of_information(reference, labels) / furthest
        self._ami[place] = adjusted_mutual_information(reference, labels)
