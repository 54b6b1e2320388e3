"""Limits as they stand in the project file: read, spoken, and refused with their line."""

from __future__ import annotations

import pytest

from behavgen.errors import ProjectError
from behavgen.limits import drift_limits_of, limits_of
from behavgen.project import load_project
from tests.small_project import PROJECT_TEXT, write_small_project

CORNER = '\n[corners.hot]\nprocess = "ss"\ntemp = 125\nvdd = 1.62\n'


def project_with(folder, text):
    return load_project(write_small_project(folder, project=PROJECT_TEXT + text))


def faults_of(folder, text):
    with pytest.raises(ProjectError) as refused:
        project_with(folder, text)
    return [str(fault) for fault in refused.value.faults]


@pytest.mark.parametrize(
    ("lines", "said", "value"),
    [
        ('of = "offset"\nsigmas = 3\nbelow = "15m"',
         "offset with 3 sigmas of mismatch below 15 mV", 15e-3),
        ('of = "delay"\noverdrive = "1 mV"\nprocess = "ss"\nbelow = "400 ps"',
         "delay at 1 mV overdrive in ss below 400 ps", 400e-12),
        ('of = "noise"\nbelow = 700e-6', "noise below 700 uV", 700e-6),
        ('of = "window"\nresolve_time = "400p"\nbelow = "1n"',
         "window after 400 ps below 1 nV", 1e-9),
        ('of = "error"\ninput = "2m"\nclock = "1 GHz"\nbelow = 1e-12',
         "error at 2 mV input with a 1 GHz clock below 1e-12", 1e-12),
        ('of = "tau"\ncorner = "hot"\nbelow = "20p"',
         "tau in ss at 1.62 V at 125 degC below 20 ps", 20e-12),
    ],
)  # fmt: skip
def test_limits_are_read_and_spoken(tmp_path, lines, said, value):
    (limit,) = project_with(tmp_path, f"{CORNER}\n[[limits]]\n{lines}\n").limits
    assert limit.text == said
    assert limit.below == pytest.approx(value)


@pytest.mark.parametrize(
    ("text", "seconds"), [("10 years", 315576000.0), ("2 hours", 7200.0), ("5 ms", 5e-3)]
)
def test_long_times_may_be_in_years(tmp_path, text, seconds):
    entry = (
        f'\n[[limits]]\nof = "time_between_failures"\nspan = 1\nclock = "1G"\nabove = "{text}"\n'
    )
    (limit,) = project_with(tmp_path, entry).limits
    assert limit.above == pytest.approx(seconds)


def test_a_limit_knows_its_line_and_its_cell(tmp_path):
    text = '\n[[limits]]\nof = "tau"\nbelow = "20p"\n'
    text += '\n[[cells.latch.limits]]\nof = "noise"\nbelow = "1m"\n'
    project = project_with(tmp_path, text)
    lines = (tmp_path / "behavgen.toml").read_text().splitlines()
    assert [lines[limit.line - 1] for limit in project.limits] == [
        "[[limits]]", "[[cells.latch.limits]]",
    ]  # fmt: skip
    assert [limit.of for limit in limits_of("latch", project.limits)] == ["tau", "noise"]
    assert [limit.of for limit in limits_of("other", project.limits)] == ["tau"]


def test_a_cells_own_drift_limit_wins(tmp_path):
    text = '\n[drift]\ndelay = "2 %"\nnoise = "20u"\n[cells.latch.drift]\ndelay = "5%"\n'
    limits = drift_limits_of("latch", project_with(tmp_path, text).drift_limits)
    assert limits["delay"].share == pytest.approx(0.05)
    assert limits["delay"].allows(100e-12, 104.9e-12)
    assert not limits["delay"].allows(100e-12, 105.1e-12)
    assert limits["noise"].amount == pytest.approx(20e-6)
    assert not limits["noise"].allows(1e-3, 0.979e-3)


def test_limits_leave_the_cells_settings_alone(tmp_path):
    # Whatever is fitted must not be fitted anew because a limit has changed.
    plain = load_project(write_small_project(tmp_path / "a"))
    limited = project_with(tmp_path / "b", '\n[[limits]]\nof = "tau"\nbelow = "20p"\n')
    assert plain.cells == limited.cells


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ('[[limits]]\nof = "dealy"\nbelow = 1\n', "no limit of 'dealy', did you mean 'delay'?"),
        ('[[limits]]\nof = "delay"\nbelow = "1n"\n', "delay without overdrive"),
        ('[[limits]]\nof = "tau"\noverdrive = "1m"\nbelow = "1n"\n', "tau depends on no"),
        ('[[limits]]\nof = "tau"\n', "a limit without a bound"),
        ('[[limits]]\nof = "tau"\nbelow = "1 V"\n', "'1 V' is not a number"),
        ('[[limits]]\nof = "tau"\nbelw = "1n"\nbelow = "1n"\n', "did you mean 'below'?"),
        ('[[limits]]\nof = "tau"\nbelow = "1n"\ncorner = "hto"\n', "no corner 'hto'"),
        ('[[limits]]\nof = "noise"\nbelow = "1m"\nvdd = -1\n', "above 0"),
        ("[limits]\n", "entries are needed, as in [[limits]]"),
        ('[drift]\ndelya = "2 %"\n', "did you mean 'delay'?"),
        ('[drift]\ndelay = "2 V"\n', "a share such as"),
        ('[drift]\ndelay = "-2 %"\n', "0 or more"),
        ("drift = 3\n", "a table is needed, as in [drift]"),
    ],
)
def test_faults_are_told_with_their_line(tmp_path, text, what):
    # Keys before any heading belong to the file itself.
    whole = text + PROJECT_TEXT if text.startswith("drift =") else PROJECT_TEXT + text
    with pytest.raises(ProjectError) as refused:
        load_project(write_small_project(tmp_path, project=whole))
    (fault,) = refused.value.faults
    assert what in str(fault)
    assert fault.row is not None


def test_all_faults_are_told_at_once(tmp_path):
    text = '[[limits]]\nof = "tua"\nbelow = 1\n[[limits]]\nof = "tau"\n[drift]\nnoise = "x"\n'
    assert len(faults_of(tmp_path, text)) == 3
