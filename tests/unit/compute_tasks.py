"""Tasks for the tests of compute, in a file of their own since worker processes import them by name."""

from __future__ import annotations

import os
import signal
import time
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from analysis.errors import InputError
from analysis.methods import Leiden
from analysis.network import Network
from analysis.trust.nulls import rewire


@dataclass(frozen=True)
class Cluster:
    """One run on the network and one on a null network: everything random that tasks do."""

    seed: int

    def run(self, network: Network) -> bytes:
        method = Leiden(iterations=2)
        null = rewire(network, self.seed)
        parts = [method.labels(network, seed=self.seed), method.labels(null, seed=self.seed), null.edge_weights]
        return b"".join(np.ascontiguousarray(part).tobytes() for part in parts)


@dataclass(frozen=True)
class WhereAmI:
    """Returns the process and the identity of the network object and of its igraph view there."""

    pause: float = 0.0

    def run(self, network: Network) -> tuple[int, int, int]:
        time.sleep(self.pause)
        return os.getpid(), id(network), id(network.igraph)


@dataclass(frozen=True)
class Echo:
    """Returns what it holds."""

    value: Any

    def run(self, network: Network) -> Any:
        return self.value


@dataclass(frozen=True)
class Die:
    """Kills its own process the first `times` times, as the kernel does when memory runs out; then gives its value."""

    diary: str
    times: int
    value: int = 0

    def run(self, network: Network) -> int:
        with Path(self.diary).open("a") as diary:
            diary.write("x")
        if len(Path(self.diary).read_text()) <= self.times:
            os.kill(os.getpid(), signal.SIGKILL)
        return self.value


@dataclass(frozen=True)
class HoldInterpreter:
    """Notes its process and then computes for minutes in compiled code that never lets go of the interpreter lock."""

    folder: str

    def run(self, network: Network) -> int:
        (Path(self.folder) / str(os.getpid())).touch()
        return sum(range(10**11))


@dataclass(frozen=True)
class Wait:
    """Notes its process and waits."""

    folder: str
    seconds: float

    def run(self, network: Network) -> int:
        (Path(self.folder) / str(os.getpid())).touch()
        time.sleep(self.seconds)
        return os.getpid()


class TwoPartsError(Exception):
    """An exception that can be pickled but not read again: its constructor wants more than its message."""

    def __init__(self, where: str, what: str) -> None:
        super().__init__(f"{where}: {what}")


class HeldError(Exception):
    """An exception that cannot be pickled."""

    def __init__(self, message: str) -> None:
        super().__init__(message)
        self.held = lambda: None


@dataclass(frozen=True)
class Fail:
    """Fails in the way asked for."""

    way: str

    def run(self, network: Network) -> Any:
        if self.way == "input":
            raise InputError("a.tsv", "weight 'heavy'", "give a number", line=2)
        if self.way == "value":
            raise ValueError("the seventh value is odd")
        if self.way == "two parts":
            raise TwoPartsError("here", "this")
        if self.way == "held":
            raise HeldError("cannot travel")
        if self.way == "memory":
            raise MemoryError
        return lambda: None  # a result that cannot be pickled
