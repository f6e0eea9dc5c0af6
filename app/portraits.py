"""Portraits of networks: begun once, shown as their sections come in, kept in the workspace."""

from __future__ import annotations

import logging

from analysis.portrait import Portrait, run_portrait
from app.desk import Desk
from app.jobs import JobProgress
from app.workspace.encoding import result_from_arrays, result_to_arrays

KIND = "portrait"
logger = logging.getLogger(__name__)


def start_portrait(desk: Desk, fingerprint: str) -> str | None:
    """Begin the portrait of a network, unless it is done; return the job's id, None where nothing is to do."""
    if is_drawn(desk, fingerprint) and portrait_of(desk, fingerprint) is not None:
        return None
    network = desk.network(fingerprint)

    def work(progress: JobProgress) -> Portrait:
        portrait = run_portrait(
            network,
            compute=desk.jobs.long,
            first=desk.jobs.quick,
            progress=progress,
            on_section=progress.publish,
        )
        desk.workspace.save_arrays(KIND, fingerprint, result_to_arrays(portrait))
        desk.workspace.remember(_mark(fingerprint), True)
        return portrait

    return desk.jobs.start(KIND, fingerprint, work)


def portrait_of(desk: Desk, fingerprint: str | None) -> Portrait | None:
    """Return the portrait of a network as far as it has come, None where there is nothing of it."""
    if not fingerprint:
        return None
    for job in desk.jobs.running():
        if (job.kind, job.key) == (KIND, fingerprint):
            found = desk.jobs.items(job.id)
            return found[-1] if found else None
    arrays = desk.workspace.arrays(KIND, fingerprint)
    if arrays is None:
        return None
    try:
        portrait = result_from_arrays(arrays)
    except (KeyError, TypeError) as error:
        logger.warning("a portrait of another version is drawn again: %s", error)
        return None
    return portrait if isinstance(portrait, Portrait) else None


def is_drawn(desk: Desk, fingerprint: str | None) -> bool:
    """Whether the portrait of a network is complete."""
    return bool(fingerprint) and bool(desk.workspace.recall(_mark(str(fingerprint))))


def is_on_its_way(desk: Desk, fingerprint: str | None) -> bool:
    """Whether the portrait of a network is being worked on."""
    return any((job.kind, job.key) == (KIND, fingerprint) for job in desk.jobs.running())


def _mark(fingerprint: str) -> str:
    return f"portrait {fingerprint}"
