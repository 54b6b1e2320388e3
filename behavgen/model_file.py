"""The model file: a ComparatorModel as text that reads well, and back."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import asdict
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.errors import Fault, ModelFileError
from behavgen.model import FORMAT, ComparatorModel

if TYPE_CHECKING:
    from pydantic import TypeAdapter, ValidationError

__all__ = ["dump_model", "load_model"]


def dump_model(model: ComparatorModel) -> str:
    """Return the model as JSON text; the same model gives the same bytes."""
    return _json_text(asdict(model), indent=0) + "\n"


def _json_text(value: object, indent: int) -> str:
    """Write keys sorted, one a line, and lists of plain values on one line."""
    pad = "  " * (indent + 1)
    if isinstance(value, Mapping) and value:
        rows = [f"{pad}{json.dumps(k)}: {_json_text(value[k], indent + 1)}" for k in sorted(value)]
        return "{\n" + ",\n".join(rows) + "\n" + "  " * indent + "}"
    if isinstance(value, list | tuple) and any(isinstance(v, list | tuple | dict) for v in value):
        rows = [pad + _json_text(v, indent + 1) for v in value]
        return "[\n" + ",\n".join(rows) + "\n" + "  " * indent + "]"
    return json.dumps(value, allow_nan=False)


def load_model(path: Path) -> ComparatorModel:
    """Read a model file.

    Raises
    ------
    ModelFileError
        When the file cannot be read, has another format version, or is not a
        model; names every fault with its place in the file.
    """
    from pydantic import ValidationError  # noqa: PLC0415  heavy, and only here

    try:
        text = path.read_text(encoding="utf-8")
        model = _reader().validate_json(text)
    except (OSError, UnicodeDecodeError) as error:
        raise ModelFileError(_unreadable(path, error)) from None
    except ValidationError as error:
        raise ModelFileError(*_faults(path, text, error)) from None
    if model.format != FORMAT:
        raise ModelFileError(_of_format(path, model.format))
    return model


@cache
def _reader() -> TypeAdapter[ComparatorModel]:
    """Return what reads models; building it takes much longer than reading one."""
    from pydantic import TypeAdapter  # noqa: PLC0415  heavy, and only here

    return TypeAdapter(ComparatorModel)


def _faults(path: Path, text: str, error: ValidationError) -> list[Fault]:
    """Return what is wrong with a file; where it has another format, nothing else counts."""
    try:
        raw = json.loads(text)
    except ValueError as reason:
        return [_unreadable(path, reason)]
    found = raw.get("format") if isinstance(raw, dict) else None
    if found != FORMAT:
        return [_of_format(path, found)]
    return [
        Fault(
            file=str(path),
            column=".".join(str(part) for part in fault["loc"]),
            what=fault["msg"],
            allowed="make it anew with: behavgen fit",
        )
        for fault in error.errors()
    ]


def _unreadable(path: Path, error: Exception) -> Fault:
    return Fault(
        file=str(path),
        what=f"cannot be read as a model file: {error}",
        allowed="make it anew with: behavgen fit",
    )


def _of_format(path: Path, found: object) -> Fault:
    return Fault(
        file=str(path),
        what=f"model file format {found!r}",
        allowed=f"this version reads format {FORMAT}; make it anew with: behavgen fit",
    )
