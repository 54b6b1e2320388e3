"""Which runs a check consists of: the settings of each simulated instance.

A run is one instance of the emitted module with its parameters, played one
block of decisions. A batch is one simulator process; what it is given on
its command line reaches all of its instances. The plan spreads processes,
temperatures, switches and random seeds over runs so that every coefficient of
the model decides something somewhere.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import count

import numpy as np

from behavgen.check.conditions import spread
from behavgen.check.rare_draws import rare_draw_seeds
from behavgen.formulas import random_stream
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel, Process
from behavgen.reference import Reference
from behavgen.units import ZERO_CELSIUS_K

__all__ = [
    "FEWEST_DECISIONS",
    "MODES",
    "TOP",
    "Batch",
    "Run",
    "Settings",
    "plan_batches",
    "reference_of",
]

TOP = "check_top"
"""Module that holds the instances of all runs."""

MODES = ("x", "coin", "hold")
"""Meaning of UNRESOLVED_MODE."""

DECISIONS = 24_000
"""Decisions of a whole check, spread evenly over its runs."""
FEWEST_DECISIONS = 400
"""Of one run."""

_UNCHARACTERISED_C = 27.0
_OUTSIDE = 0.07
"""How far outside the characterised temperatures a run goes, as a share of their span."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Settings:
    """Parameters of one instance, as emitted modules have them.

    Parameters
    ----------
    process : str
        By name; the module knows it by its code.
    seed : int
        0: the instance's own hierarchical path.
    run_seed : int
        Only from the command line.
    unresolved_mode : int
        Index into `MODES`.
    """

    process: str
    temperature_c: float
    noise_on: bool = True
    mismatch_on: bool = False
    memory_on: bool = True
    delay_on: bool = True
    offset_shift_v: float = 0.0
    seed: int = 1
    run_seed: int = 0
    unresolved_mode: int = 0
    force_unresolved_every: int = 0
    warnings: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """One instance and the number of decisions that are played to it.

    Parameters
    ----------
    index : int
        Names its instance and its files.
    name : str
        Unique in a check, in words.
    given : Settings
        What the instance's parameters are set to.
    meant : Settings
        What it must behave like; differs where the command line wins.
    decisions : int
        0: a bench drives the instance itself.
    balanced : bool
        Every input takes back the noise of its decision.
    scripted : bool
        A script is played to it instead of a block.
    """

    index: int
    name: str
    given: Settings
    meant: Settings
    decisions: int = 0
    balanced: bool = False
    scripted: bool = False

    @property
    def instance(self) -> str:
        """Name of the harness instance."""
        return f"run_{self.index}"

    @property
    def path(self) -> str:
        """Hierarchical path of the comparator's instance, from which it derives its seed."""
        return f"{TOP}.{self.instance}.dut"


@dataclass(frozen=True, slots=True, kw_only=True)
class Batch:
    """One simulator process.

    Parameters
    ----------
    name : str
    plusargs : tuple of str
        Without the leading plus sign.
    runs : tuple of Run
    benches : tuple of str
        Names of the bench modules that drive them; none: blocks are played.
    """

    name: str
    plusargs: tuple[str, ...]
    runs: tuple[Run, ...]
    benches: tuple[str, ...] = ()


def reference_of(model: ComparatorModel, run: Run) -> Reference:
    """Return what a run's instance must behave like."""
    meant = run.meant
    return Reference(
        model,
        seed=meant.seed or path_seed(run.path),
        run_seed=meant.run_seed,
        noise=meant.noise_on,
        mismatch=meant.mismatch_on,
        memory=meant.memory_on,
        delay_on=meant.delay_on,
        offset_shift_v=meant.offset_shift_v,
        when_unresolved=MODES[meant.unresolved_mode],
        force_unresolved_every=meant.force_unresolved_every,
    )


def plan_batches(
    model: ComparatorModel, *, seed: int = 1, decisions: int = DECISIONS
) -> tuple[Batch, ...]:
    """Return all batches that play blocks.

    Parameters
    ----------
    model : ComparatorModel
    seed : int
        Varies temperatures and random seeds.
    decisions : int
        How many to spread over the runs.
    """
    plain = {**_process_runs(model, seed), **_special_runs(model, seed)}
    commanded = _commanded_runs(model, seed)
    each = max(-(-decisions // (len(plain) + len(commanded))), FEWEST_DECISIONS)
    number = count()
    runs = [
        Run(index=next(number), name=name, given=settings, meant=settings, decisions=each)
        for name, settings in plain.items()
    ]
    runs += [
        Run(index=next(number), name=name, given=settings, meant=settings, decisions=2,
            balanced=True)
        for name, settings in _rare_runs(model).items()
    ]  # fmt: skip
    batches = [Batch(name="parameters", plusargs=(), runs=tuple(runs))]
    for name, (given, meant, plusargs) in commanded.items():
        run = Run(index=next(number), name=name, given=given, meant=meant, decisions=each)
        batches.append(Batch(name=name, plusargs=plusargs, runs=(run,)))
    return tuple(batches)


def _process_runs(model: ComparatorModel, seed: int) -> dict[str, Settings]:
    """Visit every process at both ends of the temperatures and between, noise off and on."""
    runs: dict[str, Settings] = {}
    for number, process in enumerate(model.processes):
        low, high, *between = _temperatures(model, start=seed + 3 * number)
        own = path_seed(f"{seed} {process.name}")
        base = Settings(process=process.name, temperature_c=low, seed=own)
        quiet = replace(base, noise_on=False)
        mismatch = replace(quiet, mismatch_on=True, seed=_telling_seed(model, own))
        named = {
            "noise off, coldest": quiet,
            "noise off, hottest": replace(quiet, temperature_c=high, unresolved_mode=1),
            "noise off, between": replace(quiet, temperature_c=between[0], unresolved_mode=2),
            "noise on": replace(base, temperature_c=between[1], unresolved_mode=number % 3),
            "noise on, offset shifted": replace(
                base, temperature_c=between[2], offset_shift_v=0.0137, unresolved_mode=1
            ),
            "mismatch on": replace(mismatch, temperature_c=between[0]),
        }
        runs |= {f"{process.name}, {name}": settings for name, settings in named.items()}
    return runs


def _special_runs(model: ComparatorModel, seed: int) -> dict[str, Settings]:
    """Visit every switch, and temperatures outside the characterised ones."""
    low, high, middle, *_ = _temperatures(model, start=seed + 1)
    beyond = _OUTSIDE * (high - low) + 5.0
    base = Settings(process=_widest_process(model), temperature_c=middle, seed=seed + 10)
    quiet = replace(base, noise_on=False)
    forgetful = {"memory off": replace(quiet, memory_on=False)} if model.memory else {}
    return {
        **forgetful,
        "colder than characterised": replace(quiet, temperature_c=round(low - beyond, 3)),
        "hotter than characterised": replace(base, temperature_c=round(high + beyond, 3)),
        "delay off": replace(base, delay_on=False),
        "forced unresolved": replace(base, force_unresolved_every=3, unresolved_mode=1),
        "forced unresolved, delay off": replace(
            base, delay_on=False, force_unresolved_every=4, offset_shift_v=-0.021
        ),
        "seed from the path": replace(base, seed=0, mismatch_on=True, unresolved_mode=1),
    }


def _rare_runs(model: ComparatorModel) -> dict[str, Settings]:
    """Visit the outermost branch of the normal distribution, which no ordinary run meets."""
    if model.noise is None:
        return {}
    middle = _temperatures(model, start=0)[2]
    base = Settings(process=_widest_process(model), temperature_c=middle)
    return {
        f"rare draw {number}": replace(base, seed=seed)
        for number, seed in enumerate(rare_draw_seeds(), start=1)
    }


def _commanded_runs(
    model: ComparatorModel, seed: int
) -> dict[str, tuple[Settings, Settings, tuple[str, ...]]]:
    """Return (given, meant, plusargs): what the command line says must win."""
    low, high, middle, *_ = _temperatures(model, start=seed + 2)
    codes = {process.name: process.code for process in model.processes}
    wanted = _widest_process(model)
    other = next((name for name in reversed(codes) if name != wanted), wanted)
    given = Settings(process=other, temperature_c=low, noise_on=False, seed=seed + 20)
    meant = replace(
        given, process=wanted, temperature_c=middle, noise_on=True, mismatch_on=True,
        run_seed=seed + 30,
    )  # fmt: skip
    switched_off = replace(given, noise_on=True, mismatch_on=True, temperature_c=high, seed=0)
    return {
        "command line": (
            given, meant,
            (f"behavgen_seed={seed + 30}", "behavgen_noise=1", "behavgen_mismatch=1",
             f"behavgen_temp_c={middle!r}", f"behavgen_process={codes[wanted]}"),
        ),
        "command line, switched off": (
            switched_off, replace(switched_off, noise_on=False, mismatch_on=False),
            ("behavgen_noise=0", "behavgen_mismatch=0"),
        ),
    }  # fmt: skip


def _temperatures(model: ComparatorModel, *, start: int) -> tuple[float, ...]:
    """Return the lowest, the highest and three temperatures between, degrees Celsius."""
    span = model.box.temperature_k
    if span is None:
        return (_UNCHARACTERISED_C,) * 5
    kelvin = span.low + (span.high - span.low) * spread(3, 1, start=start)[:, 0]
    ends = (span.low - ZERO_CELSIUS_K, span.high - ZERO_CELSIUS_K)
    return tuple(round(float(t), 3) for t in (*ends, *(kelvin - ZERO_CELSIUS_K)))


def _widest_process(model: ComparatorModel) -> str:
    """Return the process whose quantities were measured over most temperatures in all."""
    effects = (model.offset, model.noise, model.reset)
    surfaces = [effect.surface for effect in effects if effect is not None]
    surfaces += [] if model.delay is None else [model.delay.tau]

    def width(process: Process) -> float:
        spans = (surface.variant(process.name).box.temperature_k for surface in surfaces)
        return sum(span.high - span.low for span in spans if span is not None)

    return max(model.processes, key=width).name


def _telling_seed(model: ComparatorModel, seed: int) -> int:
    """Return a seed from which no mismatch component draws a number near zero."""
    if model.mismatch is None:
        return seed
    draws = np.arange(len(model.mismatch.components))
    for candidate in range(seed, seed + 10_000):
        key = random_stream.stream_key(candidate, 0, random_stream.MISMATCH)
        normal = random_stream.standard_normal(random_stream.random_bits(key, draws))
        if np.all(np.abs(normal) > 0.3):
            return candidate
    return seed
