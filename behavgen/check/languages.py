"""The emitted languages side by side on the same few decisions, each in a simulator of its own.

The check of the SystemVerilog text is thorough and lies elsewhere; here a reader
sees that all files a cell is handed over in say the same.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator, Sequence
from dataclasses import asdict, dataclass, replace
from pathlib import Path
from tempfile import TemporaryDirectory

from behavgen.check.language_cases import LanguageCase, language_cases
from behavgen.check.language_runs import RUNS, Found, Played
from behavgen.errors import Fault, ModelFileError
from behavgen.files import sha256_of_text, write_whole
from behavgen.model import ComparatorModel, Pins
from behavgen.model_file import dump_model
from behavgen.reference import Reference

__all__ = [
    "ComparedDecision",
    "LanguageColumn",
    "LanguageComparison",
    "Outcome",
    "compare_languages",
    "load_languages",
]

FORMAT = 1
_FILE = "languages.json"
_LANGUAGES = {
    "Icarus Verilog": ("SystemVerilog", "one unit of time"),
    "Verilator": ("SystemVerilog", "one unit of time"),
    "VACASK": ("Verilog-A, continuous", "1 % or a tenth of tau"),
    "evas-sim": ("Verilog-A, event-driven", "0.01 ps"),
}
_EVENT_TOLERANCE_S = 0.01e-12
_RELATIVE_TOLERANCE = 0.01
_TAU_TOLERANCE = 0.1
_MEMORY_TOLERANCE = 0.1
"""Of the continuous model, as it is said of the delay and of the memory's shift."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ComparedDecision:
    """A decision and what the reference says of it.

    Parameters
    ----------
    words : str
        What it is for.
    process : str
    vdd_v, temp_c, vcm_v : float
    overdrive_v : float
        Beyond the trip point, memory included.
    bit : int
        -1: does not resolve.
    delay_s : float
        0 for one that does not resolve.
    """

    words: str
    process: str
    vdd_v: float
    temp_c: float
    vcm_v: float
    overdrive_v: float
    bit: int
    delay_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What a simulator found of a decision.

    Parameters
    ----------
    bit : int
        -1: did not resolve.
    delay_s : float
    agrees : bool
        With the reference, bit and delay, within the language's tolerance.
    """

    bit: int
    delay_s: float
    agrees: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class LanguageColumn:
    """One language in one simulator.

    Parameters
    ----------
    simulator, language, tolerance : str
        In words.
    version : str
        As the simulator states it; "" where it is not installed.
    problem : str
        Why there are no outcomes; "" where there are.
    outcomes : tuple of Outcome
        One a decision.
    """

    simulator: str
    language: str
    tolerance: str
    version: str = ""
    problem: str = ""
    outcomes: tuple[Outcome, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class LanguageComparison:
    """All languages on the same decisions.

    Parameters
    ----------
    cell : str
    model_sha256 : str
        Of the model file's text.
    decisions : tuple of ComparedDecision
    columns : tuple of LanguageColumn
    format : int
    """

    cell: str
    model_sha256: str
    decisions: tuple[ComparedDecision, ...]
    columns: tuple[LanguageColumn, ...]
    format: int = FORMAT

    @property
    def passed(self) -> bool:
        """Whether every language that could be run agrees in every decision."""
        return all(outcome.agrees for column in self.columns for outcome in column.outcomes)


def compare_languages(
    model: ComparatorModel,
    *,
    folder: Path | None = None,
    progress: Callable[[str], None] | None = None,
) -> LanguageComparison:
    """Run the emitted files in every simulator that is installed.

    The files are emitted anew with all pins under their usual names, so that the
    same benches fit every cell.

    Parameters
    ----------
    model : ComparatorModel
    folder : Path or None
        The cell's output folder: ``check/languages.json`` is written there; None: nowhere.
    progress : callable or None
        Is told in words what happens now.

    Raises
    ------
    ToolError
        When a simulator that is installed fails.
    ProjectError
        When the folder cannot be written.
    """
    tell = progress or (lambda _: None)
    plain = replace(model, cell=replace(model.cell, pins=Pins()))
    cases = language_cases(plain)
    expected = [_expected(plain, case) for case in cases]
    columns = tuple(_column(name, plain, cases, expected, tell) for name in RUNS)
    comparison = LanguageComparison(
        cell=model.cell.name,
        model_sha256=sha256_of_text(dump_model(model)),
        decisions=tuple(one.decision for one in expected),
        columns=columns,
    )
    if folder is not None:
        text = json.dumps(asdict(comparison), indent=2, sort_keys=True, allow_nan=False) + "\n"
        write_whole(folder / "check" / _FILE, text)
    return comparison


def load_languages(folder: Path, model: ComparatorModel) -> LanguageComparison | None:
    """Return what was written to a cell's output folder; None if nothing, or of another model.

    Raises
    ------
    ModelFileError
        When the file is there and cannot be read.
    """
    path = folder / "check" / _FILE
    if not path.is_file():
        return None
    from pydantic import TypeAdapter, ValidationError  # noqa: PLC0415  heavy, and only here

    try:
        found = TypeAdapter(LanguageComparison).validate_json(path.read_bytes())
    except (OSError, ValidationError):
        fault = Fault(
            file=str(path), what="cannot be read",
            allowed="make it anew with: behavgen check --languages",
        )  # fmt: skip
        raise ModelFileError(fault) from None
    same = found.format == FORMAT and found.model_sha256 == sha256_of_text(dump_model(model))
    return found if same else None


@dataclass(frozen=True, slots=True, kw_only=True)
class _Expected:
    """A decision of the reference, and within which delays each simulator agrees, in s."""

    decision: ComparedDecision
    exact_s: float
    tolerances_s: dict[str, float]


def _expected(model: ComparatorModel, case: LanguageCase) -> _Expected:
    reference = Reference(model, noise=False)
    tick_s = model.cell.time_unit_s
    inp = [case.vcm_v + 0.5 * phase.vdiff_v for phase in case.phases]
    inn = [case.vcm_v - 0.5 * phase.vdiff_v for phase in case.phases]
    trace = reference.trace(
        [p - n for p, n in zip(inp, inn, strict=True)],
        [round(phase.length_s / tick_s) for phase in case.phases],
        [-1, *(round(phase.reset_s / tick_s) for phase in case.phases[1:])],
        **case.condition,
    )
    overdrive, resolved = float(trace.overdrive_v[-1]), not trace.unresolved[-1]
    exact_s = float(reference.delay(abs(overdrive), **case.condition)) if model.delay else tick_s
    decision = ComparedDecision(
        words=case.words, process=case.process, vdd_v=case.vdd_v, temp_c=case.temp_c,
        vcm_v=case.vcm_v, overdrive_v=overdrive,
        bit=int(trace.leaning[-1]) if resolved else -1,
        delay_s=float(trace.delay_ticks[-1]) * tick_s if resolved else 0.0,
    )  # fmt: skip
    memory = abs(float(trace.memory_v[-1]))
    return _Expected(
        decision=decision,
        exact_s=exact_s,
        tolerances_s=_tolerances(model, reference, case, abs(overdrive), memory),
    )


def _tolerances(
    model: ComparatorModel,
    reference: Reference,
    case: LanguageCase,
    magnitude_v: float,
    memory_v: float,
) -> dict[str, float]:
    tick_s = 1.01 * model.cell.time_unit_s
    if model.delay is None:  # then no language has delays to compare
        return dict.fromkeys(RUNS, float("inf"))
    slopes = reference.delay([1e-9, 1e-10], **case.condition)
    tau_s = float(slopes[1] - slopes[0]) / 2.302585092994046
    here = float(reference.delay(magnitude_v, **case.condition))
    less = max(magnitude_v - _MEMORY_TOLERANCE * memory_v, 0.1 * magnitude_v)
    by_memory = float(reference.delay(less, **case.condition)) - here
    continuous = max(_RELATIVE_TOLERANCE * here, _TAU_TOLERANCE * tau_s, by_memory)
    return {"Icarus Verilog": tick_s, "Verilator": tick_s, "VACASK": continuous,
            "evas-sim": _EVENT_TOLERANCE_S}  # fmt: skip


def _column(
    name: str,
    model: ComparatorModel,
    cases: Sequence[LanguageCase],
    expected: Sequence[_Expected],
    tell: Callable[[str], None],
) -> LanguageColumn:
    language, tolerance = _LANGUAGES[name]
    tell(f"deciding in {name}")
    column = LanguageColumn(simulator=name, language=language, tolerance=tolerance)
    if problem := _missing(name):
        return replace(column, problem=problem)
    with TemporaryDirectory(prefix="behavgen-languages-") as work:
        played: Played = RUNS[name](model, cases, Path(work).resolve())
    return replace(
        column, version=played.version, outcomes=tuple(_outcomes(name, expected, played.found))
    )


def _missing(name: str) -> str:
    from behavgen.simulators.tools import list_tools  # noqa: PLC0415  looks for all of them

    tool = next(tool for tool in list_tools() if tool.name == name)
    return "" if tool.found else "not installed"


def _outcomes(
    name: str, expected: Sequence[_Expected], found: Sequence[Found]
) -> Iterator[Outcome]:
    for one, seen in zip(expected, found, strict=True):
        rounds = _LANGUAGES[name][0] == "SystemVerilog"
        exact_s = one.decision.delay_s if rounds else one.exact_s
        close = abs(seen.delay_s - exact_s) <= one.tolerances_s[name]
        agrees = seen.bit == one.decision.bit and (seen.bit < 0 or close)
        yield Outcome(bit=seen.bit, delay_s=seen.delay_s, agrees=agrees)
