"""The results file is what continuous integration expects."""

from xml.etree import ElementTree

from behavgen.check.results_file import results_xml
from behavgen.check.verdict import BenchResult

SUITES = [
    ("one", BenchResult(name="good", passed=True)),
    ("one", BenchResult(name="a < b", passed=False, message='said "no" & \x1b[31mleft\x00')),
    ("two", BenchResult(name="good", passed=True)),
]


def test_counts_and_cases():
    root = ElementTree.fromstring(results_xml("latch", SUITES))
    assert root.get("name") == "latch"
    one, two = root.findall("testsuite")
    assert (one.get("tests"), one.get("failures"), one.get("errors")) == ("2", "1", "0")
    assert (two.get("tests"), two.get("failures")) == ("1", "0")
    names = [case.get("name") for case in root.iter("testcase")]
    assert names == ["good", "a < b", "good"]


def test_what_xml_forbids_is_replaced():
    """XML 1.0 (fifth edition), 2.2: no character below 32 but tab, line feed, return."""
    root = ElementTree.fromstring(results_xml("latch", SUITES))
    (failure,) = root.iter("failure")
    assert failure.get("message") == 'said "no" & ?[31mleft?'
