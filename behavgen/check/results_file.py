"""The results of all benches in the JUnit form that continuous integration reads."""

from __future__ import annotations

import re
from collections.abc import Sequence
from itertools import groupby
from xml.etree import ElementTree

from behavgen.check.verdict import BenchResult

__all__ = ["results_xml"]

_FORBIDDEN = re.compile("[^\t\n\r -\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
"""What XML 1.0, section 2.2, does not allow in a text."""


def results_xml(cell: str, suites: Sequence[tuple[str, BenchResult]]) -> str:
    """Return a JUnit results file.

    Parameters
    ----------
    cell : str
        Name of the whole.
    suites : sequence of (suite name, BenchResult)
        In the order of the suites.
    """
    root = ElementTree.Element("testsuites", name=_clean(cell))
    for name, group in groupby(suites, key=lambda pair: pair[0]):
        results = [result for _, result in group]
        failures = sum(not result.passed for result in results)
        suite = ElementTree.SubElement(
            root, "testsuite", name=_clean(name), tests=str(len(results)),
            failures=str(failures), errors="0", skipped="0",
        )  # fmt: skip
        for result in results:
            _add_case(suite, name, result)
    ElementTree.indent(root)
    text = ElementTree.tostring(root, encoding="unicode")
    return f'<?xml version="1.0" encoding="utf-8"?>\n{text}\n'


def _add_case(suite: ElementTree.Element, name: str, result: BenchResult) -> None:
    case = ElementTree.SubElement(
        suite, "testcase", classname=_clean(name), name=_clean(result.name)
    )
    if not result.passed:
        failure = ElementTree.SubElement(case, "failure", message=_clean(result.message))
        failure.text = _clean(result.message)


def _clean(text: str) -> str:
    return _FORBIDDEN.sub("?", text)
