"""What every exporter is given."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields
from functools import cached_property
from typing import TYPE_CHECKING, Any

from analysis.intake.report import IntakeReport, Rejected, Role
from analysis.network import FloatArray, Network
from analysis.study import Study
from analysis.trust.sweep import Sweep

if TYPE_CHECKING:
    import pandas as pd

    from analysis.handover.meaning_recipe import MeaningRequest
    from analysis.meaning import Meaning


@dataclass(frozen=True)
class Source:
    """The file that a network was read from.

    Attributes
    ----------
    name : str
        Its name, without folders.
    sha256 : str
        Of its bytes as they lay on disk.
    path : str
        From the folder of the recipe to the file, with `/`; the name alone where the two have no common ground.
    """

    name: str
    sha256: str
    path: str


@dataclass(frozen=True, eq=False)
class Section:
    """A further chapter of the report, such as enrichment or bridges: sentences first, then a table.

    Attributes
    ----------
    title : str
    sentences : tuple of str
    table : DataFrame or None
        Shown as it is, column names as heads.
    """

    title: str
    sentences: tuple[str, ...]
    table: pd.DataFrame | None = None


@dataclass(frozen=True, eq=False)
class Bundle:
    """Everything that can be handed over.

    Attributes
    ----------
    study : Study
        One clustering with its evidence.
    report : IntakeReport or None
        How the network was read; None where it did not come from a file.
    source : Source or None
        The file; None where there was none.
    parts : tuple of str
        What is to be written beside the files that always are; keys of `analysis.handover.EXTRAS`.
    sections : tuple of Section
        Further chapters of the report, in their order.
    meaning : Meaning or None
        Enrichment in gene sets, where they were given.
    meaning_request : MeaningRequest or None
        What that was made from, for the recipe.
    """

    study: Study
    report: IntakeReport | None = None
    source: Source | None = None
    parts: tuple[str, ...] = ()
    sections: tuple[Section, ...] = ()
    meaning: Meaning | None = None
    meaning_request: MeaningRequest | None = None

    @cached_property
    def positions(self) -> FloatArray:
        """Where each gene stands on the map, shape (nodes, 2)."""
        from analysis.layout import layout

        return layout(self.study.network)


@dataclass(frozen=True, eq=False)
class SweepBundle:
    """What `corymb sweep` hands over.

    Attributes
    ----------
    network : Network
    sweep : Sweep
    report, source
        As for `Bundle`.
    weight : str or None
        Column of the weights as it was asked for, `none` to leave them out, None where it was found.
    min_weight : float or None
        Edges below were left out.
    """

    network: Network
    sweep: Sweep
    report: IntakeReport | None = None
    source: Source | None = None
    weight: str | None = None
    min_weight: float | None = None


Exporter = Callable[[Bundle], dict[str, bytes]]
"""Takes a bundle, returns the content of each file by its relative path; never sees a folder, knows no clock."""


def report_from_plain(plain: Mapping[str, Any]) -> IntakeReport:
    """Return the report that `IntakeReport.as_json` was made from, as the workspace keeps it; further keys are left."""
    values = {each.name: plain[each.name] for each in fields(IntakeReport) if each.name in plain}
    values["header"] = None if plain["header"] is None else tuple(plain["header"])
    values["columns"] = {role: Role(**column) for role, column in plain["columns"].items()}
    values["rejected"] = tuple(Rejected(**row) for row in plain["rejected"])
    values["warnings"] = tuple(dict(warning) for warning in plain["warnings"])
    span = plain.get("weight_range")
    values["weight_range"] = None if span is None else (float(span[0]), float(span[1]))
    return IntakeReport(**values)
