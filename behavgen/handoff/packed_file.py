"""PackedFile: a text at its place in the package."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["PackedFile"]


@dataclass(frozen=True, slots=True, kw_only=True)
class PackedFile:
    """A path relative to the package's folder, and the whole text.

    Parameters
    ----------
    path : str
        With forward slashes.
    text : str
    executable : bool
        Whether it is a program.
    """

    path: str
    text: str
    executable: bool = False
