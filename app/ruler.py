"""What the resolution ruler shows: plain data of a sweep, kept in the workspace and sent to the browser."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.trust.sweep import Plateau, Sweep, SweepPoint


@dataclass(frozen=True, eq=False)
class RulerPoint:
    """One resolution of the ruler: its partition and figures; `None` where not known yet."""

    labels: NDArray[np.int32]
    modules: int
    low: int
    high: int
    modularity: float
    seed_ami: float | None = None
    noise_ami: float | None = None

    @classmethod
    def of(cls, point: SweepPoint) -> RulerPoint:
        """Take what the ruler needs from a point of a sweep."""
        return cls(
            point.labels,
            point.modules,
            point.low or point.modules,
            point.high or point.modules,
            point.modularity,
            _known(point.seed_ami),
            _known(point.noise_ami),
        )


@dataclass(frozen=True, eq=False)
class Ruler:
    """The ruler of one network and one question.

    Attributes
    ----------
    grid : tuple of float
        Resolutions, ascending.
    points : tuple of RulerPoint or None
        One per resolution; None where not ready.
    plateaus : sequence of mappings with `from, to, strength`
        Steady stretches, best first.
    suggestion : float or None
    reason : str
        One sentence.
    version : int
        Rises whenever a point is filled in, so that the browser knows when to ask again.
    done : bool
    """

    grid: tuple[float, ...]
    points: tuple[RulerPoint | None, ...]
    plateaus: Sequence[Mapping[str, float]] = ()
    suggestion: float | None = None
    reason: str = ""
    version: int = 0
    done: bool = False

    @classmethod
    def empty(cls, grid: Sequence[float]) -> Ruler:
        """Return a ruler of which nothing is ready."""
        return cls(tuple(grid), (None,) * len(grid))

    def filled(self, point: SweepPoint, *, over: bool = True) -> Ruler:
        """Return the ruler with one more point; one that is there already is replaced only where `over` says so."""
        place = int(np.argmin(np.abs(np.log(np.array(self.grid) / point.resolution))))
        if self.done or (self.points[place] is not None and not over):
            return self
        points = (*self.points[:place], RulerPoint.of(point), *self.points[place + 1 :])
        return replace(self, points=points, version=self.version + 1)

    def finished(self, sweep: Sweep) -> Ruler:
        """Return the ruler of the whole sweep."""
        return replace(
            self,
            points=tuple(RulerPoint.of(point) for point in sweep.points),
            plateaus=tuple(_stretch(plateau) for plateau in sweep.plateaus),
            suggestion=_known(sweep.suggestion.resolution),
            reason=sweep.suggestion.reason,
            version=self.version + 1,
            done=True,
        )

    def nearest(self, resolution: float) -> int:
        """Return the position of the ready point nearest to a resolution on the log scale; −1 where none is ready."""
        ready = [place for place, point in enumerate(self.points) if point is not None]
        return min(ready, key=lambda place: abs(math.log(self.grid[place] / resolution)), default=-1)

    def for_browser(self) -> dict[str, Any]:
        """Return what `corymb.ruler.draw` takes, without the marker."""
        return {
            "grid": list(self.grid),
            "modules": [point and point.modules for point in self.points],
            "low": [point and point.low for point in self.points],
            "high": [point and point.high for point in self.points],
            "plateaus": list(self.plateaus),
            "suggestion": self.suggestion,
            "reason": self.reason,
            "version": self.version,
            "busy": not self.done,
        }

    def to_arrays(self) -> dict[str, NDArray[Any]]:
        """Return a finished ruler as arrays for the workspace."""
        points = [point for point in self.points if point is not None]
        figures = [[p.modules, p.low, p.high, p.modularity, _nan(p.seed_ami), _nan(p.noise_ami)] for p in points]
        text = json.dumps(
            {"plateaus": list(map(dict, self.plateaus)), "suggestion": self.suggestion, "reason": self.reason}
        )
        return {
            "grid": np.array(self.grid),
            "labels": np.array([point.labels for point in points], np.int32),
            "figures": np.array(figures, np.float64),
            "text": np.frombuffer(text.encode(), np.uint8),
        }

    @classmethod
    def from_arrays(cls, arrays: Mapping[str, NDArray[Any]]) -> Ruler:
        """Return the ruler that `to_arrays` packed."""
        text = json.loads(arrays["text"].tobytes().decode())
        points = tuple(
            RulerPoint(labels, int(row[0]), int(row[1]), int(row[2]), float(row[3]), _known(row[4]), _known(row[5]))
            for labels, row in zip(arrays["labels"], arrays["figures"], strict=True)
        )
        return cls(
            tuple(arrays["grid"].tolist()),
            points,
            text["plateaus"],
            text["suggestion"],
            text["reason"],
            version=len(points),
            done=True,
        )


@dataclass(frozen=True)
class Question:
    """One of the two questions that the ruler can ask."""

    key: str
    label: str
    sentence: str
    unit: str
    start: float = field(default=1.0)


QUESTIONS = {
    question.key: question
    for question in (
        Question(
            "modularity",
            "wide neighbourhoods",
            "Ask this when you want broad neighbourhoods: genes joined more than their degrees would give by chance.",
            "resolution",
            1.0,
        ),
        Question(
            "cpm",
            "tight groups",
            "Ask this when you want complexes: groups whose members are joined to at least this share of one another.",
            "inside density",
            0.2,
        ),
    )
}


def _stretch(plateau: Plateau) -> dict[str, float]:
    return {
        "from": float(plateau.resolution_from),
        "to": float(plateau.resolution_to),
        "strength": float(np.clip(plateau.agreement, 0.0, 1.0)),
    }


def _known(value: float | None) -> float | None:
    return None if value is None or math.isnan(value) else float(value)


def _nan(value: float | None) -> float:
    return float("nan") if value is None else value
