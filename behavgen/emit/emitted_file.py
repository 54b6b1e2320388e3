"""EmittedFile: a text to be written under a cell's output folder."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["EmittedFile"]


@dataclass(frozen=True, slots=True, kw_only=True)
class EmittedFile:
    """A file name relative to the cell's output folder, and its whole text."""

    path: str
    text: str
