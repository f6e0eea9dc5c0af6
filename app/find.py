"""Find: what a typed or pasted text names, among genes and modules."""

from __future__ import annotations

import re
from dataclasses import dataclass

from analysis.network import Network
from analysis.study import Study

SEPARATORS = re.compile(r"[\s,;|]+")
SUGGESTIONS = 12


@dataclass(frozen=True)
class Found:
    """What was found.

    Attributes
    ----------
    genes : tuple of int
        Nodes, in the order typed, each once.
    module : int or None
        A module, by number or name.
    missing : tuple of str
        Typed words that name nothing here.
    similar : tuple of int
        Nodes whose names begin like, or contain, a single word that was not found.
    """

    genes: tuple[int, ...] = ()
    module: int | None = None
    missing: tuple[str, ...] = ()
    similar: tuple[int, ...] = ()


def find(text: str, network: Network, study: Study | None) -> Found:
    """Resolve a typed text: a gene, a module by number or name, or a list of genes; case is ignored where harmless."""
    text = text.strip()
    if not text:
        return Found()
    if text in network.index:
        return Found(genes=(network.index[text],))
    module = _module(text, study)
    if module is not None:
        return Found(module=module)
    words = [word for word in SEPARATORS.split(text) if word]
    by_case = _by_folded_case(network)
    nodes = [network.index.get(word, by_case.get(word.casefold(), -1)) for word in words]
    genes = tuple(dict.fromkeys(node for node in nodes if node >= 0))
    missing = tuple(dict.fromkeys(word for word, node in zip(words, nodes, strict=True) if node < 0))
    similar = _similar(words[0], network) if len(words) == 1 and not genes else ()
    return Found(genes=genes, missing=missing, similar=similar)


def _module(text: str, study: Study | None) -> int | None:
    if study is None:
        return None
    number = re.fullmatch(r"[Mm](\d+)", text)
    if number and 1 <= int(number[1]) <= len(study.modules):
        return int(number[1]) - 1
    for module, name in study.settings.names.items():
        if name.casefold() == text.casefold():
            return int(module[1:]) - 1
    return None


def _by_folded_case(network: Network) -> dict[str, int]:
    """Map lower-case names to nodes, where only one node has that name."""
    folded: dict[str, int] = {}
    for node, name in enumerate(network.names):
        key = name.casefold()
        folded[key] = -1 if key in folded else node
    return folded


def _similar(word: str, network: Network) -> tuple[int, ...]:
    key = word.casefold()
    begins = [node for node, name in enumerate(network.names) if name.casefold().startswith(key)]
    contains = [node for node, name in enumerate(network.names) if key in name.casefold() and node not in set(begins)]
    return tuple((begins + contains)[:SUGGESTIONS])
