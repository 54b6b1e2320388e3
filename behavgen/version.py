"""Which version of the program this is."""

from __future__ import annotations

from importlib.metadata import PackageNotFoundError, version

__all__ = ["program_version"]


def program_version() -> str:
    """Return the installed version, or words where the package is not installed."""
    try:
        return version("behavgen")
    except PackageNotFoundError:
        return "from a source tree"
