"""A small network and its bundle, for the tests of what is handed over."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import networkx as nx
import numpy as np

from analysis.evidence import run_study
from analysis.handover import Bundle, Source
from analysis.intake import parse_network
from analysis.network import Network
from analysis.study import NullDraws, Study, StudySettings

NASTY = "\n".join(
    [
        "p\tq\tscore",
        "=cmd|' /C calc'!A0\t+1\t1.5",
        "@S\t-3\t2",
        "<script>alert(1)</script>\t=cmd|' /C calc'!A0\t3",
        'x"><img src=x onerror=alert(1)>\t<script>alert(1)</script>\t0.1',
        "SEPT2\t@S\t1",
        "1-Mar\tSEPT2\t1",
        "2310009E13\t@S\t1",
        "'+1\t+1\t1",
        "ADE5,7\t&amp;\t0.3333333333333333",
        "&amp;\tSEPT2\t2",
    ]
)
"""Names that a spreadsheet, a browser or a careless writer could take for something else."""


def karate_text() -> str:
    """Return Zachary's karate club as an edge list, by networkx."""
    return "".join(f"n{one} n{other}\n" for one, other in nx.karate_club_graph().edges)


def write_karate(folder: Path) -> Path:
    """Write the karate club into a file."""
    path = folder / "karate.txt"
    path.write_text(karate_text(), encoding="utf-8")
    return path


def bundle_of(text: str, name: str = "network.tsv", **settings: object) -> Bundle:
    """Read a network, run a short study on it, and bundle it."""
    reading = parse_network(text.encode(), name)
    chosen = StudySettings(**{"runs": 4, "nulls": 0, **settings})  # type: ignore[arg-type]
    study = run_study(reading.network, chosen)
    return Bundle(study, reading.report, Source(name, reading.network.provenance["sha256"], f"../{name}"))


def with_nulls(study: Study) -> Study:
    """Return the study with made-up draws of null networks, to have them drawn."""
    draws = np.random.default_rng(1).normal(study.modularity - 0.1, 0.01, 100)
    return replace(study, nulls=NullDraws(study.modularity, draws))


def names_with(*names: str) -> Network:
    """Return a ring of the given names."""
    return Network.from_edges(list(zip(names, [*names[1:], names[0]], strict=True)))
