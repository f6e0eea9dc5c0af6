"""The resolution sweep: how many modules at which resolution, how steady, and which resolution to begin with."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from analysis.compute import Compute, InProcess
from analysis.errors import SettingError
from analysis.methods import Leiden
from analysis.methods.randomness import child_seeds
from analysis.network import FloatArray, IntArray, Network
from analysis.progress import Progress, portion, silent
from analysis.trust.chains import ChainTask, resolution_grid
from analysis.trust.envelope import Domain
from analysis.trust.matching import module_ranges, stability_over_sweep
from analysis.trust.noise import Noise
from analysis.trust.plateaus import Plateau, Suggestion, find_plateaus, is_undivided, share_in_modules, suggest
from analysis.trust.sweep_points import PartitionPool, SweepPoint, ami_matrix, bare_point, with_neighbours

if TYPE_CHECKING:
    import pandas as pd

__all__ = [
    "ChainTask",
    "Domain",
    "Plateau",
    "Suggestion",
    "Sweep",
    "SweepPoint",
    "SweepSettings",
    "module_ranges",
    "preview_points",
    "resolution_grid",
    "run_sweep",
    "stability_over_sweep",
    "sweep_tasks",
]

NEARLY_SINGLE = 0.1  # share of genes in modules of three or more, below which a partition says nothing
_RUNS, _NOISY_RUNS, _COPIES, _PREVIEW = 11, 12, 13, 14  # purposes of child seeds


@dataclass(frozen=True)
class SweepSettings:
    """What a sweep runs.

    Attributes
    ----------
    quality : str
        `modularity` (wide neighbourhoods) or `cpm` (tight groups).
    low, high : float or None
        Ends of the grid; None to choose them by the network (`resolution_grid`).
    steps, runs : int
        Resolutions; chains with different seeds.
    seed : int
        Seed of everything random.
    noise : float
        Share of edges left out in the noisy copies.
    noisy_runs : int
        Number of noisy copies, one chain each; 0 for none.
    """

    quality: str = "modularity"
    low: float | None = None
    high: float | None = None
    steps: int = 30
    runs: int = 5
    seed: int = 1
    noise: float = 0.1
    noisy_runs: int = 2

    def __post_init__(self) -> None:
        if self.quality not in {"modularity", "cpm"}:
            raise SettingError(f"quality {self.quality!r}; choose one of modularity, cpm")
        if self.runs < 1 or self.noisy_runs < 0:
            raise SettingError(
                f"a sweep of {self.runs} runs and {self.noisy_runs} noisy ones; it needs at least 1 and 0"
            )

    @property
    def against(self) -> str:
        """What the partitions are compared with, in words."""
        if self.noisy_runs and self.noise:
            return f"copies with {100 * self.noise:.3g} % of the edges left out"
        return "runs with other seeds"


@dataclass(frozen=True, eq=False)
class Sweep:
    """A finished sweep.

    Attributes
    ----------
    points : tuple of SweepPoint
        Ascending resolution.
    domains : tuple of Domain
        The partitions that are best somewhere, from the coarsest, with their ranges; partitions that never are do not
        stand here.
    plateaus : tuple of Plateau
        Best first.
    suggestion : Suggestion
    """

    settings: SweepSettings
    points: tuple[SweepPoint, ...]
    domains: tuple[Domain, ...]
    plateaus: tuple[Plateau, ...]
    suggestion: Suggestion

    @property
    def resolutions(self) -> FloatArray:
        """Resolutions, ascending, shape (points,)."""
        return np.array([point.resolution for point in self.points])

    def nearest(self, resolution: float) -> SweepPoint:
        """Return the point nearest to a resolution on the log scale."""
        return self.points[int(np.argmin(np.abs(np.log(self.resolutions / resolution))))]

    def table(self) -> pd.DataFrame:
        """Return one row a resolution, ascending; missing figures are NaN.

        `plateau` is the rank of the plateau that the point lies on, 0 for none.
        """
        import pandas as pd

        plateau = np.zeros(len(self.points), int)
        for rank, stretch in enumerate(self.plateaus, start=1):
            plateau[stretch.first : stretch.last + 1] = rank
        columns = {
            "resolution": "resolution",
            "modules": "modules",
            "modules_of_three_or_more": "modules_of_three",
            "fewest_modules": "low",
            "most_modules": "high",
            "modularity": "modularity",
            "quality": "quality",
            "seed_ami": "seed_ami",
            "noise_ami": "noise_ami",
            "neighbour_ami": "neighbour_ami",
            "best_from": "best_from",
            "best_to": "best_to",
        }
        table = pd.DataFrame(
            {column: [getattr(point, name) for point in self.points] for column, name in columns.items()}
        )
        table["plateau"] = plateau
        return table


@dataclass(frozen=True)
class PreviewTask:
    """Task: one cold run of two passes; returns labels, shape (nodes,)."""

    quality: str
    resolution: float
    seed: int

    def run(self, network: Network) -> IntArray:
        """Run it."""
        return Leiden(self.quality, self.resolution, 2).labels(network, seed=self.seed)


def preview_points(
    network: Network,
    quality: str,
    grid: FloatArray,
    *,
    seed: int = 1,
    compute: Compute | None = None,
    progress: Progress = silent,
) -> Iterator[SweepPoint]:
    """Yield points from the coarse end by cold runs of two passes, to be shown until the sweep replaces them.

    They say how many modules there are, not how steady they are: the figures of agreement are NaN.
    """
    seeds = child_seeds(seed, len(grid), purpose=_PREVIEW)
    tasks = [PreviewTask(quality, at, child) for at, child in zip(grid.tolist(), seeds, strict=True)]
    stream = (compute or InProcess()).stream(network, tasks, progress=progress, phrase="a first look at resolutions")
    for position, labels in stream:
        yield bare_point(network, quality, tasks[position].resolution, labels)


def sweep_tasks(network: Network, settings: SweepSettings) -> list[ChainTask]:
    """Return the sweep's chains: first those on the network, then those on noisy copies."""
    grid = resolution_grid(network, settings.quality, settings.steps, settings.low, settings.high)
    chain = ChainTask(settings.quality, tuple(grid.tolist()), 0)
    tasks = [replace(chain, seed=seed) for seed in child_seeds(settings.seed, settings.runs, purpose=_RUNS)]
    runs = child_seeds(settings.seed, settings.noisy_runs, purpose=_NOISY_RUNS)
    copies = child_seeds(settings.seed, settings.noisy_runs, purpose=_COPIES)
    if settings.noise:
        pairs = zip(runs, copies, strict=True)
        tasks += [replace(chain, seed=run, noise=Noise(settings.noise, copy)) for run, copy in pairs]
    return tasks


def run_sweep(
    network: Network,
    settings: SweepSettings,
    compute: Compute,
    progress: Progress = silent,
    on_point: Callable[[SweepPoint], None] | None = None,
) -> Sweep:
    """Sweep over resolutions: chains with several seeds and on noisy copies, pooled and compared.

    Parameters
    ----------
    on_point : callable, optional
        Receives points as they become known and again whenever a better partition is found for a resolution, then all
        of them with their figures of agreement; never fewer than all points in the end.

    Returns
    -------
    Sweep
        The same for the same network and settings, wherever the chains run.
    """
    tell = on_point or _ignore
    tasks = sweep_tasks(network, settings)
    pool = PartitionPool(network, settings.quality, settings.runs, np.array(tasks[0].resolutions))
    chains = compute.stream(network, tasks, progress=portion(progress, 0.0, 0.9), phrase="sweep over resolutions")
    for position, table in chains:
        for point in pool.add(position, table):
            tell(point)
    domains = pool.domains()
    points = pool.points(domains, portion(progress, 0.9, 1.0))
    ami = ami_matrix([point.labels for point in points])
    points = with_neighbours(points, ami)
    for point in points:
        tell(point)
    progress(1.0, "sweep over resolutions")
    return _assemble(network, settings, points, domains, ami)


def _assemble(
    network: Network,
    settings: SweepSettings,
    points: tuple[SweepPoint, ...],
    domains: tuple[Domain, ...],
    ami: FloatArray,
) -> Sweep:
    grid = np.array([point.resolution for point in points])
    agreement = np.array([_agreement(point) for point in points])
    in_modules = np.array([share_in_modules(point.labels) for point in points])
    undivided = np.array([is_undivided(network, point.labels) for point in points])
    plateaus = find_plateaus(points, ami, agreement, undivided | (in_modules < NEARLY_SINGLE))
    suggestion = suggest(
        plateaus, grid, agreement, in_modules=in_modules, undivided=undivided, against=settings.against
    )
    return Sweep(settings, points, domains, plateaus, suggestion)


def _agreement(point: SweepPoint) -> float:
    """Agreement under noise; without noisy copies that of seeds; 0 where neither is known."""
    known = [value for value in (point.noise_ami, point.seed_ami) if not np.isnan(value)]
    return known[0] if known else 0.0


def _ignore(_point: SweepPoint) -> None:
    """Tell nobody."""
