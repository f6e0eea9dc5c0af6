"""Noisy copies: what goes, what stays, and that the copy is the same everywhere."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest

from analysis.errors import SettingError
from analysis.methods import Leiden
from analysis.network import Network
from analysis.trust.noise import LEFT_OUT, REWIRED, Noise, NoisyRun, leave_out
from tests.planted import from_networkx


def edges(network: Network) -> dict[tuple[int, int], float]:
    ends = zip(network.sources.tolist(), network.targets.tolist(), strict=True)
    return dict(zip(ends, network.edge_weights.tolist(), strict=True))


@pytest.fixture(scope="module")
def miserables() -> Network:
    return from_networkx(nx.les_miserables_graph(), weight="weight")


@pytest.mark.parametrize("share", [0.0, 0.02, 0.1, 0.35, 0.999])
def test_exactly_the_share_is_left_out(miserables, share):
    copy = leave_out(miserables, share, seed=4)
    assert miserables.edge_count - copy.edge_count == round(share * miserables.edge_count)
    assert copy.names == miserables.names
    assert edges(copy).items() <= edges(miserables).items()  # weights stay with their edges


def test_every_edge_goes_as_often_as_any_other(miserables):
    gone = np.zeros(miserables.edge_count)
    kept_of = {edge: place for place, edge in enumerate(edges(miserables))}
    runs = 400
    for seed in range(runs):
        kept = [kept_of[edge] for edge in edges(leave_out(miserables, 0.25, seed))]
        gone += np.isin(np.arange(miserables.edge_count), kept, invert=True)
    # binomial with p = 0.25: five standard deviations around the mean hold all 254 edges
    spread = 5 * np.sqrt(runs * 0.25 * 0.75)
    assert np.all(np.abs(gone - runs * 0.25) < spread)


def test_the_same_seed_gives_the_same_copy(miserables):
    assert leave_out(miserables, 0.2, 7) == leave_out(miserables, 0.2, 7)
    assert leave_out(miserables, 0.2, 7) != leave_out(miserables, 0.2, 8)


def test_rewired_copies_keep_degrees(miserables):
    copy = Noise(0.3, 5, REWIRED).apply(miserables)
    assert np.array_equal(copy.degree, miserables.degree)
    assert copy != miserables
    assert Noise(0.3, 5, LEFT_OUT).apply(miserables) == leave_out(miserables, 0.3, 5)


def test_no_noise_is_the_network_itself(miserables):
    assert Noise(0.0, 5).apply(miserables) is miserables


def test_a_noisy_run_without_noise_is_a_plain_run(miserables):
    method = Leiden()
    assert np.array_equal(NoisyRun(method, Noise(0.0, 1), seed=9).run(miserables), method.labels(miserables, seed=9))
    noisy = NoisyRun(method, Noise(0.2, 1), seed=9)
    assert np.array_equal(noisy.run(miserables), method.labels(leave_out(miserables, 0.2, 1), seed=9))


@pytest.mark.parametrize("share", [-0.1, 1.0, float("nan")])
def test_a_share_out_of_range_is_refused(miserables, share):
    with pytest.raises(SettingError, match="below 1"):
        leave_out(miserables, share, 1)
    with pytest.raises(SettingError, match="below 1"):
        Noise(share, 1)


def test_an_unknown_kind_is_refused():
    with pytest.raises(SettingError, match="left out"):
        Noise(0.1, 1, "shaken")
