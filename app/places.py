"""Where the files are that come with corymb: in an installed copy inside the package, in a checkout at its top."""

from __future__ import annotations

from pathlib import Path

from analysis.errors import CorymbError

PACKAGE = Path(__file__).resolve().parent


def assets_folder() -> Path:
    """Return the folder of style sheets and scripts."""
    return shipped_folder("assets", PACKAGE)


def sample_folder() -> Path:
    """Return the folder of the sample networks."""
    return shipped_folder("sample_networks", PACKAGE)


def shipped_folder(name: str, package: Path) -> Path:
    """Return a folder that comes with the package.

    Raises
    ------
    CorymbError
        Where it is in neither place.
    """
    shipped = package / "shipped" / name
    if shipped.is_dir():
        return shipped
    checkout = package.parent
    # In an installed copy the folder above belongs to all packages; only a checkout has this file there.
    if (checkout / "pyproject.toml").is_file() and (checkout / name).is_dir():
        return checkout / name
    raise CorymbError(f"{shipped}: is missing; this copy of corymb is not whole, install it again")
