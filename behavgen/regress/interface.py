"""What of a model's interface has changed: names, ports, parameters and codes that others use."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import asdict

from behavgen.emit.module_parameters import module_parameters
from behavgen.model import ComparatorModel
from behavgen.regress.comparison import InterfaceChange

__all__ = ["interface_changes"]

_SETTINGS = {
    "decides_on": "deciding edge",
    "in_reset": "outputs in reset",
    "time_precision": "time precision",
}
_ABSENT = "absent"


def interface_changes(old: ComparatorModel, new: ComparatorModel) -> tuple[InterfaceChange, ...]:
    """Return all changes of the interface, in the order module, ports, parameters, processes."""
    return (
        *_module(old, new),
        *_ports(old, new),
        *_parameters(old, new),
        *_processes(old, new),
    )


def _module(old: ComparatorModel, new: ComparatorModel) -> Iterator[InterfaceChange]:
    if old.cell.name != new.cell.name:
        yield InterfaceChange(what="module name", old=old.cell.name, new=new.cell.name)
    for name, words in _SETTINGS.items():
        ours, theirs = getattr(old.cell, name), getattr(new.cell, name)
        if ours != theirs:
            yield InterfaceChange(what=words, old=ours, new=theirs)


def _ports(old: ComparatorModel, new: ComparatorModel) -> Iterator[InterfaceChange]:
    theirs = asdict(new.cell.pins)
    for pin, name in asdict(old.cell.pins).items():
        if name != theirs[pin]:
            yield InterfaceChange(
                what=f"port {pin}", old=name or _ABSENT, new=theirs[pin] or _ABSENT
            )


def _parameters(old: ComparatorModel, new: ComparatorModel) -> Iterator[InterfaceChange]:
    ours, theirs = _defaults(old), _defaults(new)
    for name in dict.fromkeys([*ours, *theirs]):
        was, now = ours.get(name, _ABSENT), theirs.get(name, _ABSENT)
        if was != now:
            what = f"parameter {name}"
            yield InterfaceChange(what=what, old=was, new=now, breaks=was != _ABSENT)


def _defaults(model: ComparatorModel) -> dict[str, str]:
    """Return every parameter's type and default; those of Verilog-A alone are given in sigmas."""
    shared = {p.name: f"{p.kind}, default {p.default:g}" for p in module_parameters(model)}
    components = model.mismatch.components if model.mismatch else ()
    return shared | {f"MISMATCH_Z{k}": "real, default 0" for k in range(len(components))}


def _processes(old: ComparatorModel, new: ComparatorModel) -> Iterator[InterfaceChange]:
    ours = {process.name: str(process.code) for process in old.processes}
    theirs = {process.name: str(process.code) for process in new.processes}
    for name in dict.fromkeys([*ours, *theirs]):
        was, now = ours.get(name, _ABSENT), theirs.get(name, _ABSENT)
        if was != now:
            what = f"code of process {name}"
            yield InterfaceChange(what=what, old=was, new=now, breaks=was != _ABSENT)
