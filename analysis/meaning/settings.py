"""What decides an enrichment, beside modules and sets."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import Any

from analysis.errors import SettingError

LEVEL = 0.05
"""q-value up to which a set counts as enriched: the usual mark, a convention."""


@dataclass(frozen=True)
class MeaningSettings:
    """Settings of an enrichment.

    Attributes
    ----------
    min_size, max_size : int
        Sets with fewer or more genes in the background are not tested: small ones say little, large ones are vague.
    min_module : int
        Modules with fewer genes in the background are not tested.
    core_only : bool
        Whether modules are trimmed to their cores.
    """

    min_size: int = 5
    max_size: int = 500
    min_module: int = 3
    core_only: bool = False

    def __post_init__(self) -> None:
        if self.min_size < 1 or self.min_module < 1:
            raise SettingError("--min-size must be at least 1")
        if self.max_size < self.min_size:
            raise SettingError(
                f"--max-size is {self.max_size} and --min-size {self.min_size}; the first must not be the smaller"
            )

    def as_dict(self) -> dict[str, Any]:
        """Return the settings as plain values."""
        return asdict(self)
