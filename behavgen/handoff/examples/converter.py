"""A converter in a simulator: its text around the packed model, compiled and driven."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.emit.literals import real_literal
from behavgen.emit.systemverilog import systemverilog
from behavgen.emit.templating import render
from behavgen.errors import Fault, ToolError
from behavgen.handoff.bus import bus_file
from behavgen.handoff.examples.conversions import (
    INPUTS_VARIABLE,
    OUTPUTS_VARIABLE,
    Conversions,
    read_results,
    write_inputs,
)
from behavgen.handoff.ports import connections
from behavgen.handoff.standing import Standing
from behavgen.model import ComparatorModel
from behavgen.operating_point import evaluate, operating_point
from behavgen.reference import Reference
from behavgen.resources import sim_folder
from behavgen.simulators.cocotb_benches import bench_environment, read_outcomes, vpi_library
from behavgen.simulators.icarus import find_icarus
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["BuiltConverter", "Converter", "Point", "middle_point"]

_TOP = "converter"
_RESETS = 4.0
_LEAST_RESET_TICKS = 100
_LONGEST_S = 900.0
_UNKNOWN_SUPPLY_V, _UNKNOWN_COMMON_V, _UNKNOWN_C = 1.0, 0.5, 27.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Point:
    """Where converters work: the middle of the range, with the trip point taken out.

    Parameters
    ----------
    supply_v, common_v, temp_c : float
    offset_v, noise_v, mismatch_v : float
        Trip point, noise of a decision, and deviation between instances, V.
    """

    supply_v: float
    common_v: float
    temp_c: float
    offset_v: float
    noise_v: float
    mismatch_v: float

    @property
    def keywords(self) -> dict[str, float]:
        """The point as the reference takes it."""
        return {"vdd": self.supply_v, "vcm": self.common_v, "temp_c": self.temp_c}


def middle_point(model: ComparatorModel) -> Point:
    """Return the middle of a model's range, rounded as people write it."""
    box = model.box
    supply = _UNKNOWN_SUPPLY_V if box.vdd_v is None else round(box.vdd_v.middle, 3)
    common = _UNKNOWN_COMMON_V if box.vcm_v is None else round(box.vcm_v.middle, 3)
    span = box.temperature_k
    temp_c = _UNKNOWN_C if span is None else round(span.middle - ZERO_CELSIUS_K, 1)
    where: dict[str, npt.ArrayLike] = {"vdd": supply, "vcm": common, "temp_c": temp_c}
    reference, point = Reference(model), operating_point(model, (), where)
    components = () if model.mismatch is None else model.mismatch.components
    variance = sum(float(evaluate(component, point)[0]) ** 2 for component in components)
    return Point(
        supply_v=supply, common_v=common, temp_c=temp_c,
        offset_v=float(reference.offset(**where)),
        noise_v=float(reference.noise_sigma(**where)),
        mismatch_v=float(np.sqrt(variance)),
    )  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class Converter:
    """A converter of some kind around a model.

    Parameters
    ----------
    kind : str
        ``"sar"`` or ``"flash"``.
    model : ComparatorModel
    bits : int
    chips : int
        Flash converters side by side.
    parameters : mapping
        Of the comparators, as SystemVerilog writes them, beyond those that `Point` gives.
    """

    kind: str
    model: ComparatorModel
    bits: int
    chips: int = 1
    parameters: Mapping[str, str] = field(default_factory=dict)

    def build(self, folder: Path) -> BuiltConverter:
        """Compile it; sources, logs and results go to a folder.

        Raises
        ------
        ToolError
            When no simulator is found, or it refuses the sources.
        """
        folder.mkdir(parents=True, exist_ok=True)
        compiled, log = folder.resolve() / "converter.vvp", folder / "compile.log"
        sources = self._sources(folder)
        done = find_icarus().compile(sources, top=_TOP, output=compiled, log=log)
        if done.code != 0:
            raise _failed(log, done.tail())
        return BuiltConverter(compiled=compiled, ticks_per_second=self.model.cell.ticks_per_second)

    def _sources(self, folder: Path) -> list[Path]:
        name = self.model.cell.name
        shell = bus_file(self.model, Standing(sound=True, sentence="For an example.")).text
        texts = {f"{name}.sv": systemverilog(self.model).text, f"{name}_bus.sv": shell,
                 "converter.sv": self._text()}  # fmt: skip
        for file, text in texts.items():
            (folder / file).write_text(text, encoding="utf-8")
        return [(folder / file).resolve() for file in texts]

    def _text(self) -> str:
        cell, point = self.model.cell, middle_point(self.model)
        given = {
            "OFFSET_SHIFT_V": real_literal(-point.offset_v),
            "TEMPERATURE_C": real_literal(point.temp_c),
            "MEMORY_ON": "0",
            "UNRESOLVED_MODE": "1",
            **self.parameters,
        }
        nets = {"vdd": real_literal(point.supply_v), "clk": "clk", "enable": "1'b1",
                "inp": "inp", "inn": "inn"}  # fmt: skip
        outputs = ("outp", "outn", "unresolved")
        part = "" if self.kind == "sar" else "[c*COUNT +: COUNT]"
        return render(
            f"handoff/examples/{self.kind}.sv",
            cell=cell.name,
            precision=cell.time_precision,
            resting="1'b0" if cell.decides_on == "rising" else "1'b1",
            bits=self.bits,
            chips=self.chips,
            middle_code=real_literal(2.0 ** (self.bits - 1)),
            common_v=real_literal(point.common_v),
            reset_ticks=self._reset_ticks(point),
            parameters=tuple(given.items()),
            connections=connections(cell, nets | {name: f"{name}{part}" for name in outputs}),
        )

    def _reset_ticks(self, point: Point) -> int:
        reset_s = float(Reference(self.model).reset_delay(**point.keywords))
        return int(_RESETS * reset_s * self.model.cell.ticks_per_second) + _LEAST_RESET_TICKS


@dataclass(frozen=True, slots=True, kw_only=True)
class BuiltConverter:
    """A compiled converter, whose folder takes what it reads and writes."""

    compiled: Path
    ticks_per_second: float

    def convert(
        self,
        vin_v: npt.ArrayLike,
        *,
        lsb_v: npt.ArrayLike,
        phase_s: npt.ArrayLike = 1e-12,
        run_seed: int = 1,
    ) -> Conversions:
        """Simulate conversions, one after the other.

        Parameters
        ----------
        vin_v, lsb_v, phase_s : array_like, shape (N,) when broadcast
            Input, step of the converter, and length of the decision phases.
        run_seed : int
            Of noise and mismatch.

        Raises
        ------
        ToolError
            When the simulator fails.
        """
        folder = self.compiled.parent
        inputs, results = folder / "inputs.npy", folder / "results.json"
        outcomes, log = folder / "outcomes.xml", folder / "simulate.log"
        ticks = np.round(np.asarray(phase_s, dtype=float) * self.ticks_per_second)
        write_inputs(inputs, np.asarray(vin_v, dtype=float), np.asarray(lsb_v, dtype=float), ticks)
        for stale in (results, outcomes):
            stale.unlink(missing_ok=True)
        environment = bench_environment(
            modules=("test_conversions",), folder=sim_folder() / "examples", top=_TOP,
            results=outcomes,
            variables={INPUTS_VARIABLE: str(inputs), OUTPUTS_VARIABLE: str(results)},
        )  # fmt: skip
        finished = find_icarus().simulate(
            self.compiled, log=log, library=vpi_library("icarus"),
            plusargs=(f"behavgen_seed={run_seed}",), environment=environment,
            timeout_s=_LONGEST_S,
        )  # fmt: skip
        found = read_outcomes(outcomes) if outcomes.is_file() else ()
        if finished.code != 0 or not results.is_file() or any(one.message for one in found):
            raise _failed(log, finished.tail())
        return read_results(results)


def _failed(log: Path, tail: str) -> ToolError:
    return ToolError(Fault(file=str(log), what=f"the converter did not run\n{tail}"))
