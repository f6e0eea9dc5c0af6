"""The ruler's data: filled point by point, kept, read back."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest

from analysis.compute import InProcess
from analysis.network import Network
from analysis.trust.sweep import SweepSettings, preview_points, run_sweep
from app.ruler import Ruler

SETTINGS = SweepSettings(steps=8, runs=2, noisy_runs=1)


@pytest.fixture(scope="module")
def swept():
    graph = nx.les_miserables_graph()
    network = Network.from_edges(list(graph.edges))
    return network, run_sweep(network, SETTINGS, InProcess())


def test_points_fill_in_and_the_version_rises(swept):
    network, sweep = swept
    ruler = Ruler.empty(sweep.resolutions.tolist())
    assert ruler.nearest(1.0) == -1
    for place, point in enumerate(preview_points(network, "modularity", sweep.resolutions)):
        ruler = ruler.filled(point, over=False)
        assert ruler.version == place + 1
    assert all(point is not None for point in ruler.points)
    assert not ruler.done


def test_a_preview_never_replaces_what_the_sweep_found(swept):
    network, sweep = swept
    ruler = Ruler.empty(sweep.resolutions.tolist()).filled(sweep.points[3])
    preview = list(preview_points(network, "modularity", sweep.resolutions))[3]
    assert ruler.filled(preview, over=False) is ruler
    done = ruler.finished(sweep)
    assert done.filled(preview) is done


def test_a_finished_ruler_reads_back_as_it_was(swept):
    _, sweep = swept
    ruler = Ruler.empty(sweep.resolutions.tolist()).finished(sweep)
    back = Ruler.from_arrays(ruler.to_arrays())
    assert back.done
    assert back.for_browser() | {"version": 0} == ruler.for_browser() | {"version": 0}
    for one, other in zip(back.points, ruler.points, strict=True):
        np.testing.assert_array_equal(one.labels, other.labels)


def test_the_browser_gets_plain_values(swept):
    _, sweep = swept
    sent = Ruler.empty(sweep.resolutions.tolist()).finished(sweep).for_browser()
    assert len(sent["grid"]) == len(sent["modules"]) == len(sent["low"]) == 8
    assert all(
        low <= count <= high for low, count, high in zip(sent["low"], sent["modules"], sent["high"], strict=True)
    )
    assert sent["suggestion"] in sent["grid"]
    assert not sent["busy"]
