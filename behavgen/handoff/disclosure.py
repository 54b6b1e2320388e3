"""What a package tells of where its model comes from: nothing but what the sender wants told.

Table files are named by their quantity only, kits and netlists by numbers. The models
are emitted anew from the model thus told; that nothing but comments differs from the
text that was checked is verified, so that the verdict of the check holds for them.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import fields, is_dataclass, replace
from typing import Any

from behavgen.errors import Fault, ProjectError
from behavgen.handoff.packed_file import PackedFile
from behavgen.model import ComparatorModel, Source
from behavgen.provenance import Provenance

__all__ = ["refuse_origins", "same_but_for_comments", "without_origins"]

_COMMENT_OR_STRING = re.compile(r'"(?:\\.|[^"\\\n])*"|//[^\n]*|/\*.*?\*/', re.DOTALL)


def without_origins(model: ComparatorModel) -> ComparatorModel:
    """Return the model without names of files, kits and netlists, wherever they stand."""
    told = replace(model, sources=tuple(map(_without_words, model.sources)))
    renamed: ComparatorModel = _renamed(told, _names(model.sources))
    return renamed


def refuse_origins(files: Iterable[PackedFile], sources: Iterable[Source]) -> None:
    """See that no text names a table's file.

    Raises
    ------
    ProjectError
        When one does.
    """
    names = {name for source in sources for name in _names_of(source.file)}
    faults = [
        Fault(file=file.path, what=f"names the table {name}",
              allowed="allow it with --disclose, or take the name out of the cell's texts")
        for file in files for name in sorted(names) if name in file.text
    ]  # fmt: skip
    if faults:
        raise ProjectError(*faults)


def same_but_for_comments(one: str, other: str) -> bool:
    """Tell whether two texts in Verilog languages are the same program."""
    return _bare(one) == _bare(other)


def _names(sources: Iterable[Source]) -> dict[str, str]:
    """Return what stands for each name, the longest names first."""
    names: dict[str, str] = {}
    for number, source in enumerate(sources, start=1):
        told = f"table {number} ({source.quantity})"
        names = dict.fromkeys(_names_of(source.file), told) | names
        for word, kind in ((source.provenance.kit, "kit"),
                           (source.provenance.netlist_hash, "netlist")):  # fmt: skip
            if word:
                names.setdefault(word, f"{kind} {number}")
    return dict(sorted(names.items(), key=lambda item: -len(item[0])))


def _names_of(file: str) -> tuple[str, ...]:
    """Return a table's name with its path and without."""
    short = re.split(r"[/\\]", file)[-1]
    return tuple(name for name in (file, short) if name)


def _without_words(source: Source) -> Source:
    return replace(source, provenance=Provenance(stage=source.provenance.stage))


def _renamed(value: Any, names: Mapping[str, str]) -> Any:
    """Replace names in every text of a value of the model."""
    if isinstance(value, str):
        for name, told in names.items():
            value = value.replace(name, told)
        return value
    if isinstance(value, tuple):
        return tuple(_renamed(item, names) for item in value)
    if is_dataclass(value) and not isinstance(value, type):
        changed = {one.name: _renamed(getattr(value, one.name), names) for one in fields(value)}
        return replace(value, **changed)
    return value


def _bare(text: str) -> list[str]:
    """Return the text's lines without comments and blank lines; strings stay whole."""

    def kept(match: re.Match[str]) -> str:
        return "" if match[0].startswith("/") else match[0]

    lines = _COMMENT_OR_STRING.sub(kept, text).splitlines()
    return [line.rstrip() for line in lines if line.strip()]
