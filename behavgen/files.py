"""Writes files whole or not at all, and tells one content from another by its hash."""

from __future__ import annotations

import hashlib
import os
from glob import glob, has_magic
from pathlib import Path

from behavgen.errors import Fault, ProjectError

__all__ = ["files_named", "sha256_of_file", "sha256_of_text", "write_whole"]


def files_named(folder: Path, pattern: str) -> tuple[Path, ...]:
    """Return the file of that name, else the files that match it as a glob, sorted.

    Parameters
    ----------
    folder : Path
        Where relative patterns begin.
    pattern : str
        A path or a glob; absolute ones too.
    """
    literal = folder / pattern
    if literal.is_file():
        return (literal,)
    if not has_magic(pattern):
        return ()
    names = sorted(glob(pattern, root_dir=folder, recursive=True))  # noqa: PTH207  absolute ones
    return tuple(folder / name for name in names if (folder / name).is_file())


def write_whole(path: Path, content: str | bytes) -> None:
    """Write a file so that it appears whole or not at all.

    Parameters
    ----------
    path : Path
        Missing folders above it are made.
    content : str or bytes
        Text is written as UTF-8, its line ends as they are.

    Raises
    ------
    ProjectError
        When the folder or the file cannot be written; nothing is left behind.
    """
    unfinished = path.with_name(f".{path.name}.{os.getpid()}.unfinished")
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        try:
            unfinished.write_bytes(content.encode("utf-8") if isinstance(content, str) else content)
            unfinished.replace(path)
        finally:
            unfinished.unlink(missing_ok=True)
    except OSError as error:
        fault = Fault(
            file=str(path),
            what=f"cannot be written: {error.strerror or error}",
            allowed="choose a folder that can be written",
        )
        raise ProjectError(fault) from error


def sha256_of_text(text: str) -> str:
    """Return the hash of the bytes that `write_whole` would write."""
    return hashlib.sha256(text.encode("utf-8")).hexdigest()


def sha256_of_file(path: Path) -> str | None:
    """Return the hash of a file's bytes, or None when it is missing or cannot be read."""
    try:
        with path.open("rb") as file:
            return hashlib.file_digest(file, "sha256").hexdigest()
    except OSError:
        return None
