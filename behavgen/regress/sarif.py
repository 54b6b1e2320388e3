"""A run as SARIF 2.1.0 (OASIS): what fails or wants a look, at its line of a user's file."""

from __future__ import annotations

import json
from collections.abc import Sequence
from pathlib import PurePosixPath
from urllib.parse import quote

from behavgen.files import sha256_of_text
from behavgen.regress.findings import KINDS, Finding, Spot

__all__ = ["sarif_json"]

_SCHEMA = "https://json.schemastore.org/sarif-2.1.0.json"
_LEVELS = {"error": "error", "failed": "error", "warning": "warning", "note": "note"}
_SHOWN_ROWS = 10


def sarif_json(
    findings: Sequence[Finding], *, project_file: str, version: str = "", caution: str = ""
) -> str:
    """Return the text of the file.

    Parameters
    ----------
    findings : sequence of Finding
        Those that passed are left out.
    project_file : str
        Path of the project file from the root of the repository, with forward slashes.
    version : str
        Of this program.
    caution : str
        What holds for all results.
    """
    told = [finding for finding in findings if finding.level in _LEVELS]
    rules = [kind for kind in KINDS if any(finding.kind == kind for finding in told)]
    driver: dict[str, object] = {
        "name": "behavgen",
        "rules": [_rule(kind) for kind in rules],
    }
    if version:
        driver["version"] = version
    run: dict[str, object] = {
        "tool": {"driver": driver},
        "columnKind": "unicodeCodePoints",
        "results": [_result(finding, rules, project_file) for finding in told],
    }
    if caution:
        run["properties"] = {"caution": caution}
    log = {"$schema": _SCHEMA, "version": "2.1.0", "runs": [run]}
    return json.dumps(log, indent=2, sort_keys=True) + "\n"


def _rule(kind: str) -> dict[str, object]:
    return {
        "id": kind,
        "name": kind.capitalize(),
        "shortDescription": {"text": f"{KINDS[kind].capitalize()}."},
    }


def _result(finding: Finding, rules: Sequence[str], project_file: str) -> dict[str, object]:
    spots = finding.spots or (Spot(),)
    message = f"{finding.cell}: {finding.subject}: {finding.message}."
    result: dict[str, object] = {
        "ruleId": finding.kind,
        "ruleIndex": rules.index(finding.kind),
        "level": _LEVELS[finding.level],
        "message": {"text": message},
        "locations": [_location(spots[0], project_file)],
        # What a finding is about stays the same from run to run, its numbers do not.
        "partialFingerprints": {
            "subject/v1": sha256_of_text(f"{finding.cell}\n{finding.kind}\n{finding.subject}")
        },
    }
    if others := spots[1:_SHOWN_ROWS]:
        result["relatedLocations"] = [_location(spot, project_file) for spot in others]
    return result


def _location(spot: Spot, project_file: str) -> dict[str, object]:
    physical: dict[str, object] = {"artifactLocation": {"uri": _uri(spot.file, project_file)}}
    if spot.line:
        physical["region"] = {"startLine": spot.line}
    location: dict[str, object] = {"physicalLocation": physical}
    if spot.words:
        location["message"] = {"text": spot.words}
    return location


def _uri(file: str, project_file: str) -> str:
    """Return a file's relative reference (RFC 3986), from the root of the repository."""
    project = PurePosixPath(project_file)
    if file in ("", project.name):
        return quote(project.as_posix())
    path = PurePosixPath(file)
    if path.is_absolute():
        return "file://" + quote(path.as_posix())
    return quote((project.parent / path).as_posix())
