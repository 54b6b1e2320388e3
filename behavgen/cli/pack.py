"""The command ``pack``: the package that others verify with."""

from __future__ import annotations

from typing import TYPE_CHECKING

from behavgen.cli.cells import CellResult, CellsDone, add_cells_argument, command_line, each_cell
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import labelled, shown_path
from behavgen.errors import Fault, ProjectError
from behavgen.pipeline import CellPlace, EmittedCell, current_check, emit_cell, fit_cell

if TYPE_CHECKING:
    from behavgen.check.verdict import CheckReport

ABOUT = """\
Write what others need to verify with a cell: <out>/<cell>/handoff/ gets a folder and an
archive of it, with models, a self-checking bench that needs only a simulator, guides and
a manifest. Refused unless the check of the present files has passed. It names none of
your tables."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = """behavgen pack latch_a
  behavgen pack latch_a --unchecked     although the check is stale, missing or failed"""

HANDOFF_FOLDER = "handoff"


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)
    parser.add_argument(
        "--unchecked", action="store_true",
        help="pack even though no passed check vouches for it, which every page then says",
    )  # fmt: skip
    parser.add_argument(
        "--disclose", action="store_true",
        help="name the tables in the files, and add the model file",
    )  # fmt: skip
    parser.add_argument(
        "--ipxact", choices=("2022", "2014"),
        help=f"edition of IEEE 1685 to describe the cell in (default: {Options.ipxact})",
    )  # fmt: skip


def run(options: Options, terminal: Terminal) -> Outcome:
    """Pack the cells asked for."""

    def work(place: CellPlace) -> CellResult:
        return _pack(place, options)

    done = each_cell(options, terminal, work)
    return done.outcome(options, done=_verdict_of(done), then=_next_step(done, options))


def _pack(place: CellPlace, options: Options) -> CellResult:
    emitted = emit_cell(fit_cell(place))
    checked = current_check(place)
    if checked is not None and not checked.passed and not options.unchecked:
        return _refused(checked)
    if checked is None and not options.unchecked:
        raise ProjectError(_unchecked(place))
    return _packed(emitted, checked, options)


def _packed(emitted: EmittedCell, checked: CheckReport | None, options: Options) -> CellResult:
    from behavgen.handoff.archive import write_package  # noqa: PLC0415
    from behavgen.handoff.package import Wishes, package_files, package_name  # noqa: PLC0415
    from behavgen.handoff.standing import standing_of  # noqa: PLC0415

    place = emitted.place
    wishes = Wishes(
        symbol=place.settings.symbol, vendor=place.project.vendor, ipxact=options.ipxact,
        disclose=options.disclose,
    )  # fmt: skip
    files = package_files(emitted.model, emitted.files, checked, wishes)
    folder, archive = write_package(
        files, place=place.folder / HANDOFF_FOLDER, name=package_name(emitted.model)
    )
    standing = standing_of(checked)
    return CellResult(
        lines=[
            *labelled("folder", f"{shown_path(folder)}   {len(files)} files"),
            *labelled("archive", shown_path(archive)),
            *labelled("", standing.sentence),
        ],
        data={
            "folder": shown_path(folder), "archive": shown_path(archive), "packed": True,
            "files": [file.path for file in files], "checked": standing.sound,
        },
        warnings=() if standing.sound else (standing.sentence,),
    )  # fmt: skip


def _refused(checked: CheckReport) -> CellResult:
    text = f"{checked.disagreement_count} of {checked.decisions} decisions in disagreement"
    return CellResult(
        lines=[*labelled("refused", f"the check fails: {text}")],
        data={"packed": False, "checked": False},
        agrees=False,
    )


def _unchecked(place: CellPlace) -> Fault:
    state = "is stale" if place.check_file.is_file() else "is missing"
    return Fault(
        what=f"the check of {place.name} {state}: nothing vouches for the present files",
        allowed=f"run behavgen check {place.name}, or insist with --unchecked",
    )


def _verdict_of(done: CellsDone) -> str:
    against = [name for name, result in done.results.items() if not result.agrees]
    return f"packed, but not {', '.join(against)}: the check fails" if against else "packed"


def _next_step(done: CellsDone, options: Options) -> str:
    if all(result.agrees for result in done.results.values()):
        return "unpack the archive anywhere and run ./run.sh in it"
    return f"mend what {command_line(options, 'check')} tells, or insist with --unchecked"
