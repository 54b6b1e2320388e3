"""Try the check on mutants of an emitted text: which does it catch, which not, and why.

Each mutant first meets a short probe; one that survives meets the whole check
of decisions. What survives both is either listed with the reason why nobody
can tell it from the original, or it is missed.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory
from threading import get_ident

import numpy as np

from behavgen.check.decisions import compare_decisions
from behavgen.check.given import own_text
from behavgen.check.mutation.indistinguishable import reason_for
from behavgen.check.mutation.inertness import inertness_of
from behavgen.check.mutation.mutants import Mutant, mutants_of
from behavgen.check.probe.probe import Probe, prepare_probe, probe_text
from behavgen.check.simulation import IcarusSimulation
from behavgen.model import ComparatorModel
from behavgen.simulators.icarus import Icarus, find_icarus

__all__ = ["MutationReport", "Trial", "try_mutants"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Trial:
    """One mutant and what came of it.

    Parameters
    ----------
    mutant : Mutant
    seen : str
        What gave it away; "" when nothing did.
    reason : str
        Why nobody can tell it from the original; "" when there is none.
    """

    mutant: Mutant
    seen: str
    reason: str = ""

    @property
    def missed(self) -> bool:
        """Whether the check lets a change of behaviour through."""
        return not self.seen and not self.reason


@dataclass(frozen=True, slots=True, kw_only=True)
class MutationReport:
    """Outcome of all trials, in the order of the text.

    Parameters
    ----------
    possible : int
        Mutants that the text has; `trials` may be a part of them, drawn at random.
    trials : tuple of Trial
    """

    possible: int
    trials: tuple[Trial, ...]

    @property
    def missed(self) -> tuple[Trial, ...]:
        """Trials that nothing gave away and that no reason excuses."""
        return tuple(trial for trial in self.trials if trial.missed)

    @property
    def excused(self) -> tuple[Trial, ...]:
        """Trials that nobody can tell from the original."""
        return tuple(trial for trial in self.trials if trial.reason)

    @property
    def caught(self) -> dict[str, int]:
        """How many mutants of each kind were caught."""
        return dict(Counter(trial.mutant.kind for trial in self.trials if trial.seen))


def try_mutants(
    model: ComparatorModel,
    text: str,
    *,
    sample: int | None = None,
    seed: int = 1,
    jobs: int = 2,
    tell: Callable[[str], None] | None = None,
) -> MutationReport:
    """Try mutants of a model's emitted SystemVerilog.

    Parameters
    ----------
    model : ComparatorModel
    text : str
        As emitted.
    sample : int or None
        Mutants to draw at random; None: all of them.
    seed : int
        Of the draw and of the stimulus.
    jobs : int
        Simulations at the same time.
    tell : callable or None
        Is told in words how far it is.

    Raises
    ------
    ToolError
        When the simulator is missing or too old.
    """
    icarus, pins = find_icarus(), model.cell.pins
    outputs = tuple(pin for pin in (pins.outp, pins.outn) if pin is not None)
    possible = mutants_of(text, inputs=(pins.inp, pins.inn), outputs=outputs)
    mutants = _drawn(possible, sample, seed)
    tell = tell or (lambda _: None)
    with TemporaryDirectory(prefix="behavgen-mutants-") as work:
        bench = _Bench(icarus=icarus, model=model, text=text, seed=seed, work=Path(work).resolve())
        with ThreadPoolExecutor(max_workers=max(jobs, 1)) as pool:
            trials = []
            for number, trial in enumerate(pool.map(bench.trial, mutants), start=1):
                trials.append(trial)
                tell(f"mutant {number} of {len(mutants)}")
    return MutationReport(possible=len(possible), trials=tuple(trials))


def _drawn(mutants: Sequence[Mutant], sample: int | None, seed: int) -> list[Mutant]:
    if sample is None or sample >= len(mutants):
        return list(mutants)
    drawn = np.random.default_rng(seed).choice(len(mutants), size=sample, replace=False)
    return [mutants[place] for place in sorted(drawn)]


class _Bench:
    """Tries mutants, each thread in a folder of its own."""

    def __init__(
        self, *, icarus: Icarus, model: ComparatorModel, text: str, seed: int, work: Path
    ) -> None:
        self.icarus, self.model, self.text, self.seed, self.work = icarus, model, text, seed, work
        stimulus = work / "stimulus"
        stimulus.mkdir()
        self.inertness = inertness_of(model)
        self.probe: Probe = prepare_probe(model, stimulus, seed=seed)

    def trial(self, mutant: Mutant) -> Trial:
        """Try one mutant."""
        changed = mutant.applied_to(self.text)
        seen = probe_text(self.icarus, self.probe, changed, self.work / f"{get_ident()}")
        reason = "" if seen else reason_for(mutant, self.text, self.inertness)
        if not seen and not reason:
            seen = self._whole(changed)
        return Trial(mutant=mutant, seen=seen, reason=reason)

    def _whole(self, text: str) -> str:
        """Return what the whole check of decisions sees."""
        with TemporaryDirectory(dir=self.work) as folder:
            work = Path(folder)
            simulation = IcarusSimulation(icarus=self.icarus, work=work, logs=work)
            compared = compare_decisions(
                simulation, own_text(self.model), text, seed=self.seed, jobs=1, tell=lambda _: None
            )
        failed = (result.name for _, result in compared.suites if not result.passed)
        told = (str(one) for one in compared.disagreements)
        return next(iter([*failed, *told]), "")
