"""Characterisation tables of clocked comparators -> checked behavioural models.

The names below are found when first asked for, so that ``import behavgen`` costs nothing.
"""

from __future__ import annotations

# Loaded first and taken out again: importing one of these packages later would put
# it over the function of the same name.
import behavgen.check
import behavgen.emit
import behavgen.fit  # noqa: F401

TYPE_CHECKING = False  # that of `typing` would cost an import
if TYPE_CHECKING:
    from behavgen import errors
    from behavgen.check.check import check
    from behavgen.emit.emit import emit
    from behavgen.fit.fit import fit
    from behavgen.model import ComparatorModel
    from behavgen.model_file import load_model
    from behavgen.project import load_project
    from behavgen.reference import Reference
    from behavgen.tables.read import read_tables
else:
    del check, emit, fit

__all__ = [
    "ComparatorModel",
    "Reference",
    "check",
    "emit",
    "errors",
    "fit",
    "load_model",
    "load_project",
    "read_tables",
]

_HOMES = {
    "ComparatorModel": "behavgen.model",
    "Reference": "behavgen.reference",
    "check": "behavgen.check.check",
    "emit": "behavgen.emit.emit",
    "fit": "behavgen.fit.fit",
    "load_model": "behavgen.model_file",
    "load_project": "behavgen.project",
    "read_tables": "behavgen.tables.read",
}


def __getattr__(name: str) -> object:
    """Import a public name from its home (PEP 562)."""
    from importlib import import_module  # noqa: PLC0415  keeps the name out of this module

    if name == "errors":
        return import_module("behavgen.errors")
    if name not in _HOMES:
        raise AttributeError(f"module 'behavgen' has no attribute '{name}'")
    return getattr(import_module(_HOMES[name]), name)


def __dir__() -> list[str]:
    """Name what is public, and nothing else."""
    return list(__all__)
