"""The version of corymb, and of the libraries that its figures depend on."""

from __future__ import annotations

import platform
from importlib import metadata

VERSION = "0.1.0"
"""Kept equal to the version in pyproject.toml by a test, so that a checkout that is not installed knows it too."""

LIBRARIES = ("igraph", "leidenalg", "networkx", "numpy", "scipy", "pandas")


def versions() -> dict[str, str]:
    """Return the versions of corymb, Python and the libraries, without importing any of them."""
    return {
        "corymb": VERSION,
        "python": platform.python_version(),
        **{library: metadata.version(library) for library in LIBRARIES},
    }
