"""The wheel carries everything the program reads at run time, and nothing else."""

from __future__ import annotations

import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
JUNK = ("__pycache__", ".pyc", "sim_build", ".egg-info")


@pytest.fixture(scope="module")
def wheel_names(tmp_path_factory) -> frozenset[str]:
    folder = tmp_path_factory.mktemp("wheel")
    command = [sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", str(folder)]
    subprocess.run(command, cwd=ROOT, check=True, capture_output=True)
    (wheel,) = folder.glob("*.whl")
    with zipfile.ZipFile(wheel) as archive:
        return frozenset(archive.namelist())


def _shipped(folder: Path, below: str) -> set[str]:
    files = {path.relative_to(folder).as_posix() for path in folder.rglob("*") if path.is_file()}
    return {f"{below}/{name}" for name in files if not any(junk in name for junk in JUNK)}


@pytest.mark.slow
@pytest.mark.parametrize(
    ("folder", "below"),
    [
        ("templates", "behavgen/templates"),
        ("sim", "behavgen/sim"),
        ("behavgen", "behavgen"),
    ],
)
def test_every_file_the_program_reads_is_in_the_wheel(wheel_names, folder, below):
    expected = _shipped(ROOT / folder, below)
    assert expected
    assert expected <= wheel_names


@pytest.mark.slow
def test_nothing_else_is_in_the_wheel(wheel_names):
    foreign = {
        name
        for name in wheel_names
        if not name.startswith("behavgen") or any(j in name for j in JUNK)
    }
    assert not foreign


@pytest.mark.slow
def test_wheel_carries_the_licence(wheel_names):
    assert any(name.endswith("/licenses/LICENSE") for name in wheel_names)
