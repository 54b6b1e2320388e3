"""External programs run into logs, and end when they take too long."""

import sys

from behavgen.simulators.process import first_line, run_logged


def run(tmp_path, text, **options):
    return run_logged(
        [sys.executable, "-c", text], log=tmp_path / "log", folder=tmp_path, **options
    )


def test_both_streams_go_to_the_log_and_the_exit_code_is_kept(tmp_path):
    text = "import sys; print('out', flush=True); print('err', file=sys.stderr); sys.exit(3)"
    done = run(tmp_path, text)
    assert done.code == 3
    assert done.text.split() == ["out", "err"]


def test_a_program_that_does_not_end_is_ended(tmp_path):
    done = run(tmp_path, "import time; print('here', flush=True); time.sleep(60)", timeout_s=1.0)
    assert done.code is None
    assert done.tail() == "here"


def test_only_the_given_environment_reaches_it(tmp_path, monkeypatch):
    monkeypatch.setenv("LEAK", "1")
    text = "import os; print('LEAK' in os.environ, os.environ['GIVEN'])"
    assert run(tmp_path, text, environment={"GIVEN": "yes"}).text.split() == ["False", "yes"]


def test_the_tail_is_the_last_lines(tmp_path):
    done = run(tmp_path, "for n in range(20): print(n)")
    assert done.tail(2) == "18\n19"


def test_the_first_line_of_a_program_that_is_not_there_is_empty(tmp_path):
    assert first_line([tmp_path / "nothing", "-V"]) == ""
    assert first_line([sys.executable, "-c", "print('one'); print('two')"]) == "one"
