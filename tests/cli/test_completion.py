"""The printed script completes commands and options in a real shell."""

from __future__ import annotations

import builtins
import subprocess
from pathlib import Path

import pytest

from tests.cli.commands import run


def test_bash_completes_commands_and_options(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    script = tmp_path / "behavgen"
    ran = run(capsys, "completion", "bash")
    assert ran.exit_code == 0
    script.write_text(ran.stdout, encoding="utf-8")

    def completed(*words: str) -> set[str]:
        typed = " ".join(f"'{word}'" for word in words)
        asked = (
            f"source {script}; COMP_WORDS=({typed}); COMP_CWORD={len(words) - 1};"
            "$(complete -p behavgen | sed 's/.*-F *\\([^ ]*\\).*/\\1/');"
            'printf "%s\\n" "${COMPREPLY[@]}"'
        )
        found = subprocess.run(["bash", "-c", asked], check=True, capture_output=True, text=True)
        return set(found.stdout.split())

    assert completed("behavgen", "rep") == {"report"}
    assert {"fit", "emit", "check"} <= completed("behavgen", "")
    assert completed("behavgen", "check", "--mod") == {"--model"}


def test_without_shtab_it_says_how_to_get_it(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    real_import = builtins.__import__

    def without_shtab(name: str, *rest: object, **more: object) -> object:
        if name == "shtab":
            raise ImportError(name)
        return real_import(name, *rest, **more)

    monkeypatch.setattr(builtins, "__import__", without_shtab)
    ran = run(capsys, "completion", "zsh")
    assert ran.exit_code == 4
    assert "pip install shtab" in ran.complaint
