"""What each simulator makes of the compared decisions."""

from __future__ import annotations

import re
import subprocess
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.check.language_cases import LanguageCase
from behavgen.check.language_texts import (
    event_deck,
    sources_of,
    systemverilog_bench,
    vacask_deck,
)
from behavgen.emit.systemverilog import systemverilog
from behavgen.emit.verilog_a import verilog_a
from behavgen.emit.verilog_a_event import verilog_a_event
from behavgen.errors import Fault, ToolError
from behavgen.model import ComparatorModel
from behavgen.simulators.evas import find_evas
from behavgen.simulators.icarus import find_icarus
from behavgen.simulators.openvaf import find_openvaf
from behavgen.simulators.process import Finished
from behavgen.simulators.vacask import find_vacask, read_waves
from behavgen.simulators.verilator import find_verilator

__all__ = ["RUNS", "Found", "Played"]

_TOP = "languages"


@dataclass(frozen=True, slots=True, kw_only=True)
class Found:
    """The last decision of a case: -1 and 0 when it did not resolve."""

    bit: int
    delay_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Played:
    """What a simulator, of this version, found in each case."""

    version: str
    found: tuple[Found, ...]


Runner = Callable[[ComparatorModel, Sequence[LanguageCase], Path], Played]


def _icarus(model: ComparatorModel, cases: Sequence[LanguageCase], folder: Path) -> Played:
    icarus = find_icarus()
    compiled = folder / "languages.vvp"
    _succeed(
        icarus.compile(_systemverilog(model, cases, folder), top=_TOP, output=compiled,
                       log=folder / "iverilog.log"),
        "Icarus Verilog",
    )  # fmt: skip
    done = _succeed(icarus.simulate(compiled, log=folder / "vvp.log"), "Icarus Verilog")
    return Played(version=icarus.version, found=_printed(done.text, cases))


def _verilator(model: ComparatorModel, cases: Sequence[LanguageCase], folder: Path) -> Played:
    verilator = find_verilator()
    program = folder / "languages"
    sources = _systemverilog(model, cases, folder)
    _succeed(
        verilator.build(
            sources, top=_TOP, output=program, log=folder / "verilator.log", brief=True
        ),
        "Verilator",
    )
    done = subprocess.run([program], capture_output=True, text=True, check=False, timeout=300.0)
    return Played(version=verilator.version, found=_printed(done.stdout, cases))


def _vacask(model: ComparatorModel, cases: Sequence[LanguageCase], folder: Path) -> Played:
    vacask, openvaf = find_vacask(), find_openvaf()
    emitted = verilog_a(model)
    source = folder / emitted.path
    source.write_text(emitted.text, encoding="utf-8")
    library = source.with_suffix(".osdi")
    compilation = openvaf.compile(source, library=library, log=folder / "openvaf.log")
    if compilation.library is None:
        raise ToolError(Fault(file=str(source), what=compilation.message))
    vacask.run(vacask_deck(model, cases, library.name), folder=folder)
    waves = read_waves(folder / "languages.raw")
    real = {name: np.asarray(wave, dtype=float) for name, wave in waves.items()}
    return Played(version=vacask.version, found=_measured(model, cases, real))


def _event(model: ComparatorModel, cases: Sequence[LanguageCase], folder: Path) -> Played:
    evas = find_evas()
    emitted = verilog_a_event(model)
    # evas-sim reads one excluded value at most.
    text = re.sub(r" exclude \d+", "", emitted.text)
    (folder / emitted.path).write_text(text, encoding="utf-8")
    waves = evas.run(event_deck(model, cases), folder=folder)
    # Its delays end in the middle of straight edges, also where those turn a held decision.
    return Played(version=evas.version, found=_measured(model, cases, waves, by_middle=True))


RUNS: Mapping[str, Runner] = {
    "Icarus Verilog": _icarus,
    "Verilator": _verilator,
    "VACASK": _vacask,
    "evas-sim": _event,
}
"""By simulator, in the order of the table."""


def _systemverilog(
    model: ComparatorModel, cases: Sequence[LanguageCase], folder: Path
) -> list[Path]:
    emitted = systemverilog(model)
    files = {emitted.path: emitted.text, "languages.sv": systemverilog_bench(model, cases)}
    for name, text in files.items():
        (folder / name).write_text(text, encoding="utf-8")
    return [folder / name for name in files]


def _succeed(finished: Finished, name: str) -> Finished:
    if finished.code != 0:
        raise ToolError(Fault(file=str(finished.log), what=f"{name} failed\n{finished.tail()}"))
    return finished


def _printed(text: str, cases: Sequence[LanguageCase]) -> tuple[Found, ...]:
    """Read the lines of the SystemVerilog bench."""
    lines = re.findall(r"^(\d+) (\d+) ([01x]) (\d+)$", text, re.MULTILINE)
    told = {(int(case), int(number)): (bit, float(fs)) for case, number, bit, fs in lines}
    found = []
    for index, case in enumerate(cases):
        bit, femtoseconds = told[index, len(case.phases) - 1]
        found.append(Found(bit=-1 if bit == "x" else int(bit), delay_s=femtoseconds * 1e-15))
    return tuple(found)


_LEAST_SHOWN = 0.25
"""Share of the supply by which outputs that show a bit are apart at the end of the phase."""


def _measured(
    model: ComparatorModel,
    cases: Sequence[LanguageCase],
    waves: Mapping[str, npt.NDArray[np.float64]],
    *,
    by_middle: bool = False,
) -> tuple[Found, ...]:
    """Measure when the outputs come to stand half the supply apart or half-way there."""
    falling = model.cell.decides_on == "falling"
    found = []
    for index, case in enumerate(cases):
        sources = sources_of(case, falling=falling)
        apart = waves[f"outp_{index}"] - waves[f"outn_{index}"]
        span = sources.edges_s[-1], sources.ends_s[-1]
        before, after = np.interp(span, waves["time"], apart)
        if abs(after) < _LEAST_SHOWN * case.vdd_v:
            found.append(Found(bit=-1, delay_s=0.0))  # a coin's edge may begin here
            continue
        middle = 0.5 * (before + after) * np.sign(after)
        level = float(middle) if by_middle else 0.5 * case.vdd_v
        found.append(_ready(waves["time"], apart, level, *span))
    return tuple(found)


def _ready(
    time: npt.NDArray[np.float64],
    apart: npt.NDArray[np.float64],
    level: float,
    edge_s: float,
    end_s: float,
) -> Found:
    """Return what the phase ended with, and since when; held outputs do not count anew."""
    sign = np.sign(np.interp(end_s, time, apart))
    beyond = sign * apart - level
    rises = (beyond[:-1] < 0.0) & (beyond[1:] >= 0.0)
    at = np.flatnonzero(rises & (time[1:] > edge_s) & (time[:-1] < end_s))
    if not len(at):
        return Found(bit=-1, delay_s=0.0)
    i = at[-1]
    moment = time[i] - (time[i + 1] - time[i]) * beyond[i] / (beyond[i + 1] - beyond[i])
    return Found(bit=int(sign > 0.0), delay_s=float(moment - edge_s))
