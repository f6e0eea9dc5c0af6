"""The noise curve: nothing lost without noise, more with more, chance told from structure, streamed, seeded."""

from __future__ import annotations

import networkx
import numpy as np
import pytest

from analysis.agreement import adjusted_mutual_information, variation_of_information
from analysis.compute import InProcess, LocalProcesses
from analysis.errors import Cancelled, SettingError
from analysis.methods import Leiden
from analysis.methods.clique_percolation import CliquePercolation
from analysis.network import Network
from analysis.trust.noise import LEFT_OUT, REWIRED
from analysis.trust.noise_curve import CurveRun, NoiseCurve, noise_curve
from analysis.trust.nulls import edges_in_place, rewire


def network_of(graph: networkx.Graph) -> Network:
    pairs = np.array(list(graph.edges), np.int64).reshape(-1, 2)
    return Network.from_indices(tuple(f"g{node:05d}" for node in range(graph.number_of_nodes())), pairs)


PLANTED = network_of(networkx.planted_partition_graph(8, 25, 0.5, 0.02, seed=1))
RANDOM = network_of(networkx.gnm_random_graph(200, 900, seed=2))


@pytest.mark.parametrize("kind", [REWIRED, LEFT_OUT])
def test_planted_modules_hold_and_random_ones_drift(kind: str) -> None:
    planted = noise_curve(PLANTED, Leiden(), seed=1, compute=InProcess(), kind=kind)
    assert planted.vi.shape == planted.null_ami.shape == (7, 5)
    assert planted.complete
    # planted modules are found again at a tenth of the edges, those of random networks are not
    assert planted.ami[2].mean() > 0.9
    assert planted.null_ami[2].mean() < 0.5
    assert np.all(planted.vi.mean(axis=1) < planted.null_vi.mean(axis=1))
    # the more noise, the further away (Karrer, Levina & Newman 2008, Fig. 2)
    assert planted.vi[-1].mean() > planted.vi[0].mean()
    assert "stay nearer" in planted.sentence()
    assert kind in planted.sentence()
    random = noise_curve(RANDOM, Leiden(), seed=1, compute=InProcess(), kind=kind)
    assert "not robust" in random.sentence()
    assert np.abs(random.vi.mean() - random.null_vi.mean()) < 0.05


def test_the_curve_is_what_its_definition_says() -> None:
    curve = noise_curve(PLANTED, Leiden(), seed=4, compute=InProcess(), shares=(0.3,), copies=2)
    tasks = recorded(PLANTED, shares=(0.3,), copies=2, seed=4)
    labels = {(task.null_seed, task.share, task.seed): task.run(PLANTED) for task in tasks}
    references = {null: found for (null, share, _), found in labels.items() if share == 0}
    assert len(references) == 3  # the network's own, and one for each of two null networks
    for null, reference in references.items():
        copies = [found for (of, share, _), found in labels.items() if of == null and share > 0]
        vi = [variation_of_information(reference, found) / np.log(200) for found in copies]
        ami = [adjusted_mutual_information(reference, found) for found in copies]
        own, other = (curve.vi, curve.ami) if null is None else (curve.null_vi, curve.null_ami)
        assert set(vi) <= set(own.ravel())
        assert set(ami) <= set(other.ravel())


class Recorder(InProcess):
    """Keeps the tasks that it is given."""

    def stream(self, network, tasks, **words):
        self.tasks = list(tasks)
        return super().stream(network, tasks, **words)


def recorded(network: Network, **words) -> list[CurveRun]:
    recorder = Recorder()
    noise_curve(network, Leiden(), compute=recorder, **words)
    return recorder.tasks


def test_runs_on_null_networks_begin_from_null_networks() -> None:
    tasks = recorded(PLANTED, shares=(0.1,), copies=3, seed=9)
    nulls = {task.null_seed for task in tasks if task.null_seed is not None}
    assert len(nulls) == 3
    for null in nulls:
        assert edges_in_place(PLANTED, rewire(PLANTED, null)) < 0.2


def test_a_copy_does_not_depend_on_how_many_there_are() -> None:
    few = noise_curve(PLANTED, Leiden(), seed=5, compute=InProcess(), shares=(0.1, 0.4), copies=2)
    more = noise_curve(PLANTED, Leiden(), seed=5, compute=InProcess(), shares=(0.1, 0.2, 0.4), copies=3)
    assert np.array_equal(few.vi, more.vi[[0, 2], :2])
    assert np.array_equal(few.null_ami, more.null_ami[[0, 2], :2])


def test_points_stream_in_and_the_whole_curve_shows_early() -> None:
    seen: list[NoiseCurve] = []
    final = noise_curve(
        PLANTED, Leiden(), seed=2, compute=InProcess(), shares=(0.1, 0.3), copies=3, on_point=seen.append
    )
    assert len(seen) == 2 * 2 * 3
    filled = [int(np.isfinite(np.stack([curve.vi, curve.null_vi])).sum()) for curve in seen]
    assert filled == list(range(1, 13))
    assert np.isfinite(seen[3].vi[:, 0]).all()  # after four points: a first copy at every share, on both curves
    assert np.isfinite(seen[3].null_vi[:, 0]).all()
    assert "not all copies" in seen[3].sentence()
    assert np.array_equal(seen[-1].vi, final.vi)


def test_two_processes_give_the_same_bytes() -> None:
    words = {"seed": 3, "shares": (0.05, 0.2), "copies": 2}
    here = noise_curve(PLANTED, Leiden(), compute=InProcess(), **words)
    compute = LocalProcesses(2)
    there = noise_curve(PLANTED, Leiden(), compute=compute, **words)
    compute.close()
    for name in ("vi", "ami", "null_vi", "null_ami"):
        assert getattr(here, name).tobytes() == getattr(there, name).tobytes()


def test_a_stop_is_heard() -> None:
    def stop(fraction: float, _phrase: str) -> None:
        if fraction > 0.3:
            raise Cancelled("stop")

    with pytest.raises(Cancelled):
        noise_curve(PLANTED, Leiden(), seed=1, compute=InProcess(), progress=stop)


def test_covers_and_networks_without_edges() -> None:
    cover = noise_curve(PLANTED, CliquePercolation(k=3), seed=1, compute=InProcess(), shares=(0.1,), copies=2)
    assert cover.complete
    empty = Network.from_edges([], nodes=["a", "b", "c"])
    curve = noise_curve(empty, Leiden(), seed=1, compute=InProcess(), shares=(0.1,), copies=2)
    assert np.all(curve.vi == 0)
    assert np.all(curve.z == 0)
    assert "not robust" in curve.sentence()


@pytest.mark.parametrize("shares", [(), (0.0, 0.1), (0.2, 0.1), (0.1, 0.1), (0.5, 1.0), (-0.1,), (float("nan"),)])
def test_shares_out_of_range_are_refused(shares: tuple[float, ...]) -> None:
    with pytest.raises(SettingError):
        noise_curve(PLANTED, Leiden(), seed=1, compute=InProcess(), shares=shares)


def test_one_copy_and_an_unknown_kind_are_refused() -> None:
    with pytest.raises(SettingError, match="2 copies or more"):
        noise_curve(PLANTED, Leiden(), seed=1, compute=InProcess(), copies=1)
    with pytest.raises(SettingError, match="noise of kind 'shaken'"):
        noise_curve(PLANTED, Leiden(), seed=1, compute=InProcess(), kind="shaken")
