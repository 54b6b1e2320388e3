"""Options may stand anywhere, help costs nothing, and every command shows an example."""

from __future__ import annotations

import resource
import shlex
import subprocess
import sys

import pytest

from behavgen.cli.parser import COMMANDS, Options, parse
from behavgen.errors import ProjectError
from tests.cli.commands import run

HEAVY = {"numpy", "scipy", "polars", "jinja2", "pydantic", "rich", "cocotb", "pytest"}


def parsed(line: str) -> Options:
    options = Options()
    parse(shlex.split(line), options)
    return options


@pytest.mark.parametrize(
    "line",
    ["-C there -q fit a b", "fit -C there a -q b", "fit a b -q -C there", "-q fit a -Cthere b"],
)
def test_options_may_stand_anywhere(line: str) -> None:
    options = parsed(line)
    assert (options.command, options.folder, options.quiet, list(options.cells)) == (
        "fit", "there", True, ["a", "b"]
    )  # fmt: skip


def test_what_is_not_given_has_its_default() -> None:
    options = parsed("check")
    assert options == Options(command="check")
    assert (options.folder, options.color, list(options.cells)) == (".", "auto", [])


def test_the_value_of_an_option_is_no_command() -> None:
    assert parsed("-C fit --jobs 3 --color never").command == "overview"
    assert parsed("--color=always check").command == "check"


@pytest.mark.parametrize("line", ["fit --verb", "fit --qui", "demo --ou x", "check --m x.sv"])
def test_options_are_not_abbreviated(line: str) -> None:
    with pytest.raises(ProjectError, match="has no option"):
        parsed(line)


@pytest.mark.parametrize("command", COMMANDS)
def test_the_help_of_a_command_shows_an_example(
    command: str, capsys: pytest.CaptureFixture[str]
) -> None:
    ran = run(capsys, command, "--help")
    assert ran.exit_code == 0
    assert f"usage: behavgen {command}" in ran.stdout
    _, _, example = ran.stdout.partition("example:\n")
    for line in example.splitlines():
        words = shlex.split(line.partition(" > ")[0])
        assert words[:2] == ["behavgen", command]
        assert parsed(shlex.join(words[1:])).command == command


def test_the_help_names_every_command(capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "--help")
    assert ran.exit_code == 0
    assert ran.stderr == ""
    for command, summary in COMMANDS.items():
        assert f"  {command:<12}{summary}\n" in ran.stdout
    assert max(map(len, ran.stdout.splitlines())) <= 90


def test_help_imports_nothing_heavy() -> None:
    script = (
        "import sys; from behavgen.__main__ import main; main(['--help']);"
        "print(' '.join(sys.modules), file=sys.stderr)"
    )
    found = subprocess.run(
        [sys.executable, "-c", script], check=True, capture_output=True, text=True
    )
    assert HEAVY.isdisjoint(found.stderr.split())


@pytest.mark.parametrize("command", COMMANDS)
def test_the_help_of_a_command_imports_none_of_the_slowest(command: str) -> None:
    script = (
        f"import sys; from behavgen.__main__ import main; main(['{command}', '--help']);"
        "print(' '.join(sys.modules), file=sys.stderr)"
    )
    found = subprocess.run(
        [sys.executable, "-c", script], check=True, capture_output=True, text=True
    )
    assert HEAVY.isdisjoint(found.stderr.split())


def test_help_starts_fast() -> None:
    """At most four bare interpreter starts, in processor time, since machines are shared."""

    def seconds(*words: str) -> float:
        before = resource.getrusage(resource.RUSAGE_CHILDREN)
        subprocess.run([sys.executable, *words], check=True, capture_output=True)
        after = resource.getrusage(resource.RUSAGE_CHILDREN)
        return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime

    helping = ("-c", "from behavgen.__main__ import main; main(['--help'])")
    pairs = [(seconds("-c", "pass"), seconds(*helping)) for _ in range(9)]
    bare, helped = (min(column) for column in zip(*pairs, strict=True))
    assert helped < 4.0 * bare
