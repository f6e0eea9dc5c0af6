"""Plain lists, one gene a line, as enrichment programs take them."""

from __future__ import annotations

from collections.abc import Iterable

from analysis.handover.bundle import Bundle


def gene_list_files(bundle: Bundle) -> dict[str, bytes]:
    """Return `gene_lists/M1.txt`, … (surest gene first) and `gene_lists/background.txt` (all genes of the network)."""
    groups = bundle.study.membership.groupby("module", sort=False)["gene"]
    lists = {module: groups.get_group(module) for module in bundle.study.modules.numbers}
    files = {f"gene_lists/{module}.txt": _lines(genes) for module, genes in lists.items()}
    files["gene_lists/background.txt"] = _lines(bundle.study.network.names)
    return files


def _lines(genes: Iterable[str]) -> bytes:
    return "".join(f"{gene}\n" for gene in genes).encode()
