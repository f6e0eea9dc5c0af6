"""What a harvest is asked for, and what it gives."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from analysis.errors import SettingError
from analysis.modules import Modules
from analysis.network import FloatArray, IntArray
from analysis.trust.support import ModuleSupport

if TYPE_CHECKING:
    import pandas as pd

NULL_COPIES = 5


@dataclass(frozen=True)
class HarvestSettings:
    """How much a harvest runs, and whether it ends where chance begins.

    Attributes
    ----------
    steps : int
        Resolutions of the constant Potts model from 0.01 to 0.9, weights in units of their 95 % quantile.
    seeds : int
        Chains on the network, whose modules are pooled.
    copies : int
        Noisy copies on which stability is measured, with 20 % of the edges left out or rewired.
    nulls : int
        Degree-preserving null networks, harvested likewise (one seed, five copies); 0 for none, and then no cut.
    cut : bool
        Keep the well supported modules alone; otherwise all that hold.
    level : float
        The cut stands where null networks would yield this share of the network's modules.
    seed : int
        Seed of everything random.
    """

    steps: int = 12
    seeds: int = 1
    copies: int = 5
    nulls: int = 3
    cut: bool = True
    level: float = 0.1
    seed: int = 1

    def __post_init__(self) -> None:
        if self.seeds < 1 or self.nulls < 0:
            raise SettingError(f"a harvest with {self.seeds} seeds and {self.nulls} nulls; it needs at least 1 and 0")
        if self.cut and not self.nulls:
            raise SettingError("the cut of a harvest comes from null networks; ask for one or more, or for no cut")
        if not 0 < self.level < 1:
            raise SettingError(f"the level of the cut is {self.level}; it must lie between 0 and 1")

    @property
    def runs(self) -> int:
        """Number of Leiden runs."""
        return self.steps * (self.seeds + self.copies + self.nulls * (1 + NULL_COPIES))


QUICK = HarvestSettings()
FULL = HarvestSettings(steps=24, seeds=3, copies=10)


@dataclass(frozen=True, eq=False)
class Harvest:
    """What was harvested; arrays have the shape (modules,) and the order of `modules`, the largest first.

    Attributes
    ----------
    modules : Modules
        A cover: modules may share up to a quarter of their genes, and genes added at the end may be in several.
    cores : tuple of int32 arrays
        Members of each module as the sweep found it, before genes were added. The figures below are theirs.
    figures : ModuleSupport
        Stability, evidence, support, and the range of resolution over which each holds on noisy copies.
    resolution : float64 array
        Where in the sweep each was found (geometric mean, if more than once).
    rank : int64 array
        1 for the module taken first: the order is that of ``support · size^0.1``.
    chance_share : float64 array
        Nominal share of chance modules among those down to this rank; NaN without null networks. Optimistic.
    pooled : int
        Distinct modules of the sweep from which these were taken.
    held : int
        Modules before the cut.
    """

    settings: HarvestSettings
    modules: Modules
    cores: tuple[IntArray, ...]
    figures: ModuleSupport
    resolution: FloatArray
    rank: NDArray[np.int64]
    chance_share: FloatArray
    pooled: int
    held: int

    @property
    def left_out(self) -> int:
        """Number of genes in no harvested module."""
        return self.modules.left_out

    @property
    def level_sentence(self) -> str:
        """Say how many of these modules are expected to be chance modules, or that nobody knows."""
        if not len(self.modules):
            return self._empty_sentence()
        if not self.settings.nulls:
            return "No null networks were harvested, so it is not known how many of these modules chance would yield."
        if self.settings.cut and self.settings.level == 0.1:
            return (
                "About one in six modules harvested like this is expected to be a chance module: the cut stands where "
                "random networks with the same degrees yield a tenth as many, and on networks with known modules 17 "
                "in 100 were wrong there."
            )
        asked = f"{100 * self.settings.level:.3g} for every 100"
        if self.settings.cut:
            return (
                f"The cut stands where random networks with the same degrees yield {asked} modules; the true share of "
                "chance modules is likely higher (17 in 100 where 10 were asked for, on networks with known modules)."
            )
        within = int((self.chance_share <= self.settings.level).sum())
        return (
            f"All {self.held:,} modules that hold are kept. Down to number {within:,} random networks with the same "
            f"degrees yield at most {asked}; the others may well be chance modules."
        )

    def _empty_sentence(self) -> str:
        if self.held:
            return (
                f"None of the {self.held:,} modules that hold has more support than modules of random networks with "
                "the same degrees."
            )
        return "No module of three genes or more is denser than its genes' degrees would give by chance."

    def table(self) -> pd.DataFrame:
        """Return one row a module, the best supported first."""
        import pandas as pd

        table = pd.DataFrame(
            {
                "rank": self.rank,
                "module": self.modules.numbers,
                "size": self.modules.sizes,
                "added": self.modules.sizes - np.array([len(core) for core in self.cores], np.int64),
                "resolution": self.resolution,
                "resolution_from": self.figures.resolution_from,
                "resolution_to": self.figures.resolution_to,
                "stability": self.figures.stability,
                "evidence": self.figures.evidence,
                "support": self.figures.support,
                "chance_share": self.chance_share,
            }
        )
        return table.sort_values("rank", ignore_index=True)
