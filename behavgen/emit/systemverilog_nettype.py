"""ComparatorModel -> the SystemVerilog core behind pins of a user-defined nettype.

A net of type `node_t` carries voltage and conductance; its resolution function
joins all drivers by Kirchhoff's law (IEEE 1800-2017, 6.6.7). The package that
declares it is the same text in every cell's file and is compiled once.
"""

from __future__ import annotations

from dataclasses import replace

from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.module_parameters import module_parameters
from behavgen.emit.systemverilog import module_text
from behavgen.emit.systemverilog_interface import head, parameter_lines, port_lines
from behavgen.emit.taken_names import refuse_taken_names
from behavgen.emit.templating import render
from behavgen.model import Cell, ComparatorModel

__all__ = ["systemverilog_nettype"]

_WHAT = (
    "The same core as in the file with real ports, behind pins of the nettype node_t: each of "
    "its drivers gives a voltage and a conductance, and the net settles where their currents "
    "cancel. The pins themselves load nothing. What can be read inside is in the instance core."
)


def systemverilog_nettype(model: ComparatorModel) -> EmittedFile:
    """Return ``<cell>_nettype.sv``; the same model gives the same bytes.

    Its module is ``<cell>_nettype``, so that it shares a library with the one with real ports.

    Raises
    ------
    ProjectError
        When a pin has the name of something inside the module.
    """
    text = _text(model)
    refuse_taken_names(model, _text, language="SystemVerilog")
    return EmittedFile(path=f"{model.cell.name}_nettype.sv", text=text)


def _text(model: ComparatorModel) -> str:
    name = f"{model.cell.name}_nettype"
    core = replace(model, cell=replace(model.cell, name=f"{name}_core"))
    return render(
        "systemverilog/nettype.sv",
        name=name,
        time_precision=model.cell.time_precision,
        head=head(model, what=_WHAT),
        core=module_text(core, header=()),
        parameters=parameter_lines(model),
        parameter_names=[parameter.name for parameter in module_parameters(model)],
        ports=port_lines(model.cell, analogue="node_t"),
        connections=_connections(model.cell),
    )


def _connections(cell: Cell) -> list[tuple[str, str]]:
    """Return what each pin of the core is connected to."""
    pins = cell.pins
    analogue = (pins.inp, pins.inn, pins.vdd)
    logic = (pins.clk, pins.outp, pins.outn, pins.unresolved, pins.enable)
    return [
        *((pin, f"{pin}.volts") for pin in analogue if pin is not None),
        *((pin, pin) for pin in logic if pin is not None),
    ]
