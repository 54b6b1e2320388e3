"""The command ``check``: whether the emitted models do what their reference says."""

from __future__ import annotations

import secrets
import shlex
from collections.abc import Sequence
from dataclasses import asdict
from itertools import groupby
from pathlib import Path

from behavgen.check.power_words import power_words
from behavgen.check.verdict import CheckReport, Disagreement, Stratum
from behavgen.check.wishes import QUESTIONS, SIMULATORS, Wishes
from behavgen.cli.cells import (
    CellResult,
    CellsDone,
    add_cells_argument,
    chosen_places,
    command_line,
    each_cell,
    number_of,
)
from behavgen.cli.languages import compared_too
from behavgen.cli.mutants import mutated_too
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal, aligned
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import behind, labelled, shown_path, state_text
from behavgen.errors import Fault, ProjectError
from behavgen.pipeline import (
    CellPlace,
    check_cell,
    check_given_file,
    decide_again,
    emit_cell,
    fit_cell,
)
from behavgen.units import format_si

ABOUT = """\
Simulate the emitted SystemVerilog of each cell and answer three questions: does it equal
the reference, decision by decision; does it give the tables back when it is characterised
anew; is its random part distributed as it must be. Exit code 1 means that one answer is no.
Needs a simulator: see behavgen tools."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = """behavgen check latch_a
  behavgen check latch_a --model edited.sv
  behavgen check latch_a --only tables --simulator verilator"""


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)
    parser.add_argument(
        "--model", metavar="FILE", help="check this SystemVerilog file instead of the emitted one"
    )
    parser.add_argument(
        "--run", metavar="NAME", help="simulate one decision of this run again, see --decision"
    )
    parser.add_argument("--decision", metavar="N", type=int, help="its number in that run")
    parser.add_argument("--waveforms", metavar="FILE", help="leave a VCD file of that decision")
    parser.add_argument(
        "--simulator", choices=SIMULATORS,
        help="simulate in this one; what needs X is checked in the first only",
    )  # fmt: skip
    parser.add_argument(
        "--only", choices=QUESTIONS, action="append", metavar="QUESTION",
        help=f"ask one question, of {', '.join(QUESTIONS)}",
    )  # fmt: skip
    parser.add_argument(
        "--fresh-seeds", metavar="SEED", nargs="?", type=int, const=-1,
        help="judge the random part for seeds that nobody chose (false alarms: 1 in 1000), "
        "or for those that follow from SEED",
    )  # fmt: skip
    parser.add_argument(
        "--languages", action="store_true",
        help="also run all emitted languages side by side, in the simulators there are",
    )  # fmt: skip
    parser.add_argument(
        "--mutants", metavar="N", nargs="?", type=int, const=0,
        help="also try whether changes of the emitted text are caught, N of them or all",
    )  # fmt: skip


def run(options: Options, terminal: Terminal) -> Outcome:
    """Check the cells asked for."""
    given = _given_file(options) if options.model else None

    def work(place: CellPlace) -> CellResult:
        if options.run:
            return one_decision(place, given, options)
        result = check_one(place, given, options, terminal)
        if options.languages:
            result = compared_too(place, result, terminal)
        if options.mutants is not None:
            result = mutated_too(place, result, options, terminal)
        return result

    done = each_cell(options, terminal, work)
    return done.outcome(options, done=_verdict_of(done), then=_next_step(done, options))


def check_one(
    place: CellPlace, given: Path | None, options: Options, terminal: Terminal
) -> CellResult:
    """Check one cell's emitted model, or the given file in its place."""
    fitted = fit_cell(place)
    with terminal.progress(f"simulating {place.name}") as progress:
        if given is not None:
            checked = check_given_file(
                fitted, given, jobs=options.jobs, wishes=_wishes(options), progress=progress
            )
        else:
            checked = check_cell(
                emit_cell(fitted), jobs=options.jobs, wishes=_wishes(options), progress=progress
            )
    again = f"{command_line(options, 'check')} {place.name}"
    if given is not None:
        again += f" --model {shlex.quote(options.model)}"
    return check_result(checked.report, checked.logs, made=checked.made, again=again)


def one_decision(place: CellPlace, given: Path | None, options: Options) -> CellResult:
    """Simulate one decision again."""
    emitted = emit_cell(fit_cell(place))
    file = Path(options.waveforms) if options.waveforms else None
    found = decide_again(
        emitted, given, run=options.run, decision=options.decision or 0, waveforms=file
    )
    told = found.disagreement
    where = shown_path(found.waveforms) if found.waveforms else ""
    return CellResult(
        lines=[
            *labelled("decision", first_text(told) if told else "agrees"),
            *(labelled("inputs", told.inputs) if told and told.inputs else []),
            *(labelled("waveforms", where) if where else []),
        ],
        data={"disagreement": asdict(told) if told else None, "waveforms": where},
        agrees=told is None,
    )


def _wishes(options: Options) -> Wishes:
    fresh = options.fresh_seeds
    if fresh == -1:
        fresh = secrets.randbelow(2**31)
    asked = tuple(one for one in QUESTIONS if one in (options.only or QUESTIONS))
    return Wishes(simulator=options.simulator, fresh_seed=fresh, questions=asked)


def check_result(report: CheckReport, logs: Path, *, made: bool, again: str = "") -> CellResult:
    """Return what there is to say of a check; `again` is the command that made it."""
    failed = [bench for bench in report.benches if not bench.passed]
    passed = len(report.benches) - len(failed)
    return CellResult(
        lines=[
            *labelled("simulator", report.simulator + state_text(made=made)),
            *labelled("compared", _compared_text(report)),
            *(line for d in report.disagreements[:1] for line in _first_lines(again, d)),
            *labelled("benches", f"{passed} of {len(report.benches)} passed"),
            *(line for b in failed for line in labelled("failed", f"{b.name}: {b.message}")),
            *behind("tables", [f"{c.quantity}: {c.rows} rows, {c.limit}" for c in report.closure]),
            *behind("random", _random_text(report)),
            *behind("power", power_words(report)),
            *behind("left out", list(report.left_out)),
            *_stratum_lines("too few", [s for s in report.strata if s.short]),
            *_stratum_lines("thinnest", _thinnest(report.strata)),
            *labelled("logs", shown_path(logs)),
        ],
        more=_stratum_lines("covered", report.strata),
        data={**asdict(report), "made": made, "logs": shown_path(logs)},
        agrees=report.passed,
    )


def _first_lines(again: str, first: Disagreement) -> list[str]:
    command = f"{again} {first.reproduce} --waveforms window.vcd"
    return [*labelled("first", first_text(first)), *(behind("again", [command]) if again else [])]


def first_text(first: Disagreement) -> str:
    """Tell one disagreement in a sentence."""
    return (
        f"{first.what} of decision {first.decision} in run {first.run} at "
        f"{format_si(first.time_s, 's', 6)}: expected {first.expected}, got {first.got}, "
        f"with {format_si(first.vdiff_v, 'V', 4)} applied and "
        f"{format_si(first.overdrive_v, 'V', 4)} of overdrive at {first.conditions}"
        + (f"; {first.term}" if first.term else "")
    )


def _given_file(options: Options) -> Path:
    """Return the file to check; a relative path may also start at the project's folder."""
    if len(chosen_places(options)) != 1:
        fault = Fault(
            what="--model is one cell's file, and there are several cells",
            allowed="name the cell, as in: behavgen check CELL --model FILE",
        )
        raise ProjectError(fault)
    here, there = Path(options.model), Path(options.folder, options.model)
    return there if there.is_file() and not here.is_file() else here


def _compared_text(report: CheckReport) -> str:
    parts = [
        number_of(report.decisions, "decision"),
        f"{report.disagreement_count} in disagreement",
        f"largest delay difference {number_of(report.worst_delay_ticks, 'tick')}",
    ]
    if report.excluded:
        parts.append(f"{report.excluded} left out that hang on one tick")
    return ", ".join(parts)


def _random_text(report: CheckReport) -> list[str]:
    """Return what came of the statistics; nothing where nothing is random."""
    if not report.distribution:
        return []
    worst = min(report.distribution, key=lambda one: one.p_value / one.least_p)
    return [
        f"{len(report.distribution)} statistics for the seeds of {report.seed}",
        f"smallest p-value {worst.p_value:.2g}, at least {worst.least_p:.2g}: {worst.name}",
    ]


def _thinnest(strata: Sequence[Stratum]) -> list[Stratum]:
    """Return of each group the part that was exercised least for what it needs."""
    return [
        min(group, key=lambda stratum: stratum.decisions / max(stratum.required, 1))
        for _, group in groupby(strata, key=lambda stratum: stratum.group)
    ]


def _stratum_lines(label: str, strata: Sequence[Stratum]) -> list[str]:
    """Return one line a stratum, in columns, behind one label."""
    rows = [
        (
            f"{stratum.group}: {stratum.name}",
            f"{stratum.decisions} of {stratum.required} needed",
            f"{stratum.disagreements} in disagreement" if stratum.disagreements else "",
        )
        for stratum in strata
    ]
    return behind(label, aligned(rows, indent=0))


def _verdict_of(done: CellsDone) -> str:
    against = [name for name, result in done.results.items() if not result.agrees]
    if against:
        return f"checked; the check fails for {', '.join(against)}"
    return "checked; model and reference agree" if done.results else "checked"


def _next_step(done: CellsDone, options: Options) -> str:
    if all(result.agrees for result in done.results.values()):
        return command_line(options, "report")
    return "read the logs named above"
