"""One folder and one archive, whole or not at all; the same files give the same bytes."""

from __future__ import annotations

import gzip
import io
import os
import shutil
import tarfile
from collections.abc import Sequence
from pathlib import Path

from behavgen.errors import Fault, ProjectError
from behavgen.files import write_whole
from behavgen.handoff.manifest import MANIFEST
from behavgen.handoff.packed_file import PackedFile

__all__ = ["archive_bytes", "write_package"]

_YEAR_1980 = 315_532_800
"""Seconds from 1970 to 1980, the first time that every archive format can state."""
_LEVEL = 9


def archive_bytes(files: Sequence[PackedFile], *, folder: str) -> bytes:
    """Return a gzipped tar archive with everything under one folder.

    Names are sorted, owners empty, modes fixed; all times are SOURCE_DATE_EPOCH
    (see reproducible-builds.org) or the start of 1980.

    Parameters
    ----------
    files : sequence of PackedFile
    folder : str
        Name of the folder.
    """
    tar = io.BytesIO()
    with tarfile.open(fileobj=tar, mode="w", format=tarfile.USTAR_FORMAT) as archive:
        for file in sorted(files, key=lambda file: file.path):
            content = file.text.encode("utf-8")
            entry = tarfile.TarInfo(f"{folder}/{file.path}")
            entry.size, entry.mtime = len(content), _moment()
            entry.mode = _mode(file)
            archive.addfile(entry, io.BytesIO(content))
    return gzip.compress(tar.getvalue(), compresslevel=_LEVEL, mtime=_moment())


def write_package(files: Sequence[PackedFile], *, place: Path, name: str) -> tuple[Path, Path]:
    """Write the folder and the archive beside it; what was there before is replaced.

    Parameters
    ----------
    files : sequence of PackedFile
    place : Path
        Where both go.
    name : str
        Of the folder, and of the archive before its suffix.

    Returns
    -------
    folder, archive : Path

    Raises
    ------
    ProjectError
        When they cannot be written, or a folder of this name is none of ours.
    """
    folder, archive = place / name, place / f"{name}.tar.gz"
    if folder.exists() and not (folder / MANIFEST).is_file():
        fault = Fault(
            file=str(folder), what="is there already and is no package", allowed="move it away"
        )
        raise ProjectError(fault)
    try:
        _write_folder(files, folder)
    except OSError as error:
        fault = Fault(
            file=str(folder),
            what=f"cannot be written: {error.strerror or error}",
            allowed="choose a folder that can be written",
        )
        raise ProjectError(fault) from error
    write_whole(archive, archive_bytes(files, folder=name))
    return folder, archive


def _write_folder(files: Sequence[PackedFile], folder: Path) -> None:
    unfinished = folder.with_name(f".{folder.name}.{os.getpid()}.unfinished")
    replaced = folder.with_name(f".{folder.name}.{os.getpid()}.replaced")
    try:
        for file in files:
            path = unfinished / file.path
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_bytes(file.text.encode("utf-8"))
            path.chmod(_mode(file))
        if folder.exists():
            folder.replace(replaced)
        unfinished.replace(folder)
    finally:
        shutil.rmtree(unfinished, ignore_errors=True)
        shutil.rmtree(replaced, ignore_errors=True)


def _mode(file: PackedFile) -> int:
    return 0o755 if file.executable else 0o644


def _moment() -> int:
    given = os.environ.get("SOURCE_DATE_EPOCH", "")
    return int(given) if given.isdecimal() else _YEAR_1980
