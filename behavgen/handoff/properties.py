"""Assertions and coverage to bind to every instance, for simulators that take them."""

from __future__ import annotations

from behavgen.emit.literals import real_literal
from behavgen.emit.templating import render
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.ports import ports
from behavgen.handoff.standing import Standing
from behavgen.model import ComparatorModel, Range

__all__ = ["properties_file"]


def properties_file(model: ComparatorModel, standing: Standing) -> PackedFile:
    """Return the file with the properties and the bind statement."""
    cell = model.cell
    rising = cell.decides_on == "rising"
    supply_low, supply_high = _ends(model.box.vdd_v)
    common_low, common_high = _ends(model.box.vcm_v)
    text = render(
        "handoff/properties.sv",
        cell=cell.name,
        remarks=standing.remarks,
        precision=cell.time_precision,
        ports=ports(cell),
        inp=cell.pins.inp,
        inn=cell.pins.inn,
        clk=cell.pins.clk,
        outp=cell.pins.outp,
        outn=cell.pins.outn,
        vdd=cell.pins.vdd,
        unresolved=cell.pins.unresolved,
        edge="posedge" if rising else "negedge",
        back_edge="negedge" if rising else "posedge",
        resting="1'b0" if rising else "1'b1",
        supply_low=supply_low,
        supply_high=supply_high,
        common_low=common_low,
        common_high=common_high,
    )
    return PackedFile(path=f"bind/{cell.name}_properties.sv", text=text)


def _ends(span: Range | None) -> tuple[str, str]:
    if span is None:
        return "", ""
    return real_literal(span.low), real_literal(span.high)
