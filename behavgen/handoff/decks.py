"""Decks that run the two Verilog-A models: two decisions, one of each sign."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from behavgen.emit.literals import real_literal
from behavgen.emit.module_parameters import default_temperature_c
from behavgen.emit.templating import render
from behavgen.emit.verilog_a_ports import ports
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.symbol import nominal_supply_v, symbol_of
from behavgen.model import Cell, ComparatorModel
from behavgen.reference import Reference
from behavgen.units import format_si

__all__ = ["STEP_V", "deck_files"]

STEP_V = 5e-3
"""From the trip point to either side."""

_PHASE_OVER_DELAY = 4.0
_UNCHARACTERISED_DELAY_S = 1e-9
_UNCHARACTERISED_VCM_V = 0.5
_RAMP_SHARE, _SAMPLE_SHARE = 0.02, 0.01


@dataclass(frozen=True, slots=True, kw_only=True)
class _Drive:
    """What both decks apply, in V and s: reset, decision, reset, decision, reset."""

    supply_v: float
    vcm_v: float
    high_v: float
    low_v: float
    rest_v: float
    decide_v: float
    phase_s: float
    ramp_s: float
    temperature_c: float


def deck_files(model: ComparatorModel) -> tuple[PackedFile, PackedFile]:
    """Return a deck for the continuous model and one for the event-driven model."""
    name, drive = model.cell.name, _drive(model)
    continuous = PackedFile(path=f"analogue/{name}_step.sim", text=_continuous(model.cell, drive))
    event = PackedFile(path=f"analogue/{name}_event_step.scs", text=_event(model.cell, drive))
    return continuous, event


def _drive(model: ComparatorModel) -> _Drive:
    supply = nominal_supply_v(model, symbol_of(model, None))
    span = model.box.vcm_v
    vcm = _UNCHARACTERISED_VCM_V if span is None else round(span.middle, 9)
    temp_c = default_temperature_c(model.box)
    reference = Reference(model)
    condition = {"vdd": supply, "vcm": vcm, "temp_c": temp_c}
    trip = float(reference.offset(**condition))
    delay = _UNCHARACTERISED_DELAY_S
    if model.delay is not None:
        delay = float(reference.delay(STEP_V, **condition))
    phase = float(f"{_PHASE_OVER_DELAY * delay:.1e}")
    rising = model.cell.decides_on == "rising"
    return _Drive(
        supply_v=supply, vcm_v=vcm, high_v=trip + STEP_V, low_v=trip - STEP_V,
        rest_v=0.0 if rising else supply, decide_v=supply if rising else 0.0,
        phase_s=phase, ramp_s=_RAMP_SHARE * phase, temperature_c=temp_c,
    )  # fmt: skip


def _continuous(cell: Cell, drive: _Drive) -> str:
    phase, ramp = drive.phase_s, drive.ramp_s
    turn = 2.5 * phase  # in the middle of the reset between the two decisions
    half_high, half_low = 0.5 * drive.high_v, 0.5 * drive.low_v
    halves = ((0.0, half_high), (turn, half_high), (turn + ramp, half_low), (5 * phase, half_low))
    return render(
        "handoff/step.sim",
        cell=cell.name,
        step=format_si(STEP_V, "V"),
        vdd=cell.pins.vdd,
        enable=cell.pins.enable,
        supply=_text(drive.supply_v),
        vcm=_text(drive.vcm_v),
        halves=", ".join(f"{_text(time)}, {_text(volts)}" for time, volts in halves),
        rest=_text(drive.rest_v),
        decide=_text(drive.decide_v),
        phase=_text(phase),
        ramp=_text(ramp),
        width=_text(phase - ramp),
        period=_text(2 * phase),
        sample=_text(_SAMPLE_SHARE * phase),
        stop=_text(5 * phase),
        temperature=_text(drive.temperature_c),
        nodes=_nodes(cell),
    )


def _event(cell: Cell, drive: _Drive) -> str:
    phase, ramp = drive.phase_s, drive.ramp_s
    turn = 2.5 * phase
    clock = [(0.0, drive.rest_v)]
    for edge in (phase, 3 * phase):
        clock += [(edge, drive.rest_v), (edge + ramp, drive.decide_v),
                  (edge + phase, drive.decide_v), (edge + phase + ramp, drive.rest_v)]  # fmt: skip
    sources = {
        "inp": [(0.0, drive.vcm_v + 0.5 * drive.high_v), (turn, drive.vcm_v + 0.5 * drive.high_v),
                (turn + ramp, drive.vcm_v + 0.5 * drive.low_v)],
        "inn": [(0.0, drive.vcm_v - 0.5 * drive.high_v), (turn, drive.vcm_v - 0.5 * drive.high_v),
                (turn + ramp, drive.vcm_v - 0.5 * drive.low_v)],
        "clk": clock,
    }  # fmt: skip
    if cell.pins.vdd:
        sources["vdd"] = [(0.0, drive.supply_v)]
    if cell.pins.enable:
        sources["enable"] = [(0.0, drive.supply_v)]
    return render(
        "handoff/event_step.scs",
        cell=cell.name,
        step=format_si(STEP_V, "V"),
        sources=[(name, _corners(corners)) for name, corners in sources.items()],
        nodes=_nodes(cell),
        stop=_text(5 * phase),
        sample=_text(_SAMPLE_SHARE * phase),
        outputs=" ".join(node for node in ("outp", "outn") if getattr(cell.pins, node)),
    )


def _corners(corners: list[tuple[float, float]]) -> str:
    return " ".join(f"{_text(time)} {_text(volts)}" for time, volts in corners)


def _nodes(cell: Cell) -> str:
    """Return the nodes that an instance's pins meet, in their order; ground is node 0."""
    roles: Mapping[str, str] = {
        getattr(cell.pins, role): role
        for role in ("inp", "inn", "clk", "enable", "outp", "outn", "vdd")
        if getattr(cell.pins, role) is not None
    }
    return " ".join(roles.get(port.name, "0") for port in ports(cell))


def _text(value: float) -> str:
    """Write a number with as many digits as a deck needs."""
    return real_literal(float(f"{value:.9g}"))
