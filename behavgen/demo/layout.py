"""Lays the demo project out in a folder of the user's."""

from __future__ import annotations

import os
from pathlib import Path

from behavgen.errors import Fault, ProjectError

__all__ = ["copy_demo"]


def _demo_files() -> tuple[Path, ...]:
    """Return the files of the demo project, relative to this package's folder."""
    here = Path(__file__).parent
    tables = sorted(path for path in (here / "tables").rglob("*") if path.is_file())
    return (*(path.relative_to(here) for path in tables), Path("behavgen.toml"))


def copy_demo(folder: Path) -> Path:
    """Lay the demo project out in `folder`.

    Files already there and unchanged are left alone, so the demo may be run again in
    place.

    Parameters
    ----------
    folder : Path
        Created when missing.

    Returns
    -------
    Path
        The project file.

    Raises
    ------
    ProjectError
        When a file of the demo is there with other content, all such files named, or
        when the folder cannot be written.
    """
    here = Path(__file__).parent
    contents = {folder / name: (here / name).read_bytes() for name in _demo_files()}
    try:
        faults = [_not_ours(path) for path, content in contents.items() if _differs(path, content)]
        if faults:
            raise ProjectError(*faults)
        for path, content in contents.items():
            _write_whole(path, content)
    except OSError as error:
        fault = Fault(
            file=str(error.filename or folder),
            what=f"cannot be written: {error.strerror}",
            allowed="choose another folder",
        )
        raise ProjectError(fault) from error
    return folder / "behavgen.toml"


def _differs(path: Path, content: bytes) -> bool:
    return path.exists() and (path.is_dir() or path.read_bytes() != content)


def _not_ours(path: Path) -> Fault:
    return Fault(
        file=str(path),
        what="is there already and is not the demo's",
        allowed="choose another folder or move it away",
    )


def _write_whole(path: Path, content: bytes) -> None:
    if path.exists():
        return
    path.parent.mkdir(parents=True, exist_ok=True)
    unfinished = path.with_name(f"{path.name}.unfinished")
    unfinished.write_bytes(content)
    os.replace(unfinished, path)
