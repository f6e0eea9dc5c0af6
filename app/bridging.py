"""What the Bridges station asks for: the communities of every k, and the ranking of removals; begun once, kept."""

from __future__ import annotations

from analysis.bridges.removal import RemovalRanking, candidates, gather_ranking, rank_tasks
from analysis.compute import run_all
from analysis.errors import LimitError
from analysis.overlap.cliques import CLIQUE_SECONDS, too_long
from analysis.overlap.percolation import FindEveryK, Percolation
from analysis.progress import Progress, within
from app.desk import Desk

EVERY_K, RANKING = "every k", "removals"
RANKING_ARRAYS = ("nodes", "giant_lost", "modules_split", "efficiency_lost")
LEAST = 3


def start_every_k(desk: Desk, fingerprint: str) -> str | None:
    """Begin to look for the communities of every k, unless it is done; return the job's id, None where it is."""
    if every_k(desk, fingerprint) is not None or refusal(desk, fingerprint):
        return None
    network = desk.network(fingerprint)

    def work(progress: Progress) -> bool:
        limit = within(progress, CLIQUE_SECONDS, too_long(LEAST))
        try:
            found = run_all(desk.jobs.quick, network, [FindEveryK()], progress=limit, phrase="communities of every k")[
                0
            ]
        except LimitError as error:
            desk.workspace.remember(_mark(fingerprint), str(error))
            return False
        desk.workspace.save_arrays(EVERY_K, fingerprint, found.to_arrays())
        return True

    return desk.jobs.start(EVERY_K, fingerprint, work)


def every_k(desk: Desk, fingerprint: str | None) -> Percolation | None:
    """Return the communities of every k, None where they are not ready."""
    arrays = desk.workspace.arrays(EVERY_K, fingerprint) if fingerprint else None
    return None if arrays is None else Percolation.from_arrays(arrays)


def refusal(desk: Desk, fingerprint: str | None) -> str:
    """Return why the communities of every k were not found; empty where nothing stood against it."""
    return str(desk.workspace.recall(_mark(fingerprint)) or "") if fingerprint else ""


def start_ranking(desk: Desk, study_id: str) -> str | None:
    """Begin to rank the genes of a finished study by what their removal would change; None where nothing is to do."""
    study = desk.workspace.study(study_id)
    if study is None or ranking(desk, study_id) is not None:
        return None

    def work(progress: Progress) -> bool:
        progress(0.0, "choosing genes to take out")
        nodes = candidates(study.network, study.modules)
        tasks = rank_tasks(study.modules, nodes)
        phrase = f"taking out {len(nodes)} genes, one by one"
        rows = run_all(desk.jobs.long, study.network, tasks, progress=progress, phrase=phrase)
        found = gather_ranking(nodes, rows)
        desk.workspace.save_arrays(RANKING, study_id, {name: getattr(found, name) for name in RANKING_ARRAYS})
        return True

    return desk.jobs.start(RANKING, study_id, work)


def ranking(desk: Desk, study_id: str | None) -> RemovalRanking | None:
    """Return the ranking of removals of a study, None where it is not ready."""
    arrays = desk.workspace.arrays(RANKING, study_id) if study_id else None
    return None if arrays is None else RemovalRanking(**{name: arrays[name] for name in RANKING_ARRAYS})


def is_on_its_way(desk: Desk, kind: str, key: str | None) -> bool:
    """Whether it is being worked on."""
    return any((job.kind, job.key) == (kind, key) for job in desk.jobs.running())


def _mark(fingerprint: str | None) -> str:
    return f"no every k {fingerprint}"
