"""What a window shows: the place, the thing picked, and the answers at hand. Passed to every station."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from analysis.network import Network
from analysis.study import NullDraws, Study
from app.desk import Desk


@dataclass(frozen=True, eq=False)
class View:
    """One window's state, as a station needs it.

    Attributes
    ----------
    desk : Desk
    fingerprint : str or None
        Of the network at hand.
    wanted : mapping
        Settings of the clustering that the window asks for: `method, quality, resolution, k, seed, nulls`.
    study : Study or None
        The finished study shown, with names.
    study_id : str or None
    fault : str
        Message of the last error; empty for none.
    draws : NullDraws or None
        What has come of the null networks of a study on its way.
    """

    desk: Desk
    fingerprint: str | None
    wanted: Mapping[str, Any]
    study: Study | None
    study_id: str | None
    fault: str = ""
    draws: NullDraws | None = None

    @property
    def network(self) -> Network | None:
        """Return the network at hand."""
        return self.desk.network(self.fingerprint) if self.fingerprint else None

    @property
    def answered(self) -> bool:
        """Whether the study shown is the one that the window asks for."""
        if self.study is None:
            return False
        settings = self.study.settings
        keys = ["method", "seed"]
        keys += ["resolution", "show"] if settings.method in {"leiden", "louvain"} else []
        keys += ["quality"] if settings.method == "leiden" else []
        keys += ["k"] if settings.method == "clique-percolation" else []
        keys += ["keep"] if settings.method == "harvest" else []
        return all(getattr(settings, key) == self.wanted.get(key) for key in keys)

    def module_of(self, pick: Mapping[str, Any]) -> int:
        """Return the module that a pick means in the clustering shown; −1 where it is gone.

        A pick remembers the best-connected gene of its module, so that the module under discussion is still the one
        meant after a re-clustering has numbered the modules anew.
        """
        if self.study is None:
            return -1
        index, leader = int(pick.get("index", -1)), pick.get("leader")
        modules = self.study.modules
        if leader is None:
            return index if index < len(modules) else -1
        if 0 <= index < len(modules) and leader in modules.members[index]:
            return index
        return int(modules.labels[int(leader)]) if int(leader) < modules.node_count else -1

    def hues(self) -> Sequence[int]:
        """Return the hue of every module of the study shown."""
        from app.map.colours import follow

        drawing = self.desk.drawing(self.fingerprint) if self.fingerprint else None
        if drawing is None or self.study is None:
            return []
        return [int(hue) for hue in follow(drawing[1], self.study.modules)]


@dataclass(frozen=True)
class Pane:
    """What a station or a passport puts into the reading pane.

    Attributes
    ----------
    title : str
        Of the place, for the crumb line.
    body : list of components
    actions : list of components
        Buttons that stay in view at the pane's end.
    """

    title: str
    body: list[Any]
    actions: list[Any]
