"""A network as a folder of arrays that other processes map into memory."""

from __future__ import annotations

import json
import tempfile
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import Network


def store_network(network: Network, folder: Path) -> None:
    """Write a network into a new folder, whole or not at all; its parent folder must be there."""
    draft = Path(tempfile.mkdtemp(prefix="draft-", dir=folder.parent))
    np.save(draft / "sources.npy", network.sources)
    np.save(draft / "targets.npy", network.targets)
    if network.weights is not None:
        np.save(draft / "weights.npy", network.weights)
    words = {"names": network.names, "label": network.label, "provenance": dict(network.provenance)}
    (draft / "words.json").write_text(json.dumps(words), encoding="ascii")
    draft.rename(folder)


def load_network(folder: Path) -> Network:
    """Open a network that `store_network` wrote; its arrays stay on disk and are mapped into memory."""
    words = json.loads((folder / "words.json").read_text(encoding="ascii"))
    weights = folder / "weights.npy"
    return Network(
        tuple(words["names"]),
        _mapped(folder / "sources.npy"),
        _mapped(folder / "targets.npy"),
        _mapped(weights) if weights.exists() else None,
        words["label"],
        words["provenance"],
    )


def _mapped(path: Path) -> NDArray[Any]:
    """Return a read-only array over the file; a plain one, since some libraries refuse subclasses."""
    array: NDArray[Any] = np.load(path, mmap_mode="r").view(np.ndarray)
    return array
