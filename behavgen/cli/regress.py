"""The command ``regress``: every cell against the baseline and the limits, one verdict."""

from __future__ import annotations

import os
from dataclasses import asdict, replace
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.cli.cells import add_cells_argument, chosen_places, command_line, number_of
from behavgen.cli.comparison_text import comparison_lines, finding_lines, quiet_lines, since_lines
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import shown_path

if TYPE_CHECKING:
    from collections.abc import Sequence

    from behavgen.project import Project
    from behavgen.regress.findings import Finding
    from behavgen.regress.history import History
    from behavgen.regress.past import PastRun, PastValue
    from behavgen.regress.regression import Regression
    from behavgen.regress.since import Since
    from behavgen.regress.verdict import CellVerdict, RunVerdict

ABOUT = """\
Fit the cells whose tables, settings or program changed, compare every cell with its record
in the baseline, and judge the limits of the project file. What noise in the tables explains
is no drift; drift within its limit is reported and passes. Exit code 1 when a number
drifted too far, an interface broke, a limit is not met or a check fails. Writes JUnit XML,
SARIF, a summary in Markdown, JSON and pages into <out>/regress/."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = """behavgen regress
  behavgen regress --check --jobs 8
  behavgen regress latch_a --since 7d"""

_FEW_CELLS = 40
"""So many have their trends drawn whether they passed or not."""


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)
    add = parser.add_argument
    add("--check", action="store_true", help="simulate the emitted models too")
    add("--since", metavar="WHEN", help="show what changed since a run: 2026-03-01, 12h, 7d, 2w")
    add("--trends", action="store_true", help="draw the trends of all cells, however many")
    add("--keep-runs", metavar="N", help="delete all but the last N runs from the history")
    add(
        "--scheduler", metavar="ADDRESS",
        help="spread over a Dask cluster (default: DASK_SCHEDULER_ADDRESS, if set)",
    )  # fmt: skip


def run(options: Options, terminal: Terminal) -> Outcome:
    """Judge the cells asked for."""
    places = chosen_places(options)
    project = places[0].project
    from behavgen.regress.history import HISTORY_FILE, History  # noqa: PLC0415
    from behavgen.regress.moments import moment_of, present_moment  # noqa: PLC0415
    from behavgen.regress.regression import Regression  # noqa: PLC0415
    from behavgen.regress.since import past_run  # noqa: PLC0415

    keep_runs = _count(options.keep_runs)
    regression = Regression.of(project)
    with History(project.out / HISTORY_FILE) as history:
        now = present_moment()
        then = past_run(history, moment_of(options.since, now=now)) if options.since else None
        under_way = _RunUnderWay(regression, history, history.begin(now), then)
        names = [place.name for place in places]
        under_way.judge(names, options, terminal)
        outcome = under_way.outcome(options)
        if keep_runs:
            history.prune(keep_runs=keep_runs)
    return outcome


class _RunUnderWay:
    """One run: what was judged so far, and where it is kept."""

    def __init__(
        self, regression: Regression, history: History, number: int, then: PastRun | None
    ) -> None:
        self._regression = regression
        self._history = history
        self._number = number
        self._then = then
        self._cells: list[CellVerdict] = []
        self._findings: list[Finding] = []
        self._since: dict[str, tuple[Since, ...]] = {}

    def judge(self, names: Sequence[str], options: Options, terminal: Terminal) -> None:
        """Bring the cells up to date, judge, keep and print them one after the other."""
        from behavgen.regress.findings import cell_findings  # noqa: PLC0415
        from behavgen.regress.runs import run_cells  # noqa: PLC0415
        from behavgen.regress.trends import past_values  # noqa: PLC0415

        with terminal.progress("fitting") as progress:
            for done in run_cells(
                self._regression.project,
                names,
                jobs=options.jobs,
                with_check=options.check,
                scheduler=options.scheduler or os.environ.get("DASK_SCHEDULER_ADDRESS", ""),
                progress=progress,
            ):
                verdict = self._regression.judge(done)
                self._cells.append(verdict)
                findings = cell_findings(verdict)
                self._findings += findings
                if done.model is not None:
                    values = tuple(past_values(done.name, done.model, verdict.comparison))
                    self._keep(done.name, values)
                _print(verdict, findings, self._since.get(done.name, ()), terminal)

    def outcome(self, options: Options) -> Outcome:
        """Write the files, close the run and return how the command ends."""
        from behavgen.regress.findings import run_findings  # noqa: PLC0415
        from behavgen.regress.outputs import write_outputs  # noqa: PLC0415
        from behavgen.regress.record import run_data  # noqa: PLC0415
        from behavgen.regress.verdict import RunVerdict  # noqa: PLC0415

        project = self._regression.project
        gone = () if options.cells else self._regression.gone
        verdict = RunVerdict(project_file=project.file.name, cells=tuple(self._cells), gone=gone)
        findings = (*self._findings, *run_findings(replace(verdict, cells=())))
        data = run_data(verdict, findings)
        folder = write_outputs(verdict, findings, data, project)
        self._history.finish(self._number, passed=verdict.passed)
        self._write_trends(project, folder, findings, options)
        since = {cell: [asdict(one) for one in found] for cell, found in self._since.items()}
        outcome = _outcome(verdict, findings, options, folder)
        return replace(outcome, data={"results": shown_path(folder), "since": since, **data})

    def _keep(self, cell: str, values: tuple[PastValue, ...]) -> None:
        self._history.record(self._number, values)
        if self._then is not None:
            from behavgen.regress.since import changes  # noqa: PLC0415

            past = self._history.values(self._then.number, cell)
            self._since[cell] = changes(past, values)

    def _write_trends(
        self, project: Project, folder: Path, findings: Sequence[Finding], options: Options
    ) -> None:
        """Draw the trends of what wants a look, and of everything where that is little."""
        from behavgen.files import write_whole  # noqa: PLC0415
        from behavgen.regress.outputs import CAUTIONS  # noqa: PLC0415

        file = folder / "trends.html"
        noted = {finding.cell for finding in findings if finding.level != "passed"}
        shown = [cell.name for cell in self._cells]
        if len(shown) > _FEW_CELLS and not options.trends:
            shown = [name for name in shown if name in noted]
        if not shown and file.exists():
            return
        from behavgen.regress.trends import trends_html  # noqa: PLC0415  numpy

        trends = {name: self._history.trends(name) for name in shown}
        title = project.file.resolve().parent.name
        write_whole(file, trends_html(trends, title=title, cautions=CAUTIONS))


def _print(
    verdict: CellVerdict,
    findings: Sequence[Finding],
    since: Sequence[Since],
    terminal: Terminal,
) -> None:
    terminal.say(f"{terminal.paint(verdict.name, 'strong')}   {verdict.description}".rstrip())
    for line in finding_lines(findings):
        terminal.say(line)
    for line in comparison_lines(verdict.comparison) if verdict.comparison else ():
        terminal.say(line)
    for line in since_lines(since):
        terminal.say(line)
    for line in quiet_lines(findings):
        terminal.say_more(line)
    terminal.flush()


def _count(text: str) -> int:
    """Return a whole number from 1; 0 where none is given."""
    if not text:
        return 0
    if not (text.isdecimal() and int(text) > 0):
        from behavgen.errors import Fault, ProjectError  # noqa: PLC0415

        raise ProjectError(Fault(what=f"--keep-runs {text}", allowed="a whole number from 1"))
    return int(text)


def _outcome(
    verdict: RunVerdict, findings: Sequence[Finding], options: Options, folder: Path
) -> Outcome:
    errors = tuple(cell.error for cell in verdict.cells if cell.error is not None)
    failing = [*(cell.name for cell in verdict.cells if not cell.agrees), *verdict.gone]
    page = shown_path(folder / "overview.html")
    said = f"{number_of(len(verdict.cells), 'cell')} judged"
    if failing:
        said += f"; not passed: {_listed(failing)}"
    unrecorded = any(cell.has_model and cell.comparison is None for cell in verdict.cells)
    calm = command_line(options, "baseline") if unrecorded else f"look at {page}"
    return Outcome(
        said=said,
        next_step=f"see {page}" if failing or errors else calm,
        errors=errors,
        disagreements=tuple(failing),
        warnings=tuple(
            f"{f.cell}: {f.subject}: {f.message}" for f in findings if f.level == "warning"
        ),
        shows_results=any(cell.has_model for cell in verdict.cells),
    )


def _listed(names: Sequence[str]) -> str:
    """Write the first few names."""
    few = 8
    more = f" and {len(names) - few} more" if len(names) > few else ""
    return ", ".join(names[:few]) + more
