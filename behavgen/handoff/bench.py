"""The self-checking SystemVerilog bench: it needs a simulator and nothing else."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from behavgen.emit.literals import real_literal, string_literal
from behavgen.emit.templating import render
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.ports import connections, ports
from behavgen.handoff.standing import Standing
from behavgen.handoff.symbol import nominal_supply_v, symbol_pins
from behavgen.handoff.vectors import Vectors, make_vectors
from behavgen.model import ComparatorModel
from behavgen.project import SymbolSettings
from behavgen.reference import Reference

__all__ = ["bench_files"]

_SHELL_STEP_V = 1e-6
_PHASE_OVER_DELAY = 3.0
_UNCHARACTERISED_DELAY_S = 1e-9
_UNCHARACTERISED_VCM_V = 0.5
_COMPARED_SHARE = 0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class _RunText:
    """One run as the bench instantiates it."""

    index: int
    title: str
    clock: str
    inputs: str
    expected: str
    decisions: int
    changes: int
    looks: int
    parameters: tuple[tuple[str, str], ...]


def bench_files(
    model: ComparatorModel, symbol: SymbolSettings, standing: Standing
) -> tuple[PackedFile, ...]:
    """Return the bench's modules and its vectors."""
    vectors = make_vectors(model)
    name = model.cell.name
    texts = {
        f"{name}_player.sv": _player(model, standing),
        f"{name}_shells.sv": _shells(model, symbol, standing),
        f"{name}_bench.sv": _bench(model, vectors, standing),
    }
    modules = [PackedFile(path=f"bench/{path}", text=text) for path, text in texts.items()]
    return (*modules, *(file for one in vectors for file in one.files()))


def _shared(model: ComparatorModel, standing: Standing) -> dict[str, object]:
    cell = model.cell
    return {
        "cell": cell.name,
        "standing": standing.sentence,
        "remarks": standing.remarks,
        "precision": cell.time_precision,
        "ns_per_tick": {"1fs": "1e-6", "1ps": "1e-3"}[cell.time_precision],
        "resting": "1'b0" if cell.decides_on == "rising" else "1'b1",
    }


def _player(model: ComparatorModel, standing: Standing) -> str:
    pins = model.cell.pins
    return render(
        "handoff/player.sv",
        **_shared(model, standing),
        connections=connections(model.cell, {port.role: port.role for port in ports(model.cell)}),
        outp=pins.outp,
        outn=pins.outn or "outn",
        unresolved=pins.unresolved or "unresolved",
    )


def _bench(model: ComparatorModel, vectors: Sequence[Vectors], standing: Standing) -> str:
    codes = {process.name: process.code for process in model.processes}
    looks = sum(len(one.expected) for one in vectors)
    return render(
        "handoff/bench.sv",
        **_shared(model, standing),
        runs=[_run_text(one, codes) for one in vectors],
        decisions=sum(len(one.clock) for one in vectors),
        fewest=int(_COMPARED_SHARE * looks),
    )


def _run_text(vectors: Vectors, codes: Mapping[str, int]) -> _RunText:
    run = vectors.run
    given = run.given
    parameters = {
        "NOISE_ON": str(int(given.noise_on)),
        "MISMATCH_ON": str(int(given.mismatch_on)),
        "SEED": f"64'd{given.seed}",
        "TEMPERATURE_C": real_literal(given.temperature_c),
        "PROCESS": str(codes[given.process]),
        "UNRESOLVED_MODE": str(given.unresolved_mode),
        "FORCE_UNRESOLVED_EVERY": str(given.force_unresolved_every),
    }
    return _RunText(
        index=run.index, title=string_literal(run.name).strip('"'),
        clock=vectors.path("clock"), inputs=vectors.path("inputs"),
        expected=vectors.path("expected"), decisions=len(vectors.clock),
        changes=len(vectors.inputs), looks=len(vectors.expected),
        parameters=tuple(parameters.items()),
    )  # fmt: skip


def _shells(model: ComparatorModel, symbol: SymbolSettings, standing: Standing) -> str:
    cell = model.cell
    span = model.box.vcm_v
    shared = {"inp": "inp", "inn": "inn", "clk": "clk", "vdd": "vdd", "enable": "1'b1"}
    core = shared | _outputs("core")
    words = shared | {"inp": "{3{inp_word}}", "inn": "{3{inn_word}}"} | _outputs("bus")
    levels = shared | {"vdd": "power", "vss": "1'b0"} | _outputs("symbol")
    return render(
        "handoff/shells.sv",
        **_shared(model, standing),
        symbol=symbol,
        supply=real_literal(nominal_supply_v(model, symbol)),
        vcm=real_literal(_UNCHARACTERISED_VCM_V if span is None else round(span.middle, 9)),
        step_v=real_literal(_SHELL_STEP_V),
        phase_ticks=_phase_ticks(model),
        core_connections=connections(cell, core),
        symbol_connections=[
            (pin.name, levels.get(pin.role, "")) for pin in symbol_pins(cell, symbol)
        ],
        bus_connections=connections(cell, words),
        has_supplies=any(role == "vdd" for _, role in symbol.pins),
    )


def _outputs(stem: str) -> dict[str, str]:
    return {"outp": f"{stem}_p", "outn": f"{stem}_n", "unresolved": f"{stem}_flag"}


def _phase_ticks(model: ComparatorModel) -> int:
    """Return a phase in which a decision at the step of the inputs resolves with room to spare."""
    delay = _UNCHARACTERISED_DELAY_S
    if model.delay is not None:
        delay = float(Reference(model).delay(_SHELL_STEP_V))
    return int(_PHASE_OVER_DELAY * delay * model.cell.ticks_per_second)
