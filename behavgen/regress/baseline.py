"""The recorded models: one model file a cell, and an index of what belongs together.

    baseline/
      baseline.json            every cell's model and tables by their hashes
      <cell>.model.json        as `behavgen fit` wrote it

All of it is sorted text, meant to be kept under version control and read as
differences. The index is written last: files that it does not vouch for were left by
a record that did not come to its end, or changed by hand, and are refused.
"""

from __future__ import annotations

import json
import os
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

from behavgen.errors import BehavgenError, Fault, ModelFileError, ProjectError
from behavgen.files import sha256_of_file
from behavgen.model import ComparatorModel
from behavgen.model_file import load_model

__all__ = [
    "INDEX_FILE",
    "ToRecord",
    "has_baseline",
    "read_baseline",
    "recorded_models",
    "write_baseline",
]

INDEX_FILE = "baseline.json"
_FORMAT = 1
_RECORD = "record the present models with: behavgen baseline"


@dataclass(frozen=True, slots=True, kw_only=True)
class ToRecord:
    """A model file to record, and the hashes of the tables behind it by their files."""

    file: Path
    tables: Mapping[str, str]


def has_baseline(folder: Path) -> bool:
    """Tell whether anything was recorded."""
    return (folder / INDEX_FILE).is_file()


def recorded_models(folder: Path) -> dict[str, str]:
    """Return the recorded cells, sorted, and the hashes of their models.

    Raises
    ------
    ProjectError
        When nothing was recorded.
    ModelFileError
        When the index cannot be read.
    """
    return {cell: str(entry["model"]) for cell, entry in sorted(_index(folder).items())}


def read_baseline(folder: Path, cell: str) -> ComparatorModel | None:
    """Return a cell's recorded model, None when there is none.

    Raises
    ------
    ModelFileError
        When it, or the index, cannot be read or is not what was recorded.
    """
    noted = _index(folder).get(cell) if has_baseline(folder) else None
    if noted is None:
        return None
    file = folder / _model_name(cell)
    found = sha256_of_file(file)
    if found != noted["model"]:
        what = "missing" if found is None else "not the model that was recorded"
        raise ModelFileError(Fault(file=str(file), what=what, allowed=f"restore it, or {_RECORD}"))
    return load_model(file)


def write_baseline(
    folder: Path, models: Mapping[str, ToRecord], *, keep: frozenset[str] = frozenset()
) -> tuple[str, ...]:
    """Record models, all or none.

    Parameters
    ----------
    folder : Path
    models : mapping
        Cell to what is to be recorded of it.
    keep : frozenset of str
        Recorded cells that stay as they are besides; the others are forgotten.

    Returns
    -------
    tuple of str
        Cells whose record changed, sorted.

    Raises
    ------
    ProjectError
        When something cannot be read or written; then nothing has changed.
    ModelFileError
        When the present index cannot be read although some of it is to be kept.
    """
    known = _present(folder, needed=bool(keep))
    kept = {cell: entry for cell, entry in known.items() if cell in keep}
    fresh: dict[str, dict[str, object]] = {
        cell: {"model": sha256_of_file(one.file), "tables": dict(one.tables)}
        for cell, one in models.items()
    }
    index = {**kept, **fresh}
    text = json.dumps({"cells": index, "format": _FORMAT}, indent=2, sort_keys=True) + "\n"
    contents: dict[str, Path | str] = {_model_name(c): one.file for c, one in models.items()}
    _write_together(folder, {**contents, INDEX_FILE: text})
    forgotten = known.keys() - index.keys()
    for cell in forgotten:
        (folder / _model_name(cell)).unlink(missing_ok=True)
    changed = {cell for cell, entry in fresh.items() if known.get(cell) != entry}
    return tuple(sorted(changed | forgotten))


def _model_name(cell: str) -> str:
    return f"{cell}.model.json"


def _write_together(folder: Path, contents: Mapping[str, Path | str]) -> None:
    """Write texts and copies of files in their order, all or none.

    What stood there before is set aside until everything has its place.
    """
    mark = f".{os.getpid()}.unfinished"
    staged = {name: folder / f".{name}{mark}" for name in contents}
    aside = {name: folder / f".{name}.before{mark}" for name in contents}
    placed: list[str] = []
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name, content in contents.items():
            data = content.encode("utf-8") if isinstance(content, str) else content.read_bytes()
            staged[name].write_bytes(data)
        for name in contents:
            placed.append(name)
            if (folder / name).exists():
                (folder / name).replace(aside[name])
            staged[name].replace(folder / name)
    except OSError as error:
        for name in placed:
            _put_back(folder / name, aside[name])
        what = f"cannot be written: {error.strerror or error}"
        allowed = "choose another folder with `baseline` under [project]"
        raise ProjectError(Fault(file=str(folder), what=what, allowed=allowed)) from error
    finally:
        for file in staged.values():
            with suppress(OSError):
                file.unlink(missing_ok=True)
    for file in aside.values():
        file.unlink(missing_ok=True)


def _put_back(file: Path, aside: Path) -> None:
    with suppress(OSError):
        if aside.exists():
            aside.replace(file)
        else:
            file.unlink(missing_ok=True)


_Entry = dict[str, object]


def _present(folder: Path, *, needed: bool) -> dict[str, _Entry]:
    """Return what is recorded; a faulty index matters only where some of it stays."""
    if not has_baseline(folder):
        return {}
    try:
        return _index(folder)
    except BehavgenError:
        if needed:
            raise
        return {}


def _index(folder: Path) -> dict[str, _Entry]:
    """Return what the index says of each recorded cell: hashes of its model and its tables."""
    file = folder / INDEX_FILE
    try:
        raw = json.loads(file.read_text(encoding="utf-8"))
    except FileNotFoundError:
        raise ProjectError(Fault(file=str(file), what="no baseline", allowed=_RECORD)) from None
    except (OSError, ValueError) as error:
        what = f"cannot be read as the index of a baseline: {error}"
        raise ModelFileError(Fault(file=str(file), what=what, allowed=_RECORD)) from None
    found = raw.get("format") if isinstance(raw, dict) else None
    if found != _FORMAT:
        what = f"baseline format {found!r}"
        allowed = f"this version reads format {_FORMAT}; {_RECORD}"
        raise ModelFileError(Fault(file=str(file), what=what, allowed=allowed))
    cells = raw.get("cells")
    entries = cells.values() if isinstance(cells, dict) else [None]
    if not all(isinstance(e, dict) and isinstance(e.get("model"), str) for e in entries):
        what = "cells without the hash of their model"
        raise ModelFileError(Fault(file=str(file), what=what, allowed=_RECORD))
    return dict(cells)
