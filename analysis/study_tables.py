"""The two tables of a study: memberships and modules."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from analysis.bridges import ROLES, assign_roles
from analysis.modules import Modules, score_modules
from analysis.network import FloatArray, Network
from analysis.study import MEMBERSHIP_COLUMNS, MODULE_COLUMNS

if TYPE_CHECKING:
    import pandas as pd

    from analysis.trust.ensemble import Recurrence


@dataclass(frozen=True)
class ModuleEvidence:
    """What further runs say of each module; all arrays of shape (modules,), NaN where not computed.

    Attributes
    ----------
    stability : float64 array
        Mean best-match Jaccard over noisy copies and the sweep.
    resolution_from, resolution_to : float64 arrays
        Range of resolution over which the module is found again.
    p_value, q_value : float64 arrays
        Against modules found the same way in null networks.
    """

    stability: FloatArray
    resolution_from: FloatArray
    resolution_to: FloatArray
    p_value: FloatArray
    q_value: FloatArray

    @classmethod
    def none(cls, count: int) -> ModuleEvidence:
        """Return the evidence of a study that asked for none."""
        return cls(*(np.full(count, np.nan) for _ in range(5)))


def membership_table(network: Network, modules: Modules, recurrence: Recurrence | None) -> pd.DataFrame:
    """Return one row per gene and module, by module, falling confidence, falling degree, then gene."""
    import pandas as pd

    nodes, owners = modules.memberships
    roles = assign_roles(network, modules)
    names = np.array(network.names, object)
    missing = np.full(len(nodes), np.nan)
    second = None if recurrence is None else recurrence.second
    table = pd.DataFrame(
        {
            "gene": names[nodes],
            "module": _numbers(modules, owners),
            "confidence": missing if recurrence is None else recurrence.confidence,
            "second_module": _numbers(modules, second) if second is not None else np.full(len(nodes), None),
            "second_confidence": missing
            if recurrence is None or second is None
            else np.where(second >= 0, recurrence.second_confidence, np.nan),
            "degree": network.degree[nodes],
            "within_module_z": roles.within_module_z,
            "participation": roles.participation,
            "role": np.array(ROLES, object)[roles.role] if len(nodes) else np.zeros(0, object),
        },
        columns=list(MEMBERSHIP_COLUMNS),
    )
    certain = np.nan_to_num(table["confidence"].to_numpy(np.float64), nan=0.0)
    order = np.lexsort((nodes, -network.degree[nodes], -certain, owners))
    return table.iloc[order].reset_index(drop=True)


def evidence_table(
    network: Network, modules: Modules, evidence: ModuleEvidence, names: Mapping[str, str]
) -> pd.DataFrame:
    """Return one row a module, with everything known of it."""
    import pandas as pd

    figures = score_modules(network, modules)
    numbers = modules.numbers
    return pd.DataFrame(
        {
            "module": np.array(numbers, object),
            "name": np.array([names.get(number, "") for number in numbers], object),
            "size": figures.size,
            "internal_edges": figures.internal_edges,
            "cut_edges": figures.cut_edges,
            "internal_density": figures.internal_density,
            "conductance": figures.conductance,
            "resolution_from": evidence.resolution_from,
            "resolution_to": evidence.resolution_to,
            "stability": evidence.stability,
            "evidence": figures.evidence,
            "support": evidence.stability * figures.evidence,
            "p_value": evidence.p_value,
            "q_value": evidence.q_value,
            "below_resolution_limit": figures.below_resolution_limit,
        },
        columns=list(MODULE_COLUMNS),
    )


def _numbers(modules: Modules, positions: NDArray[Any]) -> NDArray[Any]:
    """Return `M1`, … for each position, None for −1."""
    words = np.array([*modules.numbers, None], object)
    numbers: NDArray[Any] = words[positions]
    return numbers
