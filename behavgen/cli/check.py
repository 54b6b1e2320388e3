"""The command ``check``: whether the emitted models do what their reference says."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict
from itertools import groupby
from pathlib import Path

from behavgen.check.verdict import CheckReport, Disagreement, Stratum
from behavgen.cli.cells import (
    CellResult,
    CellsDone,
    add_cells_argument,
    chosen_places,
    command_line,
    each_cell,
    number_of,
)
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal, aligned
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import behind, labelled, shown_path, state_text
from behavgen.errors import Fault, ProjectError
from behavgen.pipeline import CellPlace, check_cell, check_given_file, emit_cell, fit_cell
from behavgen.units import format_si

ABOUT = """\
Simulate the emitted SystemVerilog of each cell, decision by decision, against the
reference. Exit code 1 means that they disagree. Needs a simulator: see behavgen tools."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = """behavgen check latch_a
  behavgen check latch_a --model edited.sv"""


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)
    parser.add_argument(
        "--model", metavar="FILE", help="check this SystemVerilog file instead of the emitted one"
    )


def run(options: Options, terminal: Terminal) -> Outcome:
    """Check the cells asked for."""
    given = _given_file(options) if options.model else None

    def work(place: CellPlace) -> CellResult:
        return check_one(place, given, options, terminal)

    done = each_cell(options, terminal, work)
    return done.outcome(options, done=_verdict_of(done), then=_next_step(done, options))


def check_one(
    place: CellPlace, given: Path | None, options: Options, terminal: Terminal
) -> CellResult:
    """Check one cell's emitted model, or the given file in its place."""
    fitted = fit_cell(place)
    with terminal.progress(f"simulating {place.name}") as progress:
        if given is not None:
            checked = check_given_file(fitted, given, jobs=options.jobs, progress=progress)
        else:
            checked = check_cell(emit_cell(fitted), jobs=options.jobs, progress=progress)
    return check_result(checked.report, checked.logs, made=checked.made)


def check_result(report: CheckReport, logs: Path, *, made: bool) -> CellResult:
    """Return what there is to say of a check."""
    failed = [bench for bench in report.benches if not bench.passed]
    passed = len(report.benches) - len(failed)
    return CellResult(
        lines=[
            *labelled("simulator", report.simulator + state_text(made=made)),
            *labelled("compared", _compared_text(report)),
            *(line for d in report.disagreements[:1] for line in labelled("first", first_text(d))),
            *labelled("benches", f"{passed} of {len(report.benches)} passed"),
            *(line for b in failed for line in labelled("failed", f"{b.name}: {b.message}")),
            *_stratum_lines("too few", [s for s in report.strata if s.short]),
            *_stratum_lines("thinnest", _thinnest(report.strata)),
            *labelled("logs", shown_path(logs)),
        ],
        more=_stratum_lines("covered", report.strata),
        data={**asdict(report), "made": made, "logs": shown_path(logs)},
        agrees=report.passed,
    )


def first_text(first: Disagreement) -> str:
    """Tell one disagreement in a sentence."""
    return (
        f"{first.what} of decision {first.decision} in run {first.run} at "
        f"{format_si(first.time_s, 's', 6)}: expected {first.expected}, got {first.got}, "
        f"with {format_si(first.vdiff_v, 'V', 4)} applied and "
        f"{format_si(first.overdrive_v, 'V', 4)} of overdrive at {first.conditions}"
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
