"""A run as JUnit XML: a suite a cell, a case for everything that was looked at.

Written so that strict readers take it as well as lenient ones: every attribute that
the published Apache Ant schema asks for, its order of elements, and no character
that XML 1.0 forbids. A warning is a skipped case: nothing was decided.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from datetime import UTC, datetime
from html import escape  # that of xml.sax would load the network

from behavgen.regress.findings import Finding

__all__ = ["junit_xml"]

_FORBIDDEN = re.compile("[^\\t\\n\\r\\x20-\\ud7ff\\ue000-\\ufffd\\U00010000-\\U0010ffff]")
"""What is no character of XML 1.0 (W3C, Extensible Markup Language 1.0, 2.2)."""


def junit_xml(findings: Sequence[Finding], *, epoch_s: int = 0) -> str:
    """Return the text of the file.

    Parameters
    ----------
    findings : sequence of Finding
    epoch_s : int
        Time stamp of the suites, seconds after 1970; the schema asks for one.
    """
    cells: dict[str, list[Finding]] = {}
    for finding in findings:
        cells.setdefault(finding.cell, []).append(finding)
    stamp = datetime.fromtimestamp(epoch_s, tz=UTC).strftime("%Y-%m-%dT%H:%M:%S")
    suites = [
        line
        for k, (cell, mine) in enumerate(cells.items())
        for line in _suite(k, cell, mine, stamp)
    ]
    lines = ['<?xml version="1.0" encoding="UTF-8"?>', "<testsuites>", *suites, "</testsuites>"]
    return "\n".join(lines) + "\n"


def _suite(number: int, cell: str, findings: Sequence[Finding], stamp: str) -> list[str]:
    levels = [finding.level for finding in findings]
    attributes = {
        "id": str(number),
        "name": cell,
        "package": "behavgen",
        "hostname": "localhost",
        "timestamp": stamp,
        "tests": str(len(findings)),
        "failures": str(levels.count("failed")),
        "errors": str(levels.count("error")),
        "skipped": str(sum(map(_is_undecided, findings))),
        "time": "0",
    }
    return [
        f"  <testsuite{_attributes(attributes)}>",
        "    <properties/>",
        *(line for finding in _named_apart(findings) for line in _case(finding)),
        "    <system-out/>",
        "    <system-err/>",
        "  </testsuite>",
    ]


def _named_apart(findings: Sequence[Finding]) -> list[tuple[str, Finding]]:
    """Return each finding with a name of its own: readers merge cases of one name."""
    seen: dict[str, int] = {}
    found = []
    for finding in findings:
        name = f"{finding.kind}: {finding.subject}"
        seen[name] = seen.get(name, 0) + 1
        found.append((f"{name} ({seen[name]})" if seen[name] > 1 else name, finding))
    return found


def _case(named: tuple[str, Finding]) -> list[str]:
    name, finding = named
    classname = f"behavgen.{finding.cell}"
    head = f"    <testcase{_attributes({'name': name, 'classname': classname, 'time': '0'})}"
    message = {"message": finding.message}
    if _is_undecided(finding):
        return [f"{head}>", f"      <skipped{_attributes(message)}/>", "    </testcase>"]
    if not finding.fails:
        return [f"{head}/>"]
    element = "error" if finding.level == "error" else "failure"
    places = "\n".join(_place(spot.file, spot.line, spot.words) for spot in finding.spots)
    body = _text("\n".join(part for part in (finding.message, places) if part))
    attributes = _attributes(message | {"type": finding.kind})
    return [f"{head}>", f"      <{element}{attributes}>{body}</{element}>", "    </testcase>"]


def _is_undecided(finding: Finding) -> bool:
    return finding.level == "warning" or (finding.kind == "limit" and finding.level == "note")


def _place(file: str, line: int | None, words: str) -> str:
    place = f"{file or 'behavgen.toml'}" + (f":{line}" if line else "")
    return f"{place} {words}".rstrip()


def _attributes(values: dict[str, str]) -> str:
    return "".join(f' {key}="{_attribute(value)}"' for key, value in values.items())


def _attribute(text: str) -> str:
    """Return an attribute's value; plain line ends in it would be read as spaces."""
    return escape(_allowed(text)).replace("\n", "&#10;").replace("\t", "&#9;")


def _text(text: str) -> str:
    return escape(_allowed(text), quote=False)


def _allowed(text: str) -> str:
    return _FORBIDDEN.sub("\N{REPLACEMENT CHARACTER}", text)
