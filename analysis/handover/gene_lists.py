"""Plain lists, one gene a line, and set lines, as enrichment programs take them."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from analysis.handover.bundle import Bundle
from analysis.study import Study
from analysis.trust.ensemble import CORE_SHARE

if TYPE_CHECKING:
    import pandas as pd


def gene_list_files(bundle: Bundle) -> dict[str, bytes]:
    """Return `gene_lists/M1.txt`, … (surest gene first) and `gene_lists/background.txt` (all genes of the network)."""
    return _lists("gene_lists", bundle.study, bundle.study.membership)


def core_list_files(bundle: Bundle) -> dict[str, bytes]:
    """Return the same in `gene_lists_core/`, with the core of each module alone, and `module_sets_core.tsv`.

    The core are the genes that stay in their module in nine of ten runs or copies (`trust.ensemble.CORE_SHARE`). A
    module without a core has an empty list and no set line. The background stays the whole network.
    """
    core = bundle.study.membership[bundle.study.membership["confidence"] >= CORE_SHARE]
    files = _lists("gene_lists_core", bundle.study, core)
    return files | {"module_sets_core.tsv": _set_lines(bundle.study, core)}


def set_line_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `module_sets.tsv`: one line a module, parted by tabs: its number, what it is, then its genes."""
    return {"module_sets.tsv": _set_lines(bundle.study, bundle.study.membership)}


def _lists(folder: str, study: Study, membership: pd.DataFrame) -> dict[str, bytes]:
    groups = _groups(membership)
    files = {f"{folder}/{module}.txt": _lines(groups.get(module, [])) for module in study.modules.numbers}
    files[f"{folder}/background.txt"] = _lines(study.network.names)
    return files


def _set_lines(study: Study, membership: pd.DataFrame) -> bytes:
    groups = _groups(membership)
    names = study.settings.names
    lines = [
        "\t".join([module, _flat(names.get(module) or f"module {module} of {study.network.label}"), *genes])
        for module in study.modules.numbers
        if (genes := groups.get(module))
    ]
    return _lines(lines)


def _groups(membership: pd.DataFrame) -> dict[str, list[str]]:
    """Return the genes of each module, surest first."""
    return {str(module): genes.tolist() for module, genes in membership.groupby("module", sort=False)["gene"]}


def _flat(text: str) -> str:
    """Return a text without tabs and line ends, which part cells and lines."""
    return " ".join(text.split())


def _lines(genes: Iterable[str]) -> bytes:
    return "".join(f"{gene}\n" for gene in genes).encode()
