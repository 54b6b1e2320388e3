"""The command ``compare``: what became of a model between two model files."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.cli.comparison_text import comparison_lines, finding_lines, quiet_lines
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import labelled, shown_path
from behavgen.errors import ProjectError
from behavgen.model import ComparatorModel
from behavgen.model_file import load_model

if TYPE_CHECKING:
    from behavgen.limits import DriftLimit, Limit

ABOUT = """\
Compare two model files of a cell: schematic with extracted, an old process kit with a new
one, a recorded model with the present one. Interface breaks are named; a number has
drifted when noise in the tables cannot explain the difference, and too far when it goes
beyond its limit under [drift] in the project file, or has none. Exit code 1 then."""
ARGUMENTS = "OLD NEW"
EXAMPLE = """behavgen compare baseline/latch_a.model.json build/latch_a/latch_a.model.json
  behavgen compare schematic.model.json extracted.model.json --json"""


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    parser.add_argument("old", metavar="OLD", help="a model file")
    parser.add_argument("new", metavar="NEW", help="another one")


def run(options: Options, terminal: Terminal) -> Outcome:
    """Compare two model files."""
    old, new = (load_model(Path(file)) for file in (options.old, options.new))
    drift_limits, limits = _limits(options, new)
    from behavgen.regress.compare import compare  # noqa: PLC0415  scipy
    from behavgen.regress.findings import cell_findings  # noqa: PLC0415
    from behavgen.regress.limit_verdicts import limit_verdicts  # noqa: PLC0415
    from behavgen.regress.record import cell_data, finding_data  # noqa: PLC0415
    from behavgen.regress.verdict import CellVerdict  # noqa: PLC0415

    comparison = compare(old, new, drift_limits, settings=limits)
    verdict = CellVerdict(
        name=new.cell.name,
        comparison=comparison,
        limits=limit_verdicts(new, limits),
        sources=new.sources,
    )
    findings = cell_findings(verdict)
    terminal.say(f"{terminal.paint(new.cell.name, 'strong')}   {new.cell.description}".rstrip())
    files = f"{shown_path(Path(options.old))} -> {shown_path(Path(options.new))}"
    for line in (
        *labelled("models", files),
        *finding_lines(findings),
        *comparison_lines(comparison),
    ):
        terminal.say(line)
    for line in quiet_lines(findings):
        terminal.say_more(line)
    return Outcome(
        said=_said(verdict),
        next_step=""
        if verdict.agrees
        else "mend it, or allow it under [drift] in the project file",
        data={
            "old": options.old,
            "new": options.new,
            "findings": [finding_data(f) for f in findings if f.level != "passed"],
            **cell_data(verdict),
        },
        disagreements=() if verdict.agrees else (new.cell.name,),
        warnings=tuple(f"{f.subject}: {f.message}" for f in findings if f.level == "warning"),
        shows_results=True,
    )


def _limits(
    options: Options, model: ComparatorModel
) -> tuple[dict[str, DriftLimit], tuple[Limit, ...]]:
    """Return the limits that a project here has for this cell; none where there is no project."""
    from behavgen.limits import drift_limits_of, limits_of  # noqa: PLC0415
    from behavgen.project import find_project_file, load_project  # noqa: PLC0415

    try:
        file = find_project_file(Path(options.folder))
    except ProjectError:
        if options.folder != Options.folder:
            raise
        return {}, ()
    project = load_project(file)
    name = model.cell.name
    return drift_limits_of(name, project.drift_limits), limits_of(name, project.limits)


def _said(verdict: object) -> str:
    from behavgen.regress.verdict import CellVerdict  # noqa: PLC0415

    assert isinstance(verdict, CellVerdict)
    comparison = verdict.comparison
    assert comparison is not None
    parts = []
    if comparison.breaks:
        parts.append("the interface breaks")
    if comparison.beyond:
        parts.append(f"{', '.join(q.of for q in comparison.beyond)} drifted too far")
    if any(limit.state == "not met" for limit in verdict.limits):
        parts.append("a limit is not met")
    return " and ".join(parts) or "nothing moved farther than it may"
