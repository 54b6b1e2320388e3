"""Writes what a run found, in every form, and hands the summary to a CI system that asks for it."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path

from behavgen.errors import Fault, ProjectError
from behavgen.files import write_whole
from behavgen.project import Project
from behavgen.regress.findings import Finding
from behavgen.regress.junit import junit_xml
from behavgen.regress.moments import present_moment
from behavgen.regress.overview import overview_html
from behavgen.regress.record import run_json
from behavgen.regress.sarif import sarif_json
from behavgen.regress.summary import markdown_summary
from behavgen.regress.verdict import RunVerdict

__all__ = ["CAUTIONS", "FOLDER", "path_in_repository", "write_outputs"]

FOLDER = "regress"
"""Under the project's output folder."""

CAUTIONS = (
    "These results follow from the tables named and hold inside the ranges shown; they replace "
    "neither transistor-level sign-off nor your own safety process.",
    "A drift is told from noise by the errors that the tables themselves admit: sampling error "
    "and lack of fit, not the accuracy of a process kit, parasitics, ageing, supply noise or "
    "jitter.",
    "What passes has not moved farther than it may. It does not say that the baseline was right.",
    "Where a decision affects safety, the applicable codes and qualified engineers rule; no "
    "integrity level is claimed.",
)
"""The first stands alone where there is room for one sentence."""

_SUMMARY_FILE = "GITHUB_STEP_SUMMARY"
"""Environment variable in which CI systems name the file of a job's summary."""


def write_outputs(
    run: RunVerdict, findings: Sequence[Finding], data: Mapping[str, object], project: Project
) -> Path:
    """Write all files of a run and return their folder.

    Parameters
    ----------
    run : RunVerdict
    findings : sequence of Finding
        Those of the run.
    data : mapping
        What `run_data` made of it.
    project : Project

    Raises
    ------
    ProjectError
        When one cannot be written; each appears whole or not at all.
    """
    folder = project.out / FOLDER
    summary = markdown_summary(run, findings, caution=CAUTIONS[0])
    contents = {
        "junit.xml": junit_xml(findings, epoch_s=_epoch_s()),
        "results.sarif": sarif_json(
            findings,
            project_file=path_in_repository(project.file),
            version=_version(),
            caution=" ".join(CAUTIONS),
        ),
        "summary.md": summary,
        "results.json": run_json({**data, "cautions": list(CAUTIONS)}),
        "overview.html": overview_html(
            run,
            findings,
            title=project.file.resolve().parent.name,
            links={cell.name: _links(project, cell.name) for cell in run.cells},
            cautions=CAUTIONS,
        ),
    }
    for name, text in contents.items():
        write_whole(folder / name, text)
    _append_for_ci(summary)
    return folder


def path_in_repository(file: Path) -> str:
    """Return a file's path from the root of the repository it lies in, else its bare name."""
    for folder in file.resolve().parents:
        if (folder / ".git").exists():
            return file.resolve().relative_to(folder).as_posix()
    return file.name


def _links(project: Project, cell: str) -> list[tuple[str, str]]:
    """Return the files that are there, relative to the page."""
    files = (("report", "report.html"), ("model", f"{cell}.model.json"))
    return [
        (words, f"../{cell}/{name}")
        for words, name in files
        if (project.out / cell / name).is_file()
    ]


def _append_for_ci(summary: str) -> None:
    name = os.environ.get(_SUMMARY_FILE, "")
    if not name:
        return
    try:
        with Path(name).open("a", encoding="utf-8") as file:
            file.write(summary)
    except OSError as error:
        fault = Fault(
            file=name,
            what=f"cannot be written: {error.strerror or error}",
            allowed=f"a file that {_SUMMARY_FILE} can name, or leave the variable unset",
        )
        raise ProjectError(fault) from error


def _epoch_s() -> int:
    """Return the time to write where a format demands one: 1970 unless the build says otherwise."""
    return int(present_moment().timestamp()) if os.environ.get("SOURCE_DATE_EPOCH") else 0


def _version() -> str:
    try:
        return version("behavgen")
    except PackageNotFoundError:
        return ""
