"""What ``predict`` is asked, and the cases that follow from it for one model."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from behavgen.cli.parser import Options
from behavgen.cli.series import SERIES_HELP, series
from behavgen.errors import Fault, ProjectError
from behavgen.model import Box, ComparatorModel, Range, Surface
from behavgen.nearest import did_you_mean
from behavgen.units import ZERO_CELSIUS_K, UnitError

__all__ = ["Case", "Question", "cases", "read_question"]

KINDS = ("input", "overdrive", "span", "levels")

_LEVEL = 0.95
_MOST_CASES = 10_000
_INSTANCES = {"": "nominal", "average": "average", "3-sigma": "3-sigma"}
"""Choices of ``--mismatch``, as `predict` knows them."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Question:
    """The command line in SI, temperatures in degrees Celsius; empty where it is silent.

    Parameters
    ----------
    kind : str
        ``"input"``, ``"overdrive"``, ``"span"`` or ``"levels"``.
    values_v : tuple of float
        Inputs, overdrives or spans to go through; the levels of each case.
    weights : tuple of float
        One a level.
    right_bit : int or None
        None: by the sign of the input.
    resolve_time_s, clock_hz, vdd_v, temp_c, vcm_v : tuple of float
    process : tuple of str
    corners : bool
        The middle and the corners of the characterised range.
    instances : str
    level : float
    """

    kind: str = ""
    values_v: tuple[float, ...] = ()
    weights: tuple[float, ...] = ()
    right_bit: int | None = None
    resolve_time_s: tuple[float, ...] = ()
    clock_hz: tuple[float, ...] = ()
    vdd_v: tuple[float, ...] = ()
    temp_c: tuple[float, ...] = ()
    vcm_v: tuple[float, ...] = ()
    process: tuple[str, ...] = ()
    corners: bool = False
    instances: str = "nominal"
    level: float = _LEVEL

    @property
    def is_open(self) -> bool:
        """Whether nothing at all was asked in particular."""
        return self == Question(instances=self.instances, level=self.level)


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """One setting; None where a condition is not characterised or a time not asked for."""

    process: str
    vdd_v: float | None
    temp_c: float | None
    vcm_v: float | None
    value_v: float | None = None
    resolve_time_s: float | None = None
    clock_hz: float | None = None


def read_question(options: Options) -> Question:
    """Read the options.

    Raises
    ------
    ProjectError
        Names every option that cannot be read or does not go with another.
    """
    reading = _Reading()
    kind = next((kind for kind in KINDS if getattr(options, kind)), "")
    question = Question(
        kind=kind,
        values_v=reading.numbers(f"--{kind}", getattr(options, kind), "V") if kind else (),
        weights=reading.positive("--weights", options.weights, "1"),
        right_bit=int(options.expect) if options.expect else None,
        resolve_time_s=reading.positive("--resolve-time", options.resolve_time, "s"),
        clock_hz=reading.positive("--clock", options.clock, "Hz"),
        vdd_v=reading.numbers("--vdd", options.vdd, "V"),
        temp_c=reading.numbers("--temp", options.temp, "K"),
        vcm_v=reading.numbers("--vcm", options.vcm, "V"),
        process=tuple(options.process.split(",")) if options.process else (),
        corners=options.corners,
        instances=_INSTANCES[options.mismatch],
        level=reading.confidence(options.confidence),
    )
    faults = reading.faults or list(_contradictions(question))
    if faults:
        raise ProjectError(*faults)
    return question


class _Reading:
    """Reads the numbers of options and keeps what is wrong with them."""

    def __init__(self) -> None:
        self.faults: list[Fault] = []

    def numbers(self, option: str, text: str, dimension: str) -> tuple[float, ...]:
        """Return the numbers; none where the option is not given or faulty."""
        if not text:
            return ()
        try:
            return series(text, dimension)
        except UnitError as error:
            self.faults.append(Fault(what=f"{option} {text}: {error}", allowed=SERIES_HELP))
            return ()

    def positive(self, option: str, text: str, dimension: str) -> tuple[float, ...]:
        """Return numbers that must be above zero."""
        found = self.numbers(option, text, dimension)
        if any(value <= 0.0 for value in found):
            self.faults.append(Fault(what=f"{option} {text}", allowed="values above zero"))
        return found

    def confidence(self, text: str) -> float:
        """Return a confidence."""
        level = self.numbers("--confidence", text, "1") or (_LEVEL,)
        if not (len(level) == 1 and 0.0 < level[0] < 1.0):
            self.faults.append(Fault(what=f"--confidence {text}", allowed="a share such as 0.95"))
        return level[0]


def _contradictions(question: Question) -> Iterator[Fault]:
    kind, values = question.kind, question.values_v
    if question.weights and kind != "levels":
        yield Fault(what="--weights without --levels", allowed="weights are those of levels")
    elif question.weights and len(question.weights) != len(values):
        yield Fault(
            what=f"{len(question.weights)} weights for {len(values)} levels",
            allowed="one weight for each level",
        )
    if question.right_bit is not None and kind not in ("input", "overdrive"):
        yield Fault(what="--expect", allowed="goes with --input or --overdrive")
    if kind != "span" and question.right_bit is None and 0.0 in values:
        yield Fault(
            what=f"--{kind}: at 0 V neither bit is right by its sign",
            allowed="say which with --input 0 --expect 0 or --expect 1",
        )
    if kind == "span" and min(values) <= 0.0:
        yield Fault(what="--span of nothing", allowed="values above zero")
    if question.corners and any(
        (question.vdd_v, question.temp_c, question.vcm_v, question.process)
    ):
        yield Fault(what="--corners beside a condition", allowed="one or the other")
    swept = (() if kind == "levels" else values, question.resolve_time_s, question.clock_hz)
    if question.corners and any(len(values) > 1 for values in swept):
        yield Fault(what="--corners beside a series", allowed="one input and one time")


def cases(question: Question, model: ComparatorModel) -> tuple[Case, ...]:
    """Return every combination of what is asked, open conditions at the middle of the box.

    With corners: the middle first, then the corners of each process's own range.

    Raises
    ------
    ProjectError
        For a process that the model does not know, or too many cases.
    """
    _refuse_unknown(question.process, [process.name for process in model.processes])
    settings = [_middle(model), *_corners(model)] if question.corners else _asked(question, model)
    values = question.values_v if question.kind != "levels" else (None,)
    times = [
        (resolve or _half_period(clock), clock)
        for resolve in question.resolve_time_s or (None,)
        for clock in question.clock_hz or (None,)
    ]
    if (count := len(settings) * len(values) * len(times)) > _MOST_CASES:
        fault = Fault(what=f"{count} combinations", allowed=f"at most {_MOST_CASES}")
        raise ProjectError(fault)
    return tuple(
        replace(setting, value_v=value, resolve_time_s=resolve, clock_hz=clock)
        for setting in settings
        for value in values
        for resolve, clock in times
    )


def _half_period(clock_hz: float | None) -> float | None:
    """Return the decision phase of a clock that is high half of the time."""
    return None if clock_hz is None else 0.5 / clock_hz


def _asked(question: Question, model: ComparatorModel) -> list[Case]:
    middle = _middle(model)
    return [
        Case(process=process, vdd_v=vdd, temp_c=temp, vcm_v=vcm)
        for process in question.process or (middle.process,)
        for vdd in question.vdd_v or (middle.vdd_v,)
        for temp in question.temp_c or (middle.temp_c,)
        for vcm in question.vcm_v or (middle.vcm_v,)
    ]


def _middle(model: ComparatorModel) -> Case:
    vdd, temp, vcm = (None if span is None else span.middle for span in _spans(model.box))
    return Case(process=model.processes[0].name, vdd_v=vdd, temp_c=temp, vcm_v=vcm)


def _corners(model: ComparatorModel) -> list[Case]:
    """Return the corners of where each process was characterised, each once."""
    surface = _surface(model)
    found = []
    for process in model.processes:
        own = surface.variant(process.name).box if surface else model.box
        vdds, temps, vcms = (
            _ends(mine or whole) for mine, whole in zip(_spans(own), _spans(model.box), strict=True)
        )
        found += [
            Case(process=process.name, vdd_v=vdd, temp_c=temp, vcm_v=vcm)
            for vdd in vdds for temp in temps for vcm in vcms
        ]  # fmt: skip
    return found


def _ends(span: Range | None) -> tuple[float | None, ...]:
    if span is None:
        return (None,)
    return (span.low,) if span.low == span.high else (span.low, span.high)


def _surface(model: ComparatorModel) -> Surface | None:
    """Return the surface whose range counts as a process's: that of the delay if there is one."""
    if model.delay is not None:
        return model.delay.tau
    effect = model.noise or model.offset
    return None if effect is None else effect.surface


def _spans(box: Box) -> tuple[Range | None, Range | None, Range | None]:
    """Return supply, temperature in degrees Celsius and common mode."""
    kelvin = box.temperature_k
    celsius = None
    if kelvin is not None:
        low, high = (round(t - ZERO_CELSIUS_K, 9) for t in (kelvin.low, kelvin.high))
        celsius = Range(low=low, high=high)
    return box.vdd_v, celsius, box.vcm_v


def _refuse_unknown(asked: Sequence[str], known: list[str]) -> None:
    faults = [
        Fault(
            what=f"--process {name}: no such process{did_you_mean(name, known)}",
            allowed=f"processes: {', '.join(known)}",
        )
        for name in asked
        if name not in known
    ]
    if faults:
        raise ProjectError(*faults)
