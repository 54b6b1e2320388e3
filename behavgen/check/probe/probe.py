"""A short play to many instances, with a look inside: what no output shows counts too.

Blocks of decisions are compared as in the check. Besides, each decision's
`overdrive_v` must be that of the reference to the last bit and its `delay_s` to
rounding. Scripts disturb other instances, and some must warn, to the letter.
"""

from __future__ import annotations

import os
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from behavgen.check.agreement import FAULTS, compare
from behavgen.check.harness import harness_macros, top_text, write_stimulus
from behavgen.check.probe.beside import Beside, beside_instances
from behavgen.check.probe.functions import Functions, functions_of
from behavgen.check.probe.insides import Insides, expected_insides, watching_text
from behavgen.check.probe.still import Still, harness_text, still_instances
from behavgen.check.probe.warned import COUNTERS, Warned, prepare_warned, warned_runs
from behavgen.check.runs import Batch, Run, plan_batches
from behavgen.check.script import write_script
from behavgen.check.script_agreement import first_divergence
from behavgen.check.script_runs import PreparedScript, prepare_script, script_runs
from behavgen.check.simulation import IcarusSimulation, play
from behavgen.check.stimulus import make_stimulus
from behavgen.check.verdict import BenchResult
from behavgen.check.waveform import Expectation, expect, read_record
from behavgen.model import ComparatorModel
from behavgen.simulators.icarus import Icarus

__all__ = ["Probe", "prepare_probe", "probe_result", "probe_text"]

DECISIONS = 150
"""Of each run."""
GLANCE = ("noise on", "mismatch on", "noise off, between", "forced unresolved", "delay off")
"""Ends of the names of runs that are played first: they tell most."""
TIMEOUT_S = 20.0
"""A text may wait for ever."""

_BEFORE_THE_FIRST = 5
"""Cause of the unknown outputs before the first decision."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Block:
    """A block of decisions and what must come of it."""

    run: Run
    expected: Expectation
    insides: Insides

    def fault(self, folder: Path) -> str:
        """Return the first thing that is wrong; "" where nothing is."""
        record = read_record(folder / f"{self.run.index}.events")
        agreement = compare(self.expected, record)
        wrong = np.flatnonzero(agreement.fault)
        if len(wrong):
            return f"decision {wrong[0]}: {FAULTS[agreement.fault[wrong[0]]]}"
        if not agreement.rounds_alike:
            return "delays are rounded otherwise"
        return self.insides.fault(folder / f"{self.run.index}.insides")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Disturbed:
    """A script and what must come of it."""

    prepared: PreparedScript

    @property
    def run(self) -> Run:
        """The instance."""
        return self.prepared.run

    def fault(self, folder: Path) -> str:
        """Return where it first parts from what it must show; "" where it does not."""
        record = read_record(folder / f"{self.run.index}.events")
        found = first_divergence(
            self.prepared.waveform.moments, record, self.prepared.script.finish, two_states=False
        )
        if found is not None:
            return f"decision {found.decision}: {found.what}"
        counted = _counters(folder / f"{self.run.index}.counters")["decision_count"]
        return "" if counted == len(self.prepared.decisions.edge) else "decision_count"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Warning:
    """A sequence of which must be warned.

    Parameters
    ----------
    warned : Warned
    begins : list of str
        decision_count, overdrive_v, delay_s and x_cause before anything happens.
    """

    warned: Warned
    begins: list[str]

    @property
    def run(self) -> Run:
        """The instance."""
        return self.warned.run

    def fault(self, folder: Path) -> str:
        """Return what was counted otherwise; messages are judged apart."""
        begins = (folder / f"{self.run.index}.start").read_text(encoding="ascii").split()
        if begins != self.begins:
            return "what can be read before the first decision"
        counted = _counters(folder / f"{self.run.index}.counters")
        expected = {f"{cause}_warnings": n for cause, n in self.warned.counted.items()}
        wrong = [name for name, number in expected.items() if counted[name] != number]
        wrong += [] if counted["decision_count"] == self.warned.decisions else ["decision_count"]
        return ", ".join(wrong)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Still:
    """An instance that nothing touches before the clock."""

    still: Still

    @property
    def run(self) -> Run:
        """The instance."""
        return self.still.run

    def fault(self, folder: Path) -> str:
        """Return where it first parts from what it must show; "" where it does not."""
        record = read_record(folder / f"{self.run.index}.events")
        script, moments = self.still.script, self.still.waveform.moments
        found = first_divergence(moments, record, script.finish, two_states=False)
        return "" if found is None else f"decision {found.decision}: {found.what}"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Beside:
    """Decisions beside what divides the model."""

    beside: Beside

    @property
    def run(self) -> Run:
        """The instance."""
        return self.beside.run

    def fault(self, folder: Path) -> str:
        """Return the first thing that is wrong; "" where nothing is."""
        return self.beside.insides.fault(folder / f"{self.run.index}.insides")


_Play = _Block | _Beside | _Disturbed | _Warning | _Still


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Probe:
    """Everything that is prepared once for all texts.

    Parameters
    ----------
    model : ComparatorModel
    parts : tuple
        Top module and plays of each simulation; the next follows when nothing was seen.
    functions : Functions
        Called in the first.
    folder : Path
        Holds the stimulus.
    """

    model: ComparatorModel
    parts: tuple[tuple[str, tuple[_Play, ...]], ...]
    functions: Functions
    folder: Path


def prepare_probe(model: ComparatorModel, folder: Path, *, seed: int) -> Probe:
    """Write the stimulus of a probe into a folder and work out what must come of it.

    Parameters
    ----------
    model : ComparatorModel
    folder : Path
    seed : int
    """
    plain, *_ = plan_batches(model, seed=seed)
    blocks = [_block(model, run, folder, seed) for run in (*plain.runs, _always_forced(plain))]
    index = len(blocks)
    scripted = script_runs(model, first_index=index, seed=seed)
    scripts = [prepare_script(model, run, seed=seed, two_states=False) for run in scripted]
    index += len(scripts)
    warning = [prepare_warned(model, run) for run in warned_runs(model, first_index=index)]
    index += len(warning)
    besides = beside_instances(model, first_index=index)
    stills = still_instances(model, first_index=index + len(besides))
    for run, script in (
        *((one.run, one.script) for one in scripts),
        *((one.run, one.script) for one in warning),
        *((one.run, one.script) for one in besides),
    ):
        write_script(folder, run, script)
    first: list[_Play] = [block for block in blocks if block.run.name.endswith(GLANCE)]
    others = [block for block in blocks if block not in first]
    rest: list[_Play] = [
        *others,
        *(_Disturbed(prepared=one) for one in scripts),
        *(_Warning(warned=one, begins=_begins(model)) for one in warning),
        *(_Beside(beside=one) for one in besides),
        *(_Still(still=one) for one in stills),
    ]
    functions = functions_of(model, seed=seed)
    functions.write(folder)
    calls = functions.text(first[0].run.instance)
    parts = (
        (_top(model, first, calls), tuple(first)), (_top(model, rest), tuple(rest))
    )  # fmt: skip
    return Probe(model=model, parts=parts, functions=functions, folder=folder)


def _always_forced(plain: Batch) -> Run:
    """Return a run in which no decision resolves."""
    like = next(run for run in plain.runs if run.meant.force_unresolved_every > 0)
    settings = replace(like.given, force_unresolved_every=1)
    return replace(
        like, index=len(plain.runs), name="always unresolved", given=settings, meant=settings
    )


def _begins(model: ComparatorModel) -> list[str]:
    return ["0", f"{0.0:.6e}", f"{model.cell.time_unit_s:.6e}", str(_BEFORE_THE_FIRST)]


def _block(model: ComparatorModel, run: Run, folder: Path, seed: int) -> _Block:
    short = replace(run, decisions=min(run.decisions, DECISIONS))
    stimulus = make_stimulus(model, short, seed=seed)
    write_stimulus(folder, short, stimulus)
    phase = stimulus.end - stimulus.edge
    return _Block(
        run=short, expected=expect(model, short, stimulus),
        insides=expected_insides(
            model, short, stimulus.trace, phase, stimulus.vcm_v, stimulus.vdd_v
        ),
    )  # fmt: skip


def _top(model: ComparatorModel, plays: Sequence[_Play], calls: str = "") -> str:
    """Return the module that plays them and writes down what is inside."""
    held = [one for one in plays if not isinstance(one, _Still)]
    added = [
        watching_text(model, one.run)
        if isinstance(one, _Block | _Beside)
        else _counters_text(one.run)
        for one in held
    ]
    added.append(calls)
    added += [one.still.instance for one in plays if isinstance(one, _Still)]
    text = top_text(model, [one.run for one in held])
    return text.replace("endmodule\n", "".join(added) + "endmodule\n") + harness_text()


def _counters_text(run: Run) -> str:
    """Write all counters when everything is played."""
    names = [*(f"{cause}_warnings" for cause in COUNTERS), "decision_count"]
    values = ", ".join(f"run_{run.index}.dut.{name}" for name in names)
    dut = f"run_{run.index}.dut"
    return (
        f"  int start_{run.index};\n  initial begin\n"
        f'    #1 start_{run.index} = $fopen("{run.index}.start", "w");\n'
        f'    $fdisplay(start_{run.index}, "%0d %e %e %0d", {dut}.decision_count,\n'
        f"              {dut}.overdrive_v, {dut}.delay_s, {dut}.x_cause);\n"
        f"    $fclose(start_{run.index});\n  end\n"
        f"  int counters_{run.index};\n  always @(posedge run_{run.index}.done) begin\n"
        f'    counters_{run.index} = $fopen("{run.index}.counters", "w");\n'
        f'    $fdisplay(counters_{run.index}, "{"%0d " * len(names)}", {values});\n'
        f"    $fclose(counters_{run.index});\n  end\n"
    )


def probe_result(
    icarus: Icarus, model: ComparatorModel, text: str, folder: Path, *, seed: int
) -> BenchResult:
    """Judge a text by a probe of its own.

    Parameters
    ----------
    icarus : Icarus
    model : ComparatorModel
    text : str
        The module's.
    folder : Path
        Where it can work.
    seed : int
        Of the stimulus.
    """
    stimulus, work = folder / "probe_stimulus", folder / "probe"
    stimulus.mkdir()
    seen = probe_text(icarus, prepare_probe(model, stimulus, seed=seed), text, work)
    name = "overdrives, delays, counters and messages are those of the reference"
    return BenchResult(name=name, passed=not seen, message=seen)


def probe_text(icarus: Icarus, probe: Probe, text: str, folder: Path) -> str:
    """Play the probe to a text in a folder of its own.

    Parameters
    ----------
    icarus : Icarus
    probe : Probe
    text : str
        The module's.
    folder : Path
        Reused from text to text.

    Returns
    -------
    str
        What was seen; "" when the text behaves as it must.
    """
    _link(probe.folder, folder)
    simulation = IcarusSimulation(icarus=icarus, work=folder, logs=folder)
    macros = harness_macros(probe.model, text)
    for top, plays in probe.parts:
        compiled = simulation.compile(probe.model.cell.name, text, top, macros)
        if compiled.code != 0:
            return "does not compile"
        finished = icarus.simulate(
            simulation.compiled, log=folder / "probe.log", timeout_s=TIMEOUT_S,
            plusargs=play(0, max(one.run.index for one in plays)),
        )  # fmt: skip
        if finished.code != 0:
            return "does not end" if finished.code is None else "ends early"
        seen = _first_fault(plays, folder) or _messages_wrong(plays, finished.text)
        seen = seen or _functions_wrong(probe.functions, folder)
        if seen:
            return seen
    return ""


def _functions_wrong(functions: Functions, folder: Path) -> str:
    try:
        return functions.fault(folder)
    except (OSError, ValueError):
        return "no results of the functions"


def _link(source: Path, folder: Path) -> None:
    """Give a folder the stimulus, and nothing that an earlier text left."""
    folder.mkdir(exist_ok=True)
    for path in folder.iterdir():
        if path.suffix in (".events", ".insides", ".counters", ".start"):
            path.unlink()
    for path in source.iterdir():
        if not (folder / path.name).exists():
            os.link(path, folder / path.name)


def _first_fault(plays: Iterable[_Play], folder: Path) -> str:
    for one in plays:
        try:
            fault = one.fault(folder)
        except (OSError, ValueError):
            fault = "no whole record"
        if fault:
            return f"{one.run.name}: {fault}"
    return ""


def _messages_wrong(plays: Iterable[_Play], log: str) -> str:
    """Return the first message that is missing, other or too many."""
    printed = sorted(line for line in log.splitlines() if "[behavgen]" in line)
    warning = (one for one in plays if isinstance(one, _Warning))
    expected = sorted(line for one in warning for line in one.warned.messages)
    if printed == expected:
        return ""
    odd = sorted(set(printed) ^ set(expected))
    return f"messages: {odd[0] if odd else 'one is repeated'}"


def _counters(path: Path) -> dict[str, int]:
    names = [*(f"{cause}_warnings" for cause in COUNTERS), "decision_count"]
    numbers = re.findall(r"-?\d+", path.read_text(encoding="ascii"))
    if len(numbers) != len(names):
        raise ValueError(f"{path.name} is not whole")
    return dict(zip(names, map(int, numbers), strict=True))
