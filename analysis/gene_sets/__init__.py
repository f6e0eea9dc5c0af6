"""From files to gene sets, and from their names to the network's.

::

    bytes ─▶ text ─▶ formats ─▶ one format ─▶ draft ─▶ GeneSets + SetReport
                     (which?)    (ontology)               │
                                       alias table ─▶ matching ─▶ GeneSets over the network's genes + MatchReport

A format is one file and one line in `formats.FORMATS`.
"""

from __future__ import annotations

from analysis.gene_sets.aliases import Aliases, NameRow, parse_aliases, read_aliases
from analysis.gene_sets.collection import GeneSets, membership_matrix
from analysis.gene_sets.formats import FORMATS, SetFormat
from analysis.gene_sets.matching import match
from analysis.gene_sets.ontology import Ontology, parse_ontology, read_ontology
from analysis.gene_sets.reading import SetReading, parse_gene_sets, read_gene_sets
from analysis.gene_sets.report import MatchReport, SetReport

__all__ = [
    "FORMATS",
    "Aliases",
    "GeneSets",
    "MatchReport",
    "NameRow",
    "Ontology",
    "SetFormat",
    "SetReading",
    "SetReport",
    "match",
    "membership_matrix",
    "parse_aliases",
    "parse_gene_sets",
    "parse_ontology",
    "read_aliases",
    "read_gene_sets",
    "read_ontology",
]
