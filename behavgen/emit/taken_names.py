"""Pin names against the names inside an emitted module."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import asdict, replace

from behavgen.errors import Fault, ProjectError
from behavgen.model import ComparatorModel, Pins

__all__ = ["refuse_taken_names"]

_COMMENT_OR_STRING = re.compile(r'//[^\n]*|"[^"\n]*"')
_NAME = re.compile(r"\b[A-Za-z_]\w*")


def refuse_taken_names(
    model: ComparatorModel, text_of: Callable[[ComparatorModel], str], *, language: str
) -> None:
    """Compare the names of a module's pins with all other names in its text.

    Parameters
    ----------
    model : ComparatorModel
    text_of : callable
        Returns the module's text for a model.
    language : str
        Of that text; said to the user.

    Raises
    ------
    ProjectError
        When a pin has the name of something inside the module.
    """
    usual = _usual(model.cell.pins)
    text = text_of(replace(model, cell=replace(model.cell, pins=usual)))
    names = set(_NAME.findall(_COMMENT_OR_STRING.sub("", text)))
    present = {pin: name for pin, name in asdict(model.cell.pins).items() if pin in names}
    faults = [
        Fault(
            column=f"cells.{model.cell.name}.pins.{pin}",
            what=f"'{name}' is also a name inside the emitted {language} module",
            allowed="choose another pin name",
        )
        for pin, name in present.items()
        if name in names - set(present)
    ]
    if faults:
        raise ProjectError(*faults)


def _usual(pins: Pins) -> Pins:
    """Return the same pins, each under the name of its role."""
    return Pins(
        outn="outn" if pins.outn else None,
        vdd="vdd" if pins.vdd else None,
        unresolved="unresolved" if pins.unresolved else None,
        enable="enable" if pins.enable else None,
    )
