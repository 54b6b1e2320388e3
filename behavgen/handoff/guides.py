"""The pages for those who use the models: digital verification, and analogue simulation."""

from __future__ import annotations

import itertools
from collections.abc import Iterator

from behavgen.emit.literals import range_text
from behavgen.emit.templating import render
from behavgen.emit.verilog_a_ports import ports as analogue_ports
from behavgen.handoff.decks import STEP_V
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.ports import settings
from behavgen.handoff.standing import CAUTION, Standing
from behavgen.model import ComparatorModel, Process, Range
from behavgen.project import SymbolSettings
from behavgen.reference import Reference
from behavgen.report.cautions import is_invented
from behavgen.units import ZERO_CELSIUS_K, format_si

__all__ = ["analogue_guide", "digital_guide"]

_TIMING_OVERDRIVE_V = 1e-3


def digital_guide(model: ComparatorModel, symbol: SymbolSettings, standing: Standing) -> PackedFile:
    """Return the one page for digital verification."""
    cell = model.cell
    text = render(
        "handoff/guide_digital.md",
        cell=cell.name,
        standing=standing.sentence,
        caution=CAUTION,
        invented=is_invented(model),
        edge=cell.decides_on,
        clk=cell.pins.clk,
        inp=cell.pins.inp,
        inn=cell.pins.inn,
        outp=cell.pins.outp,
        vdd=cell.pins.vdd,
        unresolved=cell.pins.unresolved,
        symbol=symbol.name,
        energy=model.energy is not None,
        ranges=tuple(_ranges(model)),
        settings=settings(model),
        slowest=_slowest(model),
    )
    return PackedFile(path="guide_digital.md", text=text)


def analogue_guide(model: ComparatorModel, standing: Standing) -> PackedFile:
    """Return the page on the two Verilog-A models and their decks."""
    cell = model.cell
    text = render(
        "handoff/guide_analogue.md",
        cell=cell.name,
        standing=standing.sentence,
        caution=CAUTION,
        invented=is_invented(model),
        pins=[port.name for port in analogue_ports(cell)],
        step=format_si(STEP_V, "V"),
        kickback=model.kickback is not None,
    )
    return PackedFile(path="analogue/guide_analogue.md", text=text)


def _ranges(model: ComparatorModel) -> Iterator[str]:
    box = model.box
    for label, span, unit in (("supply", box.vdd_v, "V"), ("temperature", box.temperature_k, "K"),
                              ("common mode", box.vcm_v, "V"),
                              ("overdrive", box.overdrive_v, "V")):  # fmt: skip
        if span is not None:
            yield f"{label} {range_text(span, unit)}"
    names = ", ".join(f"{process.code} {process.name}" for process in model.processes)
    yield f"process {names}"


def _slowest(model: ComparatorModel) -> str:
    """Name the slowest corner of the characterised range, and how slow it is."""
    if model.delay is None:
        return "delays were not characterised; every decision takes one time step."
    reference = Reference(model)
    box = model.box
    corners = [
        (float(reference.delay(_TIMING_OVERDRIVE_V, process=process.name, **_given(*ends))),
         process, ends)
        for process in model.processes
        for ends in itertools.product(*map(_ends, (box.vdd_v, box.temperature_k, box.vcm_v)))
    ]  # fmt: skip
    delay, process, (vdd, temperature_k, vcm) = max(corners, key=lambda corner: corner[0])
    usual = float(reference.delay(_TIMING_OVERDRIVE_V))
    return (
        f"{_setting(process, temperature_k)}{_applied(vdd, vcm)}. At "
        f"{format_si(_TIMING_OVERDRIVE_V, 'V')} a decision then takes "
        f"{format_si(delay, 's', 3)}, against {format_si(usual, 's', 3)} in the middle of the "
        "range. Smaller inputs take longer without bound: see the data sheet."
    )


def _ends(span: Range | None) -> tuple[float | None, ...]:
    return (None,) if span is None else tuple(dict.fromkeys((span.low, span.high)))


def _given(vdd: float | None, temperature_k: float | None, vcm: float | None) -> dict[str, float]:
    temp_c = None if temperature_k is None else temperature_k - ZERO_CELSIUS_K
    named = {"vdd": vdd, "temp_c": temp_c, "vcm": vcm}
    return {name: value for name, value in named.items() if value is not None}


def _setting(process: Process, temperature_k: float | None) -> str:
    parts = [f".PROCESS({process.code})"]
    if temperature_k is not None:
        parts.append(f".TEMPERATURE_C({temperature_k - ZERO_CELSIUS_K:.6g})")
    return f"`{', '.join(parts)}`"


def _applied(vdd: float | None, vcm: float | None) -> str:
    parts = [f"{label} {format_si(volts, 'V')}"
             for label, volts in (("a supply of", vdd), ("a common mode of", vcm))
             if volts is not None]  # fmt: skip
    return f" with {' and '.join(parts)}" if parts else ""
