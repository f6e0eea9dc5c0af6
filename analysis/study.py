"""A study: one clustering of one network with all its evidence, from settings that repeat it.

The command line, the dashboard and `corymb rerun` all come through `run_study`, so that they cannot differ.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass, field, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from analysis.errors import SettingError
from analysis.modules import Modules
from analysis.network import FloatArray, Network

if TYPE_CHECKING:
    import pandas as pd

SUGGEST = "suggest"
MEMBERSHIP_COLUMNS = (
    "gene",
    "module",
    "confidence",
    "second_module",
    "second_confidence",
    "degree",
    "within_module_z",
    "participation",
    "role",
)
MODULE_COLUMNS = (
    "module",
    "name",
    "size",
    "internal_edges",
    "cut_edges",
    "internal_density",
    "conductance",
    "resolution_from",
    "resolution_to",
    "stability",
    "evidence",
    "support",
    "p_value",
    "q_value",
    "below_resolution_limit",
)


@dataclass(frozen=True)
class StudySettings:
    """Everything that decides the tables, beside the network itself.

    Attributes
    ----------
    method : str
        `leiden`, `louvain`, `clique-percolation` or `harvest`.
    quality : str
        `modularity` or `cpm`; for Leiden.
    resolution : float or "suggest"
        For Leiden and Louvain.
    k : int
        For clique percolation.
    seed, runs : int
        Seed of everything random; size of the seed ensemble.
    noise : float
        Share of edges left out in the noisy copies; 0 for none.
    nulls : int
        Number of degree-preserving null networks; 0 for none.
    weight : str or None
        Column that held the weights; `none` to ignore them; None where it was found by itself.
    min_weight : float or None
        Edges below are left out.
    show : str
        `best` for the run of best quality, `consensus` for the consensus of all runs; for Leiden and Louvain.
    keep : str
        For the harvest: `supported` to cut where chance begins, `all` for all that hold.
    effort : str
        For the harvest: `quick` for some 290 runs, `full` for some 740.
    names : mapping
        Names given to modules, `{"M2": "bilayer repair"}`.
    """

    method: str = "leiden"
    quality: str = "modularity"
    resolution: float | str = 1.0
    k: int = 4
    seed: int = 1
    runs: int = 50
    noise: float = 0.1
    nulls: int = 100
    weight: str | None = None
    min_weight: float | None = None
    show: str = "best"
    keep: str = "supported"
    effort: str = "quick"
    names: Mapping[str, str] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if self.runs < 1 or self.nulls < 0 or self.seed < 0:
            raise SettingError("--runs must be at least 1, --nulls and --seed at least 0")
        if not 0 <= self.noise < 1:
            raise SettingError(f"--noise is {self.noise}; give the share of edges to leave out, from 0 to below 1")

        if self.show not in {"best", "consensus"} or self.keep not in {"supported", "all"}:
            raise SettingError("--show takes best or consensus, --keep takes supported or all")
        if self.effort not in {"quick", "full"}:
            raise SettingError("--effort takes quick or full")

    def as_dict(self) -> dict[str, Any]:
        """Return the settings as plain values, for the summary, the recipe and the workspace."""
        return asdict(self)

    def at(self, **changes: Any) -> StudySettings:
        """Return the settings with some changed."""
        return replace(self, **changes)


@dataclass(frozen=True)
class NullDraws:
    """Modularity of the network against null networks clustered with the same settings.

    Attributes
    ----------
    observed : float
        Standard modularity of the network's partition.
    draws : float64 array, shape (nulls,)
        Standard modularity of each null network's partition.
    """

    observed: float
    draws: FloatArray

    @property
    def z(self) -> float:
        """Distance from the mean of the nulls in their standard deviations (sample, n − 1)."""
        spread = float(self.draws.std(ddof=1)) if len(self.draws) > 1 else 0.0
        return (self.observed - float(self.draws.mean())) / spread if spread > 0 else float("nan")

    @property
    def p_value(self) -> float:
        """``(r + 1) / (n + 1)``, `r` the nulls that reach the observed value (Davison & Hinkley 1997, eq. 4.11)."""
        reached = int((self.draws >= self.observed).sum())
        return (reached + 1) / (len(self.draws) + 1)


@dataclass(frozen=True, eq=False)
class Study:
    """What `run_study` returns; everything that is shown and handed over.

    Attributes
    ----------
    membership : DataFrame
        Columns `MEMBERSHIP_COLUMNS`; one row per gene and module, by module then falling confidence then gene.
        `second_module` is missing (None or NaN, as pandas keeps it) where there is none; missing figures are NaN.
    module_table : DataFrame
        Columns `MODULE_COLUMNS`; one row a module, M1 first.
    shown : str
        Which result this is, in words: "the best of 50 runs".
    seed_ami, noise_ami : float
        Mean pairwise AMI over seeds; mean AMI of noisy copies with the modules shown. NaN where not computed.
    nulls : NullDraws or None
        None where no null network was asked for.
    suggestion : str
        One sentence, where the resolution was suggested; else empty.
    sentences : tuple of str
        The verdict on the whole, plainest first.
    chance : str
        The verdict against null networks in one sentence; empty where none was run.
    copies : int
        Number of noisy copies; 0 where none was asked for.
    returned : int32 array, shape (modules,), or None
        In how many of the noisy copies each module came back (best-match Jaccard of one half or more; Hennig 2007
        calls a cluster below that dissolved).
    """

    network: Network
    settings: StudySettings
    modules: Modules
    membership: pd.DataFrame
    module_table: pd.DataFrame
    modularity: float
    shown: str
    seed_ami: float
    noise_ami: float
    nulls: NullDraws | None = None
    suggestion: str = ""
    sentences: tuple[str, ...] = ()
    chance: str = ""
    copies: int = 0
    returned: NDArray[np.int32] | None = None

    def named(self, names: Mapping[str, str]) -> Study:
        """Return the study with names given to modules, `{"M2": "bilayer repair"}`; the figures stay as they are."""
        if dict(names) == dict(self.settings.names):
            return self
        table = self.module_table.copy()
        table["name"] = [names.get(module, "") for module in table["module"]]
        return replace(self, settings=self.settings.at(names=dict(names)), module_table=table)
