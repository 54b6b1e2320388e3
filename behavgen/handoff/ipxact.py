"""The cell as an IP-XACT component (IEEE 1685): ports, parameters and where its files are."""

from __future__ import annotations

from dataclasses import dataclass

from behavgen.emit.templating import render
from behavgen.files import sha256_of_text
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.ports import Setting, ports, settings
from behavgen.handoff.standing import CAUTION, Standing
from behavgen.model import ComparatorModel
from behavgen.model_file import dump_model

__all__ = ["EDITIONS", "ipxact_file"]

EDITIONS = {
    "2022": "http://www.accellera.org/XMLSchema/IPXACT/1685-2022",
    "2014": "http://www.accellera.org/XMLSchema/IPXACT/1685-2014",
}
"""Year of the standard and its namespace."""

_SYSTEMVERILOG = {"2022": "systemVerilogSource-2017", "2014": "systemVerilogSource"}
_VERSION_DIGITS = 12


@dataclass(frozen=True, slots=True, kw_only=True)
class _View:
    """One way in which the cell is modelled."""

    name: str
    language: str
    module: str
    file: str
    file_type: str
    parameters: tuple[Setting, ...] = ()


def ipxact_file(
    model: ComparatorModel, standing: Standing, *, vendor: str, edition: str
) -> PackedFile:
    """Return the description.

    Its version is the beginning of the model's hash: another model, another version.

    Parameters
    ----------
    model : ComparatorModel
    standing : Standing
    vendor : str
    edition : str
        One of `EDITIONS`.
    """
    cell = model.cell
    title = cell.description or "clocked comparator"
    text = render(
        "ipxact/component.xml",
        edition=edition,
        namespace=EDITIONS[edition],
        vendor=vendor,
        cell=cell.name,
        version=sha256_of_text(dump_model(model))[:_VERSION_DIGITS],
        description=f"{title}. {standing.sentence} {CAUTION}",
        views=_views(model, edition),
        ports=ports(cell),
    )
    return PackedFile(path=f"ipxact/{cell.name}.xml", text=text)


def _views(model: ComparatorModel, edition: str) -> tuple[_View, ...]:
    name = model.cell.name
    return (
        _View(
            name="real_number", language="SystemVerilog", module=name,
            file=f"../models/{name}.sv", file_type=_SYSTEMVERILOG[edition],
            parameters=settings(model),
        ),
        _View(
            name="continuous", language="Verilog-A", module=name, file=f"../models/{name}.va",
            file_type="verilogAmsSource",
        ),
        _View(
            name="event_driven", language="Verilog-A", module=f"{name}_event",
            file=f"../models/{name}_event.va", file_type="verilogAmsSource",
        ),
    )  # fmt: skip
