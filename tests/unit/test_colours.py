"""Colours follow modules."""

from __future__ import annotations

import numpy as np

from analysis.modules import Modules
from app.map.colours import PALETTE, follow, make_anchor, pack_colours
from tests.planted import planted_network


def anchored():
    planted = planted_network([40, 30, 20, 10], seed=3)
    labels = np.maximum(planted.labels, 0)
    return planted.network, labels, make_anchor(planted.network, labels)


def test_the_anchor_keeps_its_own_hues():
    _, labels, anchor = anchored()
    assert follow(anchor, Modules.from_labels(labels)).tolist() == anchor.hues.tolist() == [0, 1, 2, 3]


def test_a_module_that_splits_gives_its_hue_to_its_larger_part_alone():
    _, labels, anchor = anchored()
    finer = labels.copy()
    largest = np.flatnonzero(labels == np.bincount(labels).argmax())
    finer[largest[:10]] = labels.max() + 1
    modules = Modules.from_labels(finer)
    hues = follow(anchor, modules)
    kept = next(place for place, group in enumerate(modules.members) if set(group) == set(largest[10:].tolist()))
    part = next(place for place, group in enumerate(modules.members) if set(group) == set(largest[:10].tolist()))
    assert hues[kept] == 0
    assert hues[part] != 0
    others = [hue for place, hue in enumerate(hues.tolist()) if place not in {kept, part}]
    assert sorted(others) == [1, 2, 3]


def test_merged_modules_take_the_hue_of_the_larger_one():
    _, labels, anchor = anchored()
    sizes = np.bincount(labels)
    first, second = np.argsort(-sizes)[:2]
    merged = np.where(labels == second, first, labels)
    modules = Modules.from_labels(merged)
    assert follow(anchor, modules)[0] == 0


def test_what_the_browser_gets_reads_back():
    network, labels, anchor = anchored()
    modules = Modules.from_labels(labels)
    packed = pack_colours(anchor, modules)
    count, nodes = np.frombuffer(packed[:8], "<u4")
    assert (count, nodes) == (4, network.node_count)
    hues = np.frombuffer(packed[8 : 8 + 2 * count], "<u2")
    assert hues.max() < len(PALETTE)
    np.testing.assert_array_equal(np.frombuffer(packed[8 + 2 * count :], "<u2"), modules.labels)


def test_a_gene_in_no_module_is_marked():
    _, labels, anchor = anchored()
    partial = labels.copy()
    partial[:5] = -1
    packed = pack_colours(anchor, Modules.from_labels(partial))
    count = int(np.frombuffer(packed[:4], "<u4")[0])
    assert (np.frombuffer(packed[8 + 2 * count :], "<u2")[:5] == 65535).all()
