"""The methods paragraph, in the English of a paper: what was done here, and after whom."""

from __future__ import annotations

from analysis.handover.bundle import Bundle
from analysis.handover.report.wording import count, plain
from analysis.study import SUGGEST, Study
from analysis.version import versions

ALGORITHMS = {"leiden": "the Leiden algorithm [leiden]", "louvain": "the Louvain algorithm [louvain]"}


def methods_sentences(bundle: Bundle) -> list[str]:
    """Return the paragraph's sentences; marks such as `[leiden]` stand for references."""
    study = bundle.study
    return [
        *_network(bundle),
        *_modules(study),
        *_noise(study),
        *_figures(study),
        *_nulls(study),
        _software(),
    ]


def _network(bundle: Bundle) -> list[str]:
    network, settings = bundle.study.network, bundle.study.settings
    kind = "unweighted" if network.weights is None else "weighted"
    size = f"{count(network.node_count, 'node')} and {count(network.edge_count, 'edge')}"
    sentences = [f"The {kind}, undirected network had {size}."]
    if settings.min_weight is not None:
        sentences.append(f"Edges with a weight below {plain(settings.min_weight)} had been left out.")
    return sentences


def _modules(study: Study) -> list[str]:
    settings = study.settings
    if settings.method == "clique-percolation":
        return [
            f"Modules are the k-clique communities [cliques] for k = {settings.k}, found exactly; their quality is the "
            "extended modularity [cover]."
        ]
    if settings.method not in ALGORITHMS:
        return []
    found = f"Modules were found by {ALGORITHMS[settings.method]}, optimising {_quality(study)}."
    seeds = (
        f"It was run {count(settings.runs, 'time')} with seeds derived from {settings.seed}; shown is {study.shown}."
    )
    sentences = [found, seeds]
    if settings.resolution == SUGGEST:
        sentences.append("The resolution was taken from a sweep over resolutions, with the ranges of [champ].")
    if "consensus" in study.shown:
        sentences.append("The consensus follows [consensus].")
    if settings.runs > 1:
        sentences.append("Agreement between partitions is their adjusted mutual information [ami].")
    return sentences


def _quality(study: Study) -> str:
    resolution = study.modules.settings.get("resolution", study.settings.resolution)
    at = f"at resolution γ = {plain(resolution)}"
    if study.settings.quality == "cpm":
        return f"the constant Potts model [potts] {at}, weights being divided by their 95 % quantile"
    return f"modularity [modularity] {at} [resolution]"


def _noise(study: Study) -> list[str]:
    known = study.membership["confidence"].notna().any()
    if not known:
        return []
    if study.copies:
        left_out = f"{study.settings.noise:.0%}".replace("%", " %")
        ensemble = (
            f"{study.copies} copies of the network from which {left_out} of the edges had been left out at random"
        )
    else:
        ensemble = f"the {study.settings.runs} runs with different seeds"
    return [
        f"A module's stability is its mean best-match Jaccard index over {ensemble} [stability]; a gene's confidence "
        "is the share of them in which it stayed in the module that matched its own best."
    ]


def _figures(study: Study) -> list[str]:
    sentences = [
        "Within-module degree, participation coefficient and roles follow [roles]; conductance follows [conductance].",
        "Evidence per member is the divergence of a module's density from that expected by the configuration model "
        "(after [significance]), in nats; support is evidence times stability.",
    ]
    if study.settings.quality == "modularity":
        sentences.append("Modules with fewer than √(2m) edges inside are marked, m being all edges [limit].")
    return sentences


def _nulls(study: Study) -> list[str]:
    if study.nulls is None:
        return []
    weights = "" if study.network.weights is None else ", weights being shuffled over the edges"
    sentences = [
        f"Modularity was compared with that of {count(len(study.nulls.draws), 'random network')} with the same "
        f"degrees, made by swaps of edges [swaps]{weights}, and clustered with the same settings; p = (r + 1)/(n + 1) "
        "[bootstrap]."
    ]
    if study.module_table["p_value"].notna().any():
        sentences.append(
            "Modules were compared with modules of like size found in these networks; q-values control the false "
            "discovery rate over all modules [bh]."
        )
    return sentences


def _software() -> str:
    used = versions()
    return (
        f"Computed with corymb {used['corymb']}, igraph {used['igraph']} [igraph], networkx {used['networkx']}, "
        f"numpy {used['numpy']}, scipy {used['scipy']} and pandas {used['pandas']} on Python {used['python']}."
    )
