"""baseline and regress on a small project: from recording to a verdict with an exit code."""

from __future__ import annotations

import json
import math
from pathlib import Path

import pytest

from tests.cli.commands import run
from tests.small_project import DELAY_ROWS, NOISE_ROWS, PROJECT_TEXT, write_small_project

LIMITS = """
[[limits]]
of = "delay"
overdrive = "1m"
below = "{delay}"

[[cells.latch.limits]]
of = "noise"
below = "1.5 mV"
"""


def slower(factor: float) -> tuple[str, ...]:
    """Delays that grow by a factor at the higher supply."""
    rows = (row.split(",") for row in DELAY_ROWS[1:])
    return (
        DELAY_ROWS[0],
        *(
            f"{vdd},{v},{float(delay) * (factor if vdd == '1.2' else 1.0):.6g}"
            for vdd, v, delay in rows
        ),
    )


def results(folder: Path) -> dict[str, bytes]:
    return {file.name: file.read_bytes() for file in (folder / "build" / "regress").iterdir()}


@pytest.fixture
def recorded(tmp_path, capsys):
    folder = write_small_project(tmp_path / "chip")
    assert run(capsys, "-C", folder, "baseline", "-q").exit_code == 0
    return folder


def test_nothing_to_judge_by_is_a_usage_error_with_the_next_step(tmp_path, capsys):
    folder = write_small_project(tmp_path)
    ran = run(capsys, "-C", folder, "regress")
    assert ran.exit_code == 2
    assert "no baseline and no limits" in ran.complaint
    assert ran.complaint.endswith("record the present models with: behavgen baseline")


def test_a_recorded_project_passes(recorded, capsys):
    ran = run(capsys, "-C", recorded, "regress")
    assert ran.exit_code == 0
    assert "the same: offset, noise, tau, delay" in ran.stdout
    assert "sign-off" in ran.stdout  # the caution
    assert set(results(recorded)) == {
        "junit.xml", "results.sarif", "summary.md", "results.json", "overview.html", "trends.html",
    }  # fmt: skip


def test_a_drift_fails_and_names_cell_and_rows(recorded, capsys):
    write_small_project(recorded, delay=slower(1.05))
    ran = run(capsys, "-C", recorded, "regress")
    assert ran.exit_code == 1
    assert "not passed: latch" in ran.stdout
    assert "drift without a limit" in ran.stdout
    # The rows of the higher supply are the second half of the table, lines 15 to 27.
    named = [line.split("delay.csv:")[1].split()[0] for line in ran.stdout.splitlines()
             if "delay.csv:" in line]  # fmt: skip
    assert named
    assert all(15 <= int(line) <= 27 for line in named)
    summary = results(recorded)["summary.md"].decode()
    assert "NOT passed" in summary
    assert "sign-off" in summary


def test_a_drift_within_its_limit_passes_and_is_reported(recorded, capsys):
    text = PROJECT_TEXT + '\n[drift]\ndelay = "8 %"\ntau = "8 %"\n'
    write_small_project(recorded, delay=slower(1.05), project=text)
    ran = run(capsys, "-C", recorded, "regress", "--json")
    assert ran.exit_code == 0
    quantities = ran.json["cells"]["latch"]["comparison"]["quantities"]
    assert quantities["delay"]["state"] == "within limit"
    # 5 % up to the table's rounding and the lack of fit of a straight line over two supplies.
    shares = [drift["share"] for drift in quantities["delay"]["drifts"]]
    assert max(shares) == pytest.approx(0.05, abs=0.005)


def test_limits_are_judged_without_a_baseline(tmp_path, capsys):
    # At 1 mV the table has 16 ps ln(800) + 20 ps = 127 ps to 20 ps ln(800) + 20 ps = 154 ps;
    # two supplies leave an interval of a factor of 1.5 to either side.
    assert 1.5 * (20.0 * math.log(800.0) + 20.0) < 400.0
    assert (20.0 * math.log(800.0) + 20.0) / 1.5 > 90.0
    folder = write_small_project(tmp_path, project=PROJECT_TEXT + LIMITS.format(delay="400 ps"))
    ran = run(capsys, "-C", folder, "regress")
    assert ran.exit_code == 0
    assert "delay at 1 mV overdrive below 400 ps: met" in ran.stdout
    write_small_project(folder, project=PROJECT_TEXT + LIMITS.format(delay="90 ps"))
    ran = run(capsys, "-C", folder, "regress", "--json")
    assert ran.exit_code == 1
    assert ran.json["disagreements"] == ["latch"]
    states = {limit["text"]: limit["state"] for limit in ran.json["cells"]["latch"]["limits"]}
    assert states["delay at 1 mV overdrive below 90 ps"] == "not met"
    sarif = json.loads(results(folder)["results.sarif"])
    (failed,) = sarif["runs"][0]["results"]
    region = failed["locations"][0]["physicalLocation"]["region"]
    line = (folder / "behavgen.toml").read_text().splitlines()[region["startLine"] - 1]
    assert line == "[[limits]]"


def test_what_the_data_cannot_decide_passes_but_not_when_strict(tmp_path, capsys):
    # Sigma is 1 mV with an error of about 2 %; a bound at 1 mV lies inside its interval.
    text = PROJECT_TEXT + '\n[[limits]]\nof = "noise"\nbelow = "1.005 mV"\n'
    folder = write_small_project(tmp_path, project=text)
    ran = run(capsys, "-C", folder, "regress")
    assert ran.exit_code == 0
    assert "not decided by the data" in ran.stdout
    assert run(capsys, "-C", folder, "regress", "--strict").exit_code == 1


def test_noise_counted_anew_passes(recorded, capsys):
    # One standard deviation at each level, to both sides in turn: nothing a noise test may see.
    rows = (row.split(",") for row in NOISE_ROWS[1:])
    anew = (
        f"{v},{n},{round(int(k) + (-1) ** i * math.sqrt(int(k) * (1000 - int(k)) / 1000))}"
        for i, (v, n, k) in enumerate(rows)
    )
    write_small_project(recorded, noise=(NOISE_ROWS[0], *anew))
    ran = run(capsys, "-C", recorded, "regress")
    assert ran.exit_code == 0
    assert "within noise: offset, noise" in ran.stdout


def test_an_interface_break_is_named_as_one(recorded, capsys):
    text = PROJECT_TEXT.replace('"invented latch"\n', '"invented latch"\npins = { clk = "ck" }\n')
    write_small_project(recorded, project=text)
    ran = run(capsys, "-C", recorded, "regress")
    assert ran.exit_code == 1
    assert "port clk: interface break: clk -> ck" in ran.stdout


def test_a_cell_that_is_gone_fails_and_a_new_one_is_named(recorded, capsys):
    renamed = PROJECT_TEXT.replace("cells.latch", "cells.other")
    write_small_project(recorded, project=renamed)
    ran = run(capsys, "-C", recorded, "regress", "--json")
    assert ran.exit_code == 1
    assert ran.json["gone"] == ["latch"]
    assert any("not in the baseline" in text for text in ran.json["warnings"])
    # Asked for one cell, others are no matter.
    assert run(capsys, "-C", recorded, "regress", "other").exit_code == 0


def test_mixed_stages_are_warned_about(recorded, capsys):
    text = PROJECT_TEXT.replace('quantity = "delay"\n', 'quantity = "delay"\nstage = "extracted"\n')
    text = text.replace('quantity = "noise"\n', 'quantity = "noise"\nstage = "schematic"\n')
    write_small_project(recorded, project=text)
    ran = run(capsys, "-C", recorded, "regress")
    assert ran.exit_code == 0
    words = " ".join(ran.stdout.split())
    assert "stages are mixed: extracted in delay.csv; schematic in noise.csv" in words
    assert run(capsys, "-C", recorded, "regress", "--strict").exit_code == 1


def test_a_table_that_cannot_be_read_has_the_exit_code_of_tables(recorded, capsys):
    write_small_project(recorded, delay=(*DELAY_ROWS, "1.0,1e-3,fast"))
    ran = run(capsys, "-C", recorded, "regress")
    assert ran.exit_code == 3
    assert "delay.csv:28" in ran.stderr
    assert b"<error" in results(recorded)["junit.xml"]


def test_a_changed_baseline_file_is_refused(recorded, capsys):
    file = recorded / "baseline" / "latch.model.json"
    file.write_text(file.read_text().replace("invented", "another"))
    ran = run(capsys, "-C", recorded, "regress")
    assert ran.exit_code == 2
    assert ran.complaint.startswith("baseline/latch.model.json: not the model that was recorded")


def test_two_runs_write_the_same_bytes(recorded, capsys, tmp_path, monkeypatch):
    monkeypatch.delenv("SOURCE_DATE_EPOCH", raising=False)
    write_small_project(recorded, delay=slower(1.05))
    run(capsys, "-C", recorded, "regress")
    first = results(recorded)
    run(capsys, "-C", recorded, "regress")
    again = results(recorded)
    copy = tmp_path / "elsewhere" / "chip"
    write_small_project(copy, delay=slower(1.05))
    (copy / "baseline").mkdir()
    for file in (recorded / "baseline").iterdir():
        (copy / "baseline" / file.name).write_bytes(file.read_bytes())
    run(capsys, "-C", copy, "regress", "--jobs", "1")
    for name in ("junit.xml", "results.sarif", "summary.md", "results.json", "overview.html"):
        assert first[name] == again[name] == results(copy)[name], name


def test_the_summary_is_added_to_the_file_that_a_ci_system_names(recorded, capsys, monkeypatch):
    summary = recorded / "job.md"
    summary.write_text("before\n")
    monkeypatch.setenv("GITHUB_STEP_SUMMARY", str(summary))
    run(capsys, "-C", recorded, "regress")
    text = summary.read_text()
    assert text.startswith("before\n## Comparator models: passed")
    monkeypatch.setenv("GITHUB_STEP_SUMMARY", str(recorded / "no" / "such" / "folder.md"))
    ran = run(capsys, "-C", recorded, "regress")
    assert ran.exit_code == 2
    assert "GITHUB_STEP_SUMMARY" in ran.stderr


def test_what_changed_since_a_past_run_is_shown(recorded, capsys, monkeypatch):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1700000000")
    run(capsys, "-C", recorded, "regress")
    write_small_project(recorded, delay=slower(1.05))
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1700700000")
    ran = run(capsys, "-C", recorded, "regress", "--since", "7d", "--json")
    changed = {one["parameter"]: one for one in ran.json["since"]["latch"]}
    tau = changed["tau_s"]
    assert tau["new"]["value"] > tau["old"]["value"]
    assert "noise_sigma_v" not in changed
    ran = run(capsys, "-C", recorded, "regress", "--since", "60d")
    assert ran.exit_code == 2
    assert "no finished run by" in ran.complaint


def test_the_history_may_be_deleted(recorded, capsys):
    run(capsys, "-C", recorded, "regress")
    for file in (recorded / "build").glob("history.sqlite*"):
        file.unlink()
    assert run(capsys, "-C", recorded, "regress").exit_code == 0


def test_recording_again_accepts_a_drift(recorded, capsys):
    write_small_project(recorded, delay=slower(1.05))
    assert run(capsys, "-C", recorded, "regress").exit_code == 1
    ran = run(capsys, "-C", recorded, "baseline", "--json")
    assert ran.json["changed"] == ["latch"]
    assert run(capsys, "-C", recorded, "regress").exit_code == 0


def test_nothing_is_recorded_when_a_cell_cannot_be_fitted(recorded, capsys):
    before = {f.name: f.read_bytes() for f in (recorded / "baseline").iterdir()}
    two = PROJECT_TEXT + PROJECT_TEXT.replace("latch", "broken").replace("delay.csv", "none.csv")
    write_small_project(recorded, project=two, delay=slower(1.05))
    ran = run(capsys, "-C", recorded, "baseline")
    assert ran.exit_code == 3
    assert "none recorded" in ran.stdout
    assert {f.name: f.read_bytes() for f in (recorded / "baseline").iterdir()} == before


@pytest.mark.parametrize(
    ("words", "what"),
    [
        (("--keep-runs", "none"), "a whole number from 1"),
        (("--since", "yesterday"), "is no moment"),
        (("nocell",), "no cell 'nocell'"),
    ],
)
def test_wrong_options_are_told(recorded, capsys, words, what):
    ran = run(capsys, "-C", recorded, "regress", *words)
    assert ran.exit_code == 2
    assert what in ran.stderr
