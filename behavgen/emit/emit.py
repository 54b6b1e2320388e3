"""ComparatorModel -> the files that go into the users' simulators."""

from __future__ import annotations

from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.systemverilog import systemverilog
from behavgen.emit.systemverilog_nettype import systemverilog_nettype
from behavgen.emit.verilog_a import verilog_a
from behavgen.emit.verilog_a_event import verilog_a_event
from behavgen.model import ComparatorModel

__all__ = ["emit"]


def emit(model: ComparatorModel) -> tuple[EmittedFile, ...]:
    """Return a cell's SystemVerilog and Verilog-A files; the same model, the same bytes."""
    return (
        systemverilog(model),
        systemverilog_nettype(model),
        verilog_a(model),
        verilog_a_event(model),
    )
