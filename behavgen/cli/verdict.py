"""How a command ends: one verdict, one next step, one exit code."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from behavgen.cli.caution import CAUTION
from behavgen.cli.parser import Options
from behavgen.cli.terminal import Terminal
from behavgen.cli.wording import wrapped
from behavgen.errors import BehavgenError, Fault, FitError, TableError, ToolError

__all__ = ["JSON_FORMAT", "Outcome", "finish"]

JSON_FORMAT = 1
"""Version of the ``--json`` object; raised when an old reader would misread a new one."""

_DISAGREEMENT = 1
_KINDS: tuple[tuple[type[BehavgenError], str], ...] = (
    (TableError, "tables"),
    (ToolError, "tools"),
    (FitError, "fit"),
    (BehavgenError, "usage"),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What came of a command.

    Parameters
    ----------
    said : str
        The verdict in one sentence without its full stop; empty when an error says it all.
    next_step : str
        What to do now; a command line where there is one.
    data : mapping
        What ``--json`` gives beside the verdict, plain values only.
    errors : tuple of BehavgenError
        Why some or all of it could not be done.
    disagreements : tuple of str
        Cells whose check failed.
    warnings : tuple of str
        What ``--strict`` does not let pass.
    shows_results : bool
        Whether the caution belongs under it.
    """

    said: str = ""
    next_step: str = ""
    data: Mapping[str, object] = field(default_factory=dict)
    errors: tuple[BehavgenError, ...] = ()
    disagreements: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()
    shows_results: bool = False

    @property
    def faults(self) -> tuple[Fault, ...]:
        """All faults, each once."""
        return tuple(dict.fromkeys(fault for error in self.errors for fault in error.faults))

    def failures(self, *, strict: bool) -> list[str]:
        """Return what failed: kinds of errors, ``"disagreement"``, ``"warnings"``."""
        found = dict.fromkeys(_kind(error) for error in self.errors)
        if self.disagreements:
            found["disagreement"] = None
        if strict and self.warnings:
            found["warnings"] = None
        return list(found)

    def exit_code(self, *, strict: bool) -> int:
        """Return the exit code; of several errors that of the earliest stage."""
        if self.errors:
            return min(error.exit_code for error in self.errors)
        return _DISAGREEMENT if self.failures(strict=strict) else 0


def finish(outcome: Outcome, options: Options, terminal: Terminal) -> int:
    """Print diagnostics and verdict, and return the exit code."""
    exit_code = outcome.exit_code(strict=options.strict)
    if outcome.shows_results:
        terminal.say()
        for line in wrapped(CAUTION):
            terminal.say(terminal.paint(line, "quiet"))
    for fault in outcome.faults:
        terminal.complain(str(fault))
    if options.strict:
        for warning in outcome.warnings:
            terminal.complain(f"warning: {warning}")
    terminal.give(_as_data(outcome, options, exit_code))
    if outcome.said:
        terminal.conclude(_verdict_line(outcome, options, terminal, passed=exit_code == 0))
    terminal.flush()
    return exit_code


def _verdict_line(outcome: Outcome, options: Options, terminal: Terminal, *, passed: bool) -> str:
    mark = terminal.paint("OK", "good") if passed else terminal.paint("NOT OK", "bad")
    said = outcome.said
    if options.strict and outcome.warnings:
        count = len(outcome.warnings)
        said += f"; {count} warning{' fails' if count == 1 else 's fail'} under --strict"
    following = f"  Next: {outcome.next_step}" if outcome.next_step else ""
    return f"{mark}  {said}.{following}"


def _as_data(outcome: Outcome, options: Options, exit_code: int) -> dict[str, object]:
    own = {
        "format": JSON_FORMAT,
        "command": options.command,
        "ok": exit_code == 0,
        "exit_code": exit_code,
        "failed_by": outcome.failures(strict=options.strict),
        "disagreements": list(outcome.disagreements),
        "warnings": list(outcome.warnings),
        "faults": [
            {"file": f.file, "row": f.row, "column": f.column, "what": f.what, "allowed": f.allowed}
            for f in outcome.faults
        ],
        "said": outcome.said,
        "next": outcome.next_step,
    }
    if outcome.shows_results:
        own["caution"] = CAUTION
    return {**outcome.data, **own}


def _kind(error: BehavgenError) -> str:
    return next(name for kind, name in _KINDS if isinstance(error, kind))
