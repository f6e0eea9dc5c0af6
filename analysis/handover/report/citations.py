"""The published methods that a report may cite."""

from __future__ import annotations

import re
from collections.abc import Sequence

REFERENCES = {
    "ami": "Vinh NX, Epps J, Bailey J (2010). Information theoretic measures for clusterings comparison: "
    "variants, properties, normalization and correction for chance. Journal of Machine Learning "
    "Research 11, 2837–2854.",
    "bh": "Benjamini Y, Hochberg Y (1995). Controlling the false discovery rate: a practical and powerful "
    "approach to multiple testing. Journal of the Royal Statistical Society B 57, 289–300.",
    "bootstrap": "Davison AC, Hinkley DV (1997). Bootstrap Methods and their Application. Cambridge University Press.",
    "champ": "Weir WH, Emmons S, Gibson R, Taylor D, Mucha PJ (2017). Post-processing partitions to identify "
    "domains of modularity optimization. Algorithms 10, 93.",
    "cliques": "Palla G, Derényi I, Farkas I, Vicsek T (2005). Uncovering the overlapping community structure of "
    "complex networks in nature and society. Nature 435, 814–818.",
    "conductance": "Kannan R, Vempala S, Vetta A (2004). On clusterings: good, bad and spectral. Journal of the ACM "
    "51, 497–515.",
    "consensus": "Lancichinetti A, Fortunato S (2012). Consensus clustering in complex networks. Scientific "
    "Reports 2, 336.",
    "cover": "Shen H, Cheng X, Cai K, Hu M-B (2009). Detect overlapping and hierarchical community structure "
    "in networks. Physica A 388, 1706–1712.",
    "igraph": "Csárdi G, Nepusz T (2006). The igraph software package for complex network research. "
    "InterJournal, Complex Systems 1695.",
    "leiden": "Traag VA, Waltman L, van Eck NJ (2019). From Louvain to Leiden: guaranteeing well-connected "
    "communities. Scientific Reports 9, 5233.",
    "limit": "Fortunato S, Barthélemy M (2007). Resolution limit in community detection. Proceedings of the "
    "National Academy of Sciences 104, 36–41.",
    "louvain": "Blondel VD, Guillaume J-L, Lambiotte R, Lefebvre E (2008). Fast unfolding of communities in "
    "large networks. Journal of Statistical Mechanics, P10008.",
    "modularity": "Newman MEJ, Girvan M (2004). Finding and evaluating community structure in networks. Physical "
    "Review E 69, 026113.",
    "potts": "Traag VA, Van Dooren P, Nesterov Y (2011). Narrow scope for resolution-limit-free community "
    "detection. Physical Review E 84, 016114.",
    "resolution": "Reichardt J, Bornholdt S (2006). Statistical mechanics of community detection. Physical Review E "
    "74, 016110.",
    "rates": "Storey JD, Tibshirani R (2003). Statistical significance for genomewide studies. Proceedings of the "
    "National Academy of Sciences 100, 9440–9445.",
    "robustness": "Karrer B, Levina E, Newman MEJ (2008). Robustness of community structure in networks. Physical "
    "Review E 77, 046119.",
    "roles": "Guimerà R, Amaral LAN (2005). Functional cartography of complex metabolic networks. Nature 433, 895–900.",
    "significance": "Traag VA, Krings G, Van Dooren P (2013). Significant scales in community structure. Scientific "
    "Reports 3, 2930.",
    "stability": "Hennig C (2007). Cluster-wise assessment of cluster stability. Computational Statistics & Data "
    "Analysis 52, 258–271.",
    "swaps": "Maslov S, Sneppen K (2002). Specificity and stability in topology of protein networks. Science "
    "296, 910–913.",
}

_MARK = re.compile(r"\[([a-z]+(?:, [a-z]+)*)\]")


def cited_keys(sentences: Sequence[str]) -> list[str]:
    """Return the keys of the references that sentences name, in the order in which they come."""
    marks = (match[1].split(", ") for match in _MARK.finditer(" ".join(sentences)))
    found = [key for keys in marks if all(key in REFERENCES for key in keys) for key in keys]
    return list(dict.fromkeys(found))


def cited(sentences: Sequence[str]) -> tuple[str, list[str]]:
    """Return a text with marks such as `[leiden, igraph]` numbered in the order in which they come.

    Returns
    -------
    text : str
        The sentences, with `[1, 2]` in place of the marks.
    sources : list of str
        The references, the first being `[1]`.
    """
    order: list[str] = []

    def number(match: re.Match[str]) -> str:
        keys = match[1].split(", ")
        if not all(key in REFERENCES for key in keys):
            return match[0]
        order.extend(key for key in keys if key not in order)
        return f"[{', '.join(str(place) for place in sorted(order.index(key) + 1 for key in keys))}]"

    text = _MARK.sub(number, " ".join(sentences))
    return text, [REFERENCES[key] for key in order]
