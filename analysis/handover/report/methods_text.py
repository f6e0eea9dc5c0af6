"""The methods paragraph, in the English of a paper: what was done here, and after whom."""

from __future__ import annotations

from analysis.evidence import HARVEST, SUPPORT_COPIES, SUPPORT_STEPS
from analysis.handover.bundle import Bundle
from analysis.handover.report.wording import count, percent, plain
from analysis.harvest_study import harvest_settings
from analysis.study import Study
from analysis.trust.support import CopySettings
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
        *_enrichment(bundle),
        _software(),
    ]


def _enrichment(bundle: Bundle) -> list[str]:
    if bundle.meaning is None:
        return []
    found = bundle.meaning.enrichment
    which = "a list that was given" if bundle.meaning.background_given else "the genes of the network that they know"
    trimmed = ", trimmed to their cores," if found.settings.core_only else ""
    return [
        f"Modules{trimmed} were tested for enrichment in the {count(len(found.sets), 'gene set')} of "
        f"{found.sets.label} that have {found.settings.min_size} to {found.settings.max_size} genes in the background, "
        f"{which} ({count(found.background, 'gene')}), by the one-sided hypergeometric test; p-values were "
        f"corrected over all {count(found.tests, 'test')} [bh]."
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
    if settings.method == HARVEST:
        return _harvest(study)
    if settings.method not in ALGORITHMS:
        return [
            f"Modules are the k-clique communities [cliques] for k = {settings.k}, found exactly; their quality is the "
            "extended modularity [cover]."
        ]
    sentences = [
        f"Modules were found by {ALGORITHMS[settings.method]}, optimising {_quality(study)}.",
        f"It was run {count(settings.runs, 'time')} with seeds derived from {settings.seed}; shown is {study.shown}.",
    ]
    if study.suggestion:
        sentences.append("The resolution was taken from the steadiest stretch of a sweep, its ranges after [champ].")
    if settings.show == "consensus":
        sentences.append("The consensus follows [consensus].")
    if settings.runs > 1:
        sentences.append("Agreement between partitions is their adjusted mutual information [ami].")
    return sentences


def _harvest(study: Study) -> list[str]:
    chosen = harvest_settings(study.settings)
    sentences = [
        f"Modules were taken each at its own resolution from a sweep of the constant Potts model [potts] by the Leiden "
        f"algorithm [leiden] over {chosen.steps} resolutions, in the order of their support, with at most a quarter of "
        f"the genes of each taken before; seeds were derived from {study.settings.seed}."
    ]
    if chosen.cut:
        sentences.append(
            f"They were kept down to the support at which {count(chosen.nulls, 'random network')} with the same "
            f"degrees [swaps], harvested likewise, gave {chosen.level:g} times as many modules (a false discovery rate "
            "by permutation [rates])."
        )
    return sentences


def _quality(study: Study) -> str:
    resolution = study.modules.settings.get("resolution", study.settings.resolution)
    at = f"at resolution γ = {plain(resolution)}"
    if study.settings.quality == "cpm":
        return f"the constant Potts model [potts] {at}, weights being divided by their 95 % quantile"
    return f"modularity [modularity] {at} [resolution]"


def _noise(study: Study) -> list[str]:
    """Say what stability and confidence are; see `analysis.evidence.run_study`."""
    if not study.membership["confidence"].notna().any():
        return []
    own = "the share of them in which it stayed in the module that matched its own best"
    if not study.copies:
        return [
            f"A module's stability is its mean best-match Jaccard index over the {study.settings.runs} runs with "
            f"different seeds [stability]; a gene's confidence is {own}."
        ]
    harvested = study.settings.method == HARVEST
    steps = harvest_settings(study.settings).steps if harvested else SUPPORT_STEPS
    copies = harvest_settings(study.settings).copies if harvested else SUPPORT_COPIES
    stability = (
        f"A module's stability is its mean best-match Jaccard index [stability] over {steps} resolutions and {copies} "
        f"copies of the network with {percent(CopySettings().noise)} of the edges left out or rewired [robustness]."
    )
    if harvested:
        return [stability, f"A gene's confidence, over the same copies at the module's own resolution, is {own}."]
    left_out = percent(study.settings.noise)
    return [
        stability,
        f"A gene's confidence comes from {study.copies} copies with {left_out} of the edges left out at random: it is "
        f"{own}.",
    ]


def _figures(study: Study) -> list[str]:
    sentences = [
        "Within-module degree, participation coefficient and roles follow [roles]; conductance follows [conductance].",
        "Evidence per member is the divergence of a module's density from that expected by the configuration model "
        "(after [significance]), in nats; support is evidence times stability.",
    ]
    if study.settings.quality == "modularity" and study.settings.method in ALGORITHMS:
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
            "The evidence of each module was compared with that of modules of like size found in these networks; "
            "q-values control the false discovery rate over all modules [bh]."
        )
    return sentences


def _software() -> str:
    used = versions()
    return (
        f"Computed with corymb {used['corymb']}, igraph {used['igraph']} [igraph], networkx {used['networkx']}, "
        f"numpy {used['numpy']}, scipy {used['scipy']} and pandas {used['pandas']} on Python {used['python']}."
    )
