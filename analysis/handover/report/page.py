"""The page of the report: sentences first, then the map, then figures, then tables."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from analysis.handover.bundle import Bundle
from analysis.handover.report.chapter import chapter
from analysis.handover.report.charts import confidence_chart, null_chart, size_chart
from analysis.handover.report.citations import cited
from analysis.handover.report.map_figure import draw_map
from analysis.handover.report.markup import Markup, join, short, tag
from analysis.handover.report.methods_text import methods_sentences
from analysis.handover.report.module_section import LIMIT_MARK, gene_lists, has_limit, least_sure, module_tables
from analysis.handover.report.story import bridges, notes, question, resolution
from analysis.handover.report.style import STYLE
from analysis.handover.report.wording import chance, count, figure, is_known, plain
from analysis.network import FloatArray
from analysis.study import Study
from analysis.verdicts import CLUSTERED_CAUTION, DEGREE_CAUTION, STRUCTURE_CAUTION, USE_CAUTION
from analysis.version import versions

METHOD_NAMES = {
    "leiden": "Leiden",
    "louvain": "Louvain",
    "clique-percolation": "Clique percolation",
    "harvest": "Harvest",
}
QUALITY_NAMES = {"modularity": "modularity", "cpm": "constant Potts model"}
NOT_USED = {
    "clique-percolation": ("quality", "resolution", "runs", "show", "keep", "effort"),
    "harvest": ("quality", "resolution", "k", "runs", "noise", "show"),
}
"""Settings that a method does not heed."""
POLICY = "default-src 'none'; style-src 'unsafe-inline'; img-src data:"
"""What a browser may load for this page: nothing from anywhere."""


def report_page(bundle: Bundle, positions: FloatArray) -> str:
    """Return the whole report as one HTML document."""
    study = bundle.study
    title = f"Modules of {short(study.network.label)}"
    head = tag(
        "head",
        tag("meta", charset="utf-8"),
        Markup(f'<meta http-equiv="Content-Security-Policy" content="{POLICY}"/>'),
        tag("meta", name="viewport", content="width=device-width, initial-scale=1"),
        tag("title", f"{title} · corymb"),
        tag("style", Markup(STYLE)),
    )
    body = tag(
        "body",
        tag("header", _brand(), tag("h1", title), tag("p", _subtitle(study), class_="under"), class_="head"),
        tag(
            "main",
            _verdict(study),
            question(study),
            _map(study, positions),
            resolution(study),
            _trust(study),
            _modules(study),
            bridges(study),
            [chapter(section) for section in bundle.sections],
            notes(study),
            _cautions(),
            _read(bundle),
            _methods(bundle),
            _settings(bundle),
            _repeat(bundle),
        ),
        tag("footer", f"Written by corymb {versions()['corymb']}. {USE_CAUTION}"),
    )
    return f"<!DOCTYPE html>\n{tag('html', head, body, lang='en-GB')}\n"


def _brand() -> Markup:
    stalks = tag("path", d="M13 25V15M13 19L6 9M13 19L20 9M13 15L10 7M13 15L16 7", stroke="#2d6a4f", stroke_width=1.8)
    heads = [
        tag("circle", cx=x, cy=y, r=2.4, fill="#2d6a4f") for x, y in ((4, 7), (9, 4.5), (13, 6), (17, 4.5), (22, 7))
    ]
    sign = tag("svg", stalks, heads, viewBox="0 0 26 26", fill="none", aria_hidden="true")
    return tag("div", sign, "corymb", class_="brand")


def _subtitle(study: Study) -> str:
    parts = [METHOD_NAMES.get(study.settings.method, study.settings.method)]
    if study.settings.method == "clique-percolation":
        parts.append(f"k = {study.settings.k}")
    elif study.settings.method != "harvest":
        resolution = study.modules.settings.get("resolution", study.settings.resolution)
        parts += [QUALITY_NAMES.get(study.settings.quality, study.settings.quality), f"resolution {plain(resolution)}"]
    return " · ".join(parts)


def _verdict(study: Study) -> Markup:
    first, *rest = study.sentences or (f"{count(len(study.modules), 'module')}; shown is {study.shown}.",)
    more = tag("ul", [tag("li", sentence) for sentence in rest], class_="more") if rest else None
    return join([tag("p", first, class_="verdict"), more, _facts(study)])


def _facts(study: Study) -> Markup:
    facts = [
        ("genes", count(study.network.node_count)),
        ("interactions", count(study.network.edge_count)),
        ("modules", count(len(study.modules))),
        ("standard modularity", figure(study.modularity, 3)),
    ]
    if is_known(study.seed_ami):
        facts.append(("agreement of seeds", figure(study.seed_ami)))
    if is_known(study.noise_ami):
        facts.append(("agreement under noise", figure(study.noise_ami)))
    if study.nulls is not None:
        facts.append(("p against chance", chance(study.nulls.p_value)))
    return tag("dl", [tag("div", tag("dt", name), tag("dd", value)) for name, value in facts], class_="facts")


def _map(study: Study, positions: FloatArray) -> Markup:
    drawn = draw_map(study, positions)
    caption = tag("figcaption", f"{drawn.caption} {STRUCTURE_CAUTION}")
    return tag("section", tag("h2", "The map"), tag("figure", drawn.picture, caption, class_="map"))


def _trust(study: Study) -> Markup:
    figures = [_null_figure(study), _confidence_figure(study), _size_figure(study)]
    doubt = least_sure(study)
    genes = None if doubt is None else join([tag("h2", "Genes least sure of their module"), doubt])
    return tag("section", tag("h2", "How far to believe it"), tag("div", figures, class_="row"), genes)


def _null_figure(study: Study) -> Markup | None:
    if study.nulls is None:
        nothing = (
            "No null network was asked for, so it is not known whether chance alone would give modules like these."
        )
        return _panel("Against chance", None, study.chance or nothing)
    z = f", z = {figure(study.nulls.z, 1)}" if is_known(study.nulls.z) else ""
    text = (
        f"Grey: modularity of {count(len(study.nulls.draws), 'random network')} with the same degrees; green: this one "
        f"(p = {chance(study.nulls.p_value)}{z})."
    )
    if study.network.weights is not None:
        text += (
            " Weights are shuffled over the rewired edges there, so that any bond between weight and place counts too."
        )
    return _panel("Against chance", null_chart(study.nulls), text)


def _confidence_figure(study: Study) -> Markup:
    confidence = study.membership["confidence"].to_numpy(np.float64)
    known = confidence[~np.isnan(confidence)]
    if not len(known):
        text = "Neither noisy copies nor further seeds were run, so it is not known how surely genes stay."
        return _panel("Confidence of genes", None, text)
    source = "noisy copies of the network" if study.copies else "runs with other seeds"
    text = f"Genes by the share of {source} in which they stay in their module; ochre below six of ten."
    return _panel("Confidence of genes", confidence_chart(known), text)


def _size_figure(study: Study) -> Markup | None:
    if not len(study.modules):
        return None
    sizes = study.modules.sizes.tolist()
    text = f"Modules by their number of genes: the largest has {sizes[0]:,}, the median is {np.median(sizes):,.0f}."
    return _panel("Sizes of modules", size_chart(sizes), text)


def _panel(title: str, picture: Markup | None, caption: str) -> Markup:
    return tag("figure", tag("h3", title), picture, tag("figcaption", caption), class_="panel")


def _modules(study: Study) -> Markup:
    return tag(
        "section",
        tag("h2", "The modules"),
        tag("p", " ".join(_explained(study)), class_="note"),
        module_tables(study) if len(study.modules) else tag("p", "No module was found."),
        gene_lists(study) if len(study.modules) else None,
    )


def _explained(study: Study) -> list[str]:
    """Return what the columns of the table mean."""
    told = []
    if study.returned is not None:
        told.append("Comes back: in how many noisy copies of the network half or more of a module is found again.")
    told += [
        "Stability: how much of it is found again on average, over copies and resolutions; 1 is all of it everywhere."
        if study.copies
        else "Stability: how much of it is found again on average; 1 is all of it everywhere.",
        "Evidence: how much denser it is than its degrees give by chance, in nats per gene.",
        f"Support: stability times evidence; it orders modules and is no probability. {CLUSTERED_CAUTION}",
    ]
    if study.module_table["q_value"].notna().any() and study.settings.method != "harvest":
        told.append("q: the p-value against modules of like size found in random networks, corrected over all modules.")
    if has_limit(study):
        told.append(f"{LIMIT_MARK} so few edges inside that modularity could have merged it (resolution limit).")
    return told


def _cautions() -> Markup:
    cautions = [STRUCTURE_CAUTION, DEGREE_CAUTION, CLUSTERED_CAUTION, USE_CAUTION]
    listed = tag("ul", [tag("li", caution) for caution in cautions])
    return tag("section", tag("h2", "What this does not show"), tag("div", listed, class_="caution"))


def _read(bundle: Bundle) -> Markup | None:
    if bundle.report is None:
        return None
    name = bundle.source.name if bundle.source is not None else bundle.report.source
    sentences = replace(bundle.report, source=name).sentences()
    left_out = bundle.report.edges - bundle.study.network.edge_count
    if bundle.study.settings.min_weight is not None:
        cut = plain(bundle.study.settings.min_weight)
        sentences.append(
            f"{count(left_out, 'edge')} with a weight below {cut} {'was' if left_out == 1 else 'were'} left out."
        )
    items = tag("ul", [tag("li", short(sentence, 600)) for sentence in sentences], class_="more")
    return tag("section", tag("h2", "What was read"), items)


def _methods(bundle: Bundle) -> Markup:
    text, sources = cited(methods_sentences(bundle))
    listed = tag("ol", [tag("li", source) for source in sources], class_="sources")
    return tag("section", tag("h2", "Methods, for a paper"), tag("p", text), listed)


def _settings(bundle: Bundle) -> Markup:
    settings = bundle.study.settings.as_dict()
    aside = {"names", *NOT_USED.get(settings["method"], ("k", "keep", "effort"))}
    rows = [
        (key.replace("_", " "), plain(value))
        for key, value in settings.items()
        if value is not None and key not in aside
    ]
    network = [("fingerprint of the network", bundle.study.network.fingerprint)]
    if bundle.source is not None:
        network = [("file", short(bundle.source.name)), ("SHA-256 of the file", bundle.source.sha256), *network]
    tables = tag("div", [_pairs("Settings", rows), _pairs("Versions", list(versions().items()))], class_="pairs")
    return tag("section", tag("h2", "Settings and versions"), tables, _pairs("Network", network))


def _pairs(caption: str, rows: list[tuple[str, str]]) -> Markup:
    cells = [tag("tr", tag("td", name), tag("td", value)) for name, value in rows]
    return tag(
        "div", tag("table", tag("thead", tag("tr", tag("th", caption, colspan=2))), tag("tbody", cells)), class_="wide"
    )


def _repeat(bundle: Bundle) -> Markup:
    parts: list[Markup] = []
    if bundle.source is not None:
        parts += [
            tag(
                "p",
                "The recipe beside this report repeats the work and gives the same tables, byte by byte, with the same "
                "versions; where a file or a version differs it says so and stops, unless --anyway is given. It looks "
                "for the network's file where it was, then beside the recipe.",
            ),
            tag("pre", tag("code", "corymb rerun recipe.toml -o again")),
        ]
    spreadsheets = (
        "A spreadsheet may turn gene symbols such as SEPT2 or 1-Mar into dates when it opens a CSV file. Import "
        "membership.csv instead of opening it, and choose “text” for the columns gene, module and second_module. A "
        "name that begins like a formula has an apostrophe before it in the CSV files, and only there."
    )
    parts.append(tag("p", spreadsheets))
    return tag("section", tag("h2", "To repeat it, and to use the tables"), parts)
