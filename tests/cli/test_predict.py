"""``predict`` on a cell whose tables follow from closed forms, as users meet it."""

from __future__ import annotations

import csv
import io
import json
import math
import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.special import ndtr

from behavgen.cli.caution import CAUTION
from behavgen.units import unit_of_header
from tests.cli.commands import run
from tests.small_project import PROJECT_TEXT, write_small_project

WITHOUT_NOISE = PROJECT_TEXT[: PROJECT_TEXT.rindex("[[")]


@pytest.fixture(scope="module")
def fitted(tmp_path_factory: pytest.TempPathFactory, request: pytest.FixtureRequest) -> Path:
    """A project of the small latch, fitted by the first test that asks."""
    return write_small_project(tmp_path_factory.mktemp("predict"))


@pytest.fixture
def project(fitted: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A project in which one stands, without a simulator in reach."""
    monkeypatch.chdir(fitted)
    monkeypatch.setenv("PATH", "")
    return fitted


Capsys = pytest.CaptureFixture[str]


def settings(capsys: Capsys, *words: str) -> list[dict[str, Any]]:
    """Return the settings of the one cell as ``--json`` gives them."""
    ran = run(capsys, "predict", *words, "--json")
    assert ran.exit_code == 0, ran.stderr
    found: list[dict[str, Any]] = ran.json["cells"]["latch"]["settings"]
    return found


def test_error_by_noise_at_7_sigmas(project: Path, capsys: Capsys) -> None:
    # 1 mV of noise: 7.03448 mV is 1e-12 (tables of the normal tail), within the interval.
    (found,) = settings(capsys, "--overdrive", "7.03448m")
    error = found["log10_noise_error"]
    assert error["low"] < -12.0 < error["high"]
    assert error["level"] == 0.95
    assert found["sigmas"] == pytest.approx(7.03, abs=0.3)


def test_uniform_input_and_time_between_failures(project: Path, capsys: Capsys) -> None:
    # W = 2 * 0.8 V exp(-(t - 20 ps) / tau), tau 20 ps and 16 ps at 1 V and 1.2 V.
    words = ("--span", "500m", "--clock", "1G", "--resolve-time", "400p", "--vdd", "1,1.2")
    for found, tau_s in zip(settings(capsys, *words), (20e-12, 16e-12), strict=True):
        chance = 1.6 * math.exp(-380e-12 / tau_s) / 0.5
        assert found["log10_unresolved"]["value"] == pytest.approx(math.log10(chance), abs=0.01)
        wait = found["log10_time_between_failures_s"]["value"]
        assert wait == pytest.approx(-9.0 - math.log10(chance), abs=0.01)
        assert found["log10_unresolved"]["low"] < found["log10_unresolved"]["high"]
        # Tabulated down to 1 uV; half the window lies this far below.
        beyond = -6.0 - math.log10(0.8 * math.exp(-380e-12 / tau_s))
        assert found["decades_beyond"] == pytest.approx(beyond, abs=0.01)


def test_half_a_clock_period_is_the_resolve_time(project: Path, capsys: Capsys) -> None:
    (found,) = settings(capsys, "--span", "1", "--clock", "1.25GHz")
    assert found["case"]["resolve_time_s"] == pytest.approx(400e-12)
    assert "400 ps to resolve (half a clock period), 1.25 GHz clock" in run(
        capsys, "predict", "--span", "1", "--clock", "1.25GHz"
    ).stdout  # fmt: skip


def test_levels_are_weighted(project: Path, capsys: Capsys) -> None:
    (found,) = settings(capsys, "--levels", "-1m,2m", "--weights", "3,1")
    expected = 0.75 * ndtr(-1.0) + 0.25 * ndtr(-2.0)
    error = found["log10_noise_error"]
    assert error["low"] < math.log10(expected) < error["high"]


def test_every_number_stands_with_interval_and_basis(project: Path, capsys: Capsys) -> None:
    ran = run(capsys, "predict", "--input", "3m", "--clock", "1G", "--resolve-time", "300p",
              "--vdd", "1.1")  # fmt: skip
    assert ran.exit_code == 0
    number = r"[\d.]+(e-?\d+)?"
    chance = rf"{number} +{number}\.\.{number} \(95 %, [\d.e-]+ decades\)"
    wait = r"\S+ \w+ +\S+ \w+\.\.\S+ \w+ \(95 %, [\d.e-]+ decades\)"
    for line in (
        rf"wrong by noise +{chance} +[\d.]+ sigmas used, 2\.0 counted",
        rf"unresolved +{chance} +\S+ .V used, 1 uV tabulated, [\d.]+ decades beyond",
        rf"wrong or unresolved +{chance} +as the two above",
        rf"MTBF \(unresolved\) +{wait} +300 ps used, \d+ ps tabulated",
        r"delay +\S+ ps +\S+ ps\.\.\S+ ps \(95 %\) +\S+ mV used, 1 uV\.\.100 mV tabulated",
    ):
        assert re.search(f"^  {line}$", ran.stdout, re.MULTILINE), line
    assert "neither\ntransistor-level sign-off" in ran.stdout
    assert ran.stdout.splitlines()[-1] == "OK  1 cell predicted.  Next: behavgen report"


def test_without_options_middle_and_corners(project: Path, capsys: Capsys) -> None:
    ran = run(capsys, "predict")
    assert ran.exit_code == 0
    assert "middle and 2 corners of the characterised range" in ran.stdout
    assert re.search(r"least +\S+ ps .*at nominal, 1\.2 V\n", ran.stdout)
    assert re.search(r"most +\S+ ps .*at nominal, 1 V\n", ran.stdout)
    middle, low, high = settings(capsys)
    assert [found["case"]["vdd_v"] for found in (middle, low, high)] == [1.1, 1.0, 1.2]
    # 1 mV of overdrive: 20 ps + tau ln 800.
    for found, tau_s in ((low, 20e-12), (high, 16e-12)):
        delay_s = 20e-12 + tau_s * math.log(800.0)
        assert found["delay_s"]["value"] == pytest.approx(delay_s, rel=1e-3)
    # The longest delay of the tables: 20 ps + 20 ps ln(0.8 V / 1 uV).
    assert low["case"]["resolve_time_s"] == pytest.approx(291.8e-12, rel=1e-3)
    assert [f["case"]["vdd_v"] for f in settings(capsys, "--corners", "--input", "1m")] == [
        1.1, 1.0, 1.2
    ]  # fmt: skip


def test_waits_beyond_the_age_of_the_universe(project: Path, capsys: Capsys) -> None:
    shown = run(capsys, "predict", "--span", "1", "--clock", "1G", "--resolve-time", "10n",
                "--vdd", "1").stdout  # fmt: skip
    # 1 / (1 GHz W), W = 1.6 V exp(-499): 10^207.5 s, which is 10^200 years.
    found = re.search(r"> 1e(\d+) years +\S+e(\d+) years\.\.\S+e(\d+) years \(95 %", shown)
    assert found is not None
    bound, low, high = (int(group) for group in found.groups())
    assert bound == low <= 200 <= high


def test_sweep_has_a_row_for_every_combination(project: Path, capsys: Capsys) -> None:
    words = ("--vdd", "1:1.2:0.1", "--input", "1m:4m:x2", "--resolve-time", "200p,400p")
    found = settings(capsys, *words)
    assert len(found) == 3 * 3 * 2
    shown = run(capsys, "predict", *words).stdout
    assert re.search(r"^ +supply +input +time +value +interval +rests on$", shown, re.MULTILINE)
    assert len(re.findall(r"^ .*1\.1 V +2 mV +400 ps ", shown, re.MULTILINE)) == 4
    # Errors fall with the input, waits with time: physics, at each supply.
    errors = [f["log10_noise_error"]["value"] for f in found[:6:2]]
    assert errors == sorted(errors, reverse=True)


def test_negative_inputs_need_no_equals_sign(project: Path, capsys: Capsys) -> None:
    (found,) = settings(capsys, "--input", "-1m", "--temp", "-40")
    error = found["log10_noise_error"]
    assert error["low"] < math.log10(ndtr(-1.0)) < error["high"]  # zero is right
    (found,) = settings(capsys, "--input", "-1m", "--expect", "1")
    assert 10 ** found["log10_noise_error"]["value"] == pytest.approx(ndtr(1.0), abs=0.02)


def test_csv_on_stdout_is_nothing_else(project: Path, capsys: Capsys) -> None:
    ran = run(capsys, "predict", "--span", "1", "--clock", "1G,2G", "--csv", "-")
    assert ran.exit_code == 0
    assert ran.stderr.strip() == CAUTION
    rows = list(csv.DictReader(io.StringIO(ran.stdout)))
    assert len(rows) == 2
    for header, dimension in (("vdd [V]", "V"), ("delay_low [s]", "s"), ("temp [degC]", "K")):
        assert unit_of_header(header, dimension) is not None
        assert header in rows[0]
    assert [float(row["clock [Hz]"]) for row in rows] == [1e9, 2e9]
    low, value, high = (
        float(rows[0][f"log10_unresolved{end} [1]"]) for end in ("_low", "", "_high")
    )
    assert low < value < high
    assert rows[0]["delay [s]"] == ""


def test_csv_into_a_file(project: Path, capsys: Capsys, tmp_path: Path) -> None:
    target = tmp_path / "deep" / "numbers.csv"
    ran = run(capsys, "predict", "--input", "1m", "--csv", target)
    assert ran.stdout.splitlines()[-1].startswith(f"OK  1 cell predicted, table in {target}.")
    (row,) = csv.DictReader(io.StringIO(target.read_text(encoding="utf-8")))
    (found,) = settings(capsys, "--input", "1m")
    assert float(row["delay [s]"]) == pytest.approx(found["delay_s"]["value"], rel=1e-8)
    assert row["cell"] == "latch"


def test_clamped_settings_are_said_aloud(project: Path, capsys: Capsys) -> None:
    words = ("predict", "--input", "1m", "--vdd", "1.1:1.4:0.1")
    ran = run(capsys, *words)
    assert ran.exit_code == 0
    text = " ".join(ran.stdout.split())
    assert "delay: characterised at supply 1 V..1.2 V, clamped to that in 2 of 4 settings" in text
    strict = run(capsys, *words, "--strict")
    assert strict.exit_code == 1
    assert "clamped" in strict.stderr
    inside, at_the_edge, *beyond = settings(capsys, *words[1:])
    assert inside["outside"] == at_the_edge["outside"] == []
    for found in beyond:
        # The edge itself is asked at the nearest 2^-20 V.
        assert found["delay_s"] == pytest.approx(at_the_edge["delay_s"], rel=1e-6)
        (one,) = found["outside"]
        assert (one["quantity"], one["condition"]) == ("delay", "vdd_v")


def test_what_is_not_counted_is_named(
    tmp_path: Path, capsys: Capsys, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(write_small_project(tmp_path, project=WITHOUT_NOISE))
    ran = run(capsys, "predict", "--input", "1m", "--mismatch", "3-sigma", "--vcm", "0.5")
    assert ran.exit_code == 0
    text = " ".join(ran.stdout.split())
    for said in (
        "noise is not characterised: no error by noise is counted",
        "the offset is not characterised: the trip point is taken at 0 V",
        "without --resolve-time or --clock every decision counts as resolved",
        "mismatch is not characterised: all instances are the nominal one",
        "the common mode is not characterised and has no influence",
    ):
        assert said in text
    assert "wrong by noise" not in text


def test_a_level_of_confidence_widens_intervals(project: Path, capsys: Capsys) -> None:
    (usual,) = settings(capsys, "--input", "4m")
    (sure,) = settings(capsys, "--input", "4m", "--confidence", "0.999")
    ratio = _width(sure) / _width(usual)
    # Normal quantiles 3.29 and 1.96.
    assert ratio == pytest.approx(3.2905 / 1.9600, rel=0.05)


def _width(found: dict[str, Any]) -> float:
    error = found["log10_noise_error"]
    return float(error["high"] - error["low"])


@pytest.mark.parametrize(
    ("words", "complaints"),
    [
        (["--input", "1ps"], ["--input 1ps"]),
        (["--vdd", "1:2", "--temp", "hot"], ["--vdd 1:2", "--temp hot"]),
        (["--input", "1m", "--span", "1"], ["not allowed with argument --input"]),
        (["--input", "0"], ["at 0 V neither bit is right"]),
        (["--span", "1", "--expect", "1"], ["goes with --input or --overdrive"]),
        (["--span", "-1"], ["--span of nothing"]),
        (["--levels", "1m,2m", "--weights", "1"], ["1 weights for 2 levels"]),
        (["--input", "1m", "--weights", "1"], ["--weights without --levels"]),
        (["--clock", "0"], ["--clock 0"]),
        (["--confidence", "95"], ["--confidence 95"]),
        (["--corners", "--vdd", "1"], ["--corners beside a condition"]),
        (["--corners", "--input", "1m,2m"], ["--corners beside a series"]),
        (["--process", "nominl"], ["did you mean 'nominal'"]),
        (["--csv", "-", "--json"], ["--csv - beside --json"]),
        (["--input", "0:1:1m", "--expect", "1", "--vdd", "1:1.2:0.01"], ["21021 combinations"]),
    ],
)
def test_what_cannot_be_asked(
    project: Path, capsys: Capsys, words: list[str], complaints: list[str]
) -> None:
    ran = run(capsys, "predict", *words)
    assert ran.exit_code == 2
    for complaint in complaints:
        assert complaint in ran.stderr + ran.stdout


def test_json_has_no_infinities(
    tmp_path: Path, capsys: Capsys, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(write_small_project(tmp_path, project=WITHOUT_NOISE))
    ran = run(capsys, "predict", "--input", "10m", "--resolve-time", "1n", "--json")
    (found,) = ran.json["cells"]["latch"]["settings"]
    assert found["log10_unresolved"]["value"] is None  # without noise it cannot happen
    assert "Infinity" not in json.dumps(ran.json)
    assert np.isfinite(found["delay_s"]["value"])
