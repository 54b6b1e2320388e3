"""README.txt: what a receiver must know, in fifteen lines."""

from __future__ import annotations

from collections.abc import Sequence

from behavgen.emit.literals import comment_text
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.ports import Port, ports, settings
from behavgen.handoff.standing import CAUTION, Standing
from behavgen.model import ComparatorModel
from behavgen.project import SymbolSettings
from behavgen.units import format_si

__all__ = ["LINES", "first_page"]

LINES = 15
_NETS = {
    "inp": "vip", "inn": "vin", "clk": "clock", "outp": "q", "outn": "qb", "vdd": "vdd",
    "unresolved": "unresolved", "enable": "enable",
}  # fmt: skip
_SECOND_ROW = 5


def first_page(model: ComparatorModel, symbol: SymbolSettings, standing: Standing) -> PackedFile:
    """Return the first page."""
    cell = model.cell
    title = comment_text(cell.description) or "clocked comparator"
    lines = (
        f"{cell.name}: {title}. {standing.sentence}",
        "Try it:   ./run.sh   or   make   (the first simulator found); it must end with PASS.",
        "Compile:  iverilog -g2012 -c files.f your_top.sv   |   "
        "verilator --binary --timing -CFLAGS -ffp-contract=off -f files.f your_top.sv",
        *_instance(model),
        f"Schematic: {symbol.name} has the symbol's own pins and order, with supplies as logic "
        f"levels: {', '.join(name for name, _ in symbol.pins)}.",
        "Plusargs: +behavgen_seed=N +behavgen_noise=0|1 +behavgen_mismatch=0|1 "
        "+behavgen_temp_c=T +behavgen_process=CODE win over parameters in all instances.",
        "If you see X on the outputs, read u1.x_cause: 1 not resolved in time, 2 supply too low or "
        "not enabled, 3 input not a number, 4 clock unknown, 5 before the first decision.",
        _never_moves(model),
        "If you see [behavgen] messages, a condition left the characterised range or an input is "
        "no number: .WARNINGS(2) makes them fatal, .WARNINGS(0) silences them.",
        "If you see FAIL, do not use the model in this simulator: the lines above it say what "
        "differs. A wrong sum from sha256sum -c MANIFEST.sha256 means that a file was changed.",
        f"Next: guide_digital.md (recipes), models/{cell.name}_bus.sv, bind/ (assertions), "
        "analogue/guide_analogue.md, data_sheet.html, ipxact/.",
        f"LICENCE.txt: the files belong to you. {CAUTION}",
    )
    assert len(lines) == LINES
    return PackedFile(path="README.txt", text="".join(f"{line}\n" for line in lines))


def _instance(model: ComparatorModel) -> Sequence[str]:
    """Return an instance to paste, with every parameter and pin, in four lines."""
    given = [f".{one.name}({one.default})" for one in settings(model)]
    found = ports(model.cell)
    wires = ", ".join(f".{port.name}({_NETS[port.role]})" for port in found)
    return (
        f"Instance, with all parameters at their defaults ({_reals(found)} are real, in V):",
        f"  {model.cell.name} #({', '.join(given[:_SECOND_ROW])},",
        f"    {', '.join(given[_SECOND_ROW:])})",
        f"  u1 ({wires});",
    )


def _reals(found: Sequence[Port]) -> str:
    return ", ".join(_NETS[port.role] for port in found if port.kind == "real")


def _never_moves(model: ComparatorModel) -> str:
    pins, off = model.cell.pins, model.cell.supply_off_v
    supply = f"{pins.vdd} is below {format_si(off, 'V')}" if pins.vdd and off else ""
    disabled = f"{pins.enable} is not 1" if pins.enable else ""
    wired = f"a logic net stands where {pins.inp} or {pins.inn} wants a real one"
    reasons = ", ".join(part for part in (supply, disabled, wired) if part)
    return f"If you see outputs that never move: {reasons}, or the clock never makes a clean step."
