"""Benches of the language comparison: one text a simulator, with an instance for each case."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

from behavgen.check.language_cases import LanguageCase
from behavgen.emit.literals import real_literal
from behavgen.model import ComparatorModel

__all__ = ["Corners", "Sources", "event_deck", "sources_of", "systemverilog_bench", "vacask_deck"]

Corners = tuple[tuple[float, float], ...]
"""Of a piecewise linear source: time in s, voltage in V."""

_EDGE_S = 1e-12
"""Duration of the clock's edges in decks; their middle is the edge."""
_FEMTO = 1e15


@dataclass(frozen=True, slots=True, kw_only=True)
class Sources:
    """What one instance is driven with.

    Parameters
    ----------
    edges_s, ends_s : tuple of float
        When its decision phases begin and end.
    inp, inn, clk : Corners
    """

    edges_s: tuple[float, ...]
    ends_s: tuple[float, ...]
    inp: Corners
    inn: Corners
    clk: Corners


def sources_of(case: LanguageCase, *, falling: bool) -> Sources:
    """Return the sources of a case; inputs change in the middle of the decision phase before."""
    edges: list[float] = []
    ends: list[float] = []
    inputs, now = [(0.0, case.phases[0].vdiff_v)], 0.0
    for phase in case.phases:
        if edges:
            moment = 0.5 * (edges[-1] + ends[-1])
            inputs += [(moment, inputs[-1][1]), (moment + _EDGE_S, phase.vdiff_v)]
        edges.append(now + phase.reset_s)
        ends.append(edges[-1] + phase.length_s)
        now = ends[-1]
    rest, active = (case.vdd_v, 0.0) if falling else (0.0, case.vdd_v)
    clock = [(0.0, rest)]
    for edge, end in zip(edges, ends, strict=True):
        for middle, before, after in ((edge, rest, active), (end, active, rest)):
            clock += [(middle - 0.5 * _EDGE_S, before), (middle + 0.5 * _EDGE_S, after)]
    return Sources(
        edges_s=tuple(edges), ends_s=tuple(ends), clk=tuple(clock),
        inp=tuple((time, case.vcm_v + 0.5 * vdiff) for time, vdiff in inputs),
        inn=tuple((time, case.vcm_v - 0.5 * vdiff) for time, vdiff in inputs),
    )  # fmt: skip


def last_moment_s(model: ComparatorModel, cases: Sequence[LanguageCase]) -> float:
    """Return when the last of the cases is over, and some time after it, in s."""
    falling = model.cell.decides_on == "falling"
    return max(sources_of(case, falling=falling).ends_s[-1] for case in cases) + 0.3e-9


# -- SystemVerilog -------------------------------------------------------------------------------


def systemverilog_bench(model: ComparatorModel, cases: Sequence[LanguageCase]) -> str:
    """Return a module ``languages`` that prints a line for each decision.

    ``<case> <decision> <bit or x> <femtoseconds from the edge>``
    """
    lines = ["`timescale 1fs/1fs", "module languages;"]
    for index, case in enumerate(cases):
        lines += _instance(model, index, case)
    ended = _ticks(last_moment_s(model, cases))
    return "\n".join([*lines, f"  initial #{ended} $finish;", "endmodule", ""])


def _instance(model: ComparatorModel, k: int, case: LanguageCase) -> Iterator[str]:
    falling = model.cell.decides_on == "falling"
    codes = {process.name: process.code for process in model.processes}
    active = "1'b0" if falling else "1'b1"
    yield f"  real inp{k}, inn{k};"
    yield f"  logic clk{k}, outp{k}, outn{k}, unresolved{k}, seen{k}, bit{k};"
    yield f"  real edge{k}, ready{k};"
    yield f"  {model.cell.name} #(.NOISE_ON(0), .TEMPERATURE_C({real_literal(case.temp_c)}),"
    yield f"    .PROCESS({codes[case.process]}))"
    yield f"    dut{k} (.inp(inp{k}), .inn(inn{k}), .clk(clk{k}), .outp(outp{k}), .outn(outn{k}),"
    yield f"    .vdd({real_literal(case.vdd_v)}), .unresolved(unresolved{k}));"
    yield f"  always @(outp{k} or outn{k})"
    yield f"    if (clk{k} == {active} && !seen{k} && (outp{k} ^ outn{k}) === 1'b1) begin"
    yield f"      seen{k} = 1'b1; bit{k} = outp{k}; ready{k} = $realtime;"
    yield "    end"
    yield "  initial begin"
    yield from _play(k, sources_of(case, falling=falling), "~" if falling else "")
    yield "  end"


def _play(k: int, sources: Sources, inverted: str) -> Iterator[str]:
    steps = [(0.0, f"clk{k} = {inverted}1'b0; seen{k} = 1'b1;")]
    for name, corners in (("inp", sources.inp), ("inn", sources.inn)):
        steps += [(time, f"{name}{k} = {real_literal(value)};") for time, value in corners]
    for number, (edge, end) in enumerate(zip(sources.edges_s, sources.ends_s, strict=True)):
        steps += [
            (edge, f"seen{k} = 1'b0; edge{k} = $realtime; clk{k} = {inverted}1'b1;"),
            (end - 1e-15, f'if (seen{k}) $display("{k} {number} %b %.0f", bit{k}, '
                          f'ready{k} - edge{k}); else $display("{k} {number} x 0");'),
            (end, f"clk{k} = {inverted}1'b0;"),
        ]  # fmt: skip
    now = 0
    for time, statement in sorted(steps, key=lambda step: step[0]):
        wait = _ticks(time) - now
        now += wait
        yield f"    #{wait} {statement}" if wait else f"    {statement}"


def _ticks(time_s: float) -> int:
    return round(time_s * _FEMTO)


# -- Verilog-A -----------------------------------------------------------------------------------


def vacask_deck(model: ComparatorModel, cases: Sequence[LanguageCase], library: str) -> str:
    """Return a deck for VACASK whose analysis is called ``languages``."""
    name = model.cell.name
    lines = ["languages", f'load "{library}"', "model vsource vsource", f"model {name} {name}"]
    for index, case in enumerate(cases):
        lines += _placed(model, index, case, f"{name} {_settings(model, case, str.lower)}")
    stop = last_moment_s(model, cases)
    lines += ["control", f"  analysis languages tran step=10p stop={stop!r}", "endc", ""]
    return "\n".join(lines)


def event_deck(model: ComparatorModel, cases: Sequence[LanguageCase]) -> str:
    """Return a deck for evas-sim that saves the outputs of all cases."""
    module = f"{model.cell.name}_event"
    lines = ["simulator lang=spectre", "global 0", f'ahdl_include "{module}.va"']
    for index, case in enumerate(cases):
        lines += _placed(model, index, case, f"{module} {_settings(model, case, str)}", sep=" ")
    saved = " ".join(f"{pin}_{k}:17e" for k in range(len(cases)) for pin in ("outp", "outn"))
    stop = last_moment_s(model, cases)
    lines += [f"tran tran stop={stop!r} maxstep=50p", f"save {saved}", ""]
    return "\n".join(lines)


def _settings(model: ComparatorModel, case: LanguageCase, spell: Callable[[str], str]) -> str:
    codes = {process.name: process.code for process in model.processes}
    values = {"NOISE_ON": "0", "PROCESS": str(codes[case.process]),
              "TEMPERATURE_C": repr(case.temp_c)}  # fmt: skip
    return " ".join(f"{spell(name)}={value}" for name, value in values.items())


def _placed(
    model: ComparatorModel, k: int, case: LanguageCase, instance: str, sep: str = ", "
) -> Iterator[str]:
    """Yield an instance with its sources, in the order of the emitted modules' ports."""
    sources = sources_of(case, falling=model.cell.decides_on == "falling")
    for name, corners in (("inp", sources.inp), ("inn", sources.inn), ("clk", sources.clk),
                          ("vdd", ((0.0, case.vdd_v),))):  # fmt: skip
        yield f"v{name}_{k} ({name}_{k} 0) vsource {_wave(corners, sep)}"
    nodes = " ".join(f"{pin}_{k}" for pin in ("inp", "inn", "clk", "outp", "outn", "vdd"))
    yield f"x_{k} ({nodes} 0) {instance}"


def _wave(corners: Corners, sep: str) -> str:
    if len(corners) == 1:
        return f"dc={corners[0][1]!r}"
    kind = 'type="pwl"' if sep == ", " else "type=pwl"
    numbers = sep.join(f"{time!r}{sep}{value!r}" for time, value in corners)
    return f"{kind} wave=[{numbers}]"
