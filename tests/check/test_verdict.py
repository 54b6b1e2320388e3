"""A report survives the way through its file; another format is refused."""

import json
from dataclasses import replace

import pytest

from behavgen.check.verdict import (
    BenchResult,
    CheckReport,
    Disagreement,
    Stratum,
    dump_report,
    load_report,
)
from behavgen.errors import ModelFileError

REPORT = CheckReport(
    cell="latch", passed=False, simulator="Icarus Verilog 11.0 (stable)",
    model_sha256="0" * 64, emitted_sha256="1" * 64, decisions=24_008,
    strata=(Stratum(group="process", name="typ", decisions=5, required=10, disagreements=1),),
    benches=(BenchResult(name="every bit", passed=False, message="in 1 of 5"),),
    disagreements=(
        Disagreement(run="typ, noise on", decision=3, time_s=1.25e-9, conditions="typ, 1.2 V",
                     vdiff_v=1e-3, overdrive_v=-2e-6, what="bit", expected="1", got="0"),
    ),
    disagreement_count=1, worst_delay_ticks=2, excluded=1,
)  # fmt: skip


def test_a_report_reads_back(tmp_path):
    path = tmp_path / "check.json"
    path.write_text(dump_report(REPORT))
    assert load_report(path) == REPORT


def test_the_same_report_gives_the_same_bytes():
    assert dump_report(REPORT) == dump_report(replace(REPORT))
    assert list(json.loads(dump_report(REPORT))) == sorted(json.loads(dump_report(REPORT)))


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("not json", "cannot be read as a check report"),
        ('{"format": 99}', "check report format 99, this version reads 1"),
        ("[]", "check report format None"),
        ('{"format": 1, "cell": 7}', "cell"),
    ],
)
def test_another_file_is_refused_with_what_to_do(text, said, tmp_path):
    path = tmp_path / "check.json"
    path.write_text(text)
    with pytest.raises(ModelFileError, match="make it anew: behavgen check") as caught:
        load_report(path)
    assert said in str(caught.value)


def test_a_missing_file_is_refused(tmp_path):
    with pytest.raises(ModelFileError, match="cannot be read"):
        load_report(tmp_path / "check.json")


@pytest.mark.parametrize(("decisions", "short"), [(9, True), (10, False)])
def test_a_stratum_with_too_few_decisions_is_short(decisions, short):
    assert Stratum(group="g", name="n", decisions=decisions, required=10).short is short
