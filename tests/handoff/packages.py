"""Packages of hand-made models, and a PATH on which no Python is."""

from __future__ import annotations

import os
import subprocess
from functools import cache
from pathlib import Path
from tempfile import mkdtemp

from behavgen.check.verdict import BenchResult, CheckReport
from behavgen.emit.emit import emit
from behavgen.handoff.archive import write_package
from behavgen.handoff.package import Wishes, package_files, package_name
from behavgen.handoff.packed_file import PackedFile
from behavgen.model import ComparatorModel
from behavgen.simulators.verilator import find_verilator
from tests.example_models import complete_model, full_model, minimal_model, renamed_pins_model

MODELS = {
    "full": full_model, "complete": complete_model, "minimal": minimal_model,
    "renamed": renamed_pins_model,
}  # fmt: skip


def report(*, passed: bool = True) -> CheckReport:
    """Return the report of a check that nobody ran."""
    return CheckReport(
        cell="latch", passed=passed, simulator="Icarus Verilog 11.0 (stable)", model_sha256="",
        emitted_sha256="", decisions=24000, strata=(),
        benches=(BenchResult(name="test_agreement", passed=passed),),
        disagreement_count=0 if passed else 7,
    )  # fmt: skip


def files_of(
    model: ComparatorModel, wishes: Wishes | None = None, check: CheckReport | None = None
) -> dict[str, PackedFile]:
    files = package_files(model, emit(model), check or report(), wishes or Wishes())
    return {file.path: file for file in files}


def written(model: ComparatorModel, place: Path, wishes: Wishes | None = None) -> Path:
    """Write a package and return its folder."""
    files = tuple(files_of(model, wishes).values())
    folder, _ = write_package(files, place=place, name=package_name(model))
    return folder


@cache
def path_without_python() -> str:
    """Return a PATH with all programs of this machine but Python, and with Verilator."""
    folder = Path(mkdtemp(prefix="behavgen-path-"))
    for place in ("/usr/bin", "/bin", *os.environ["PATH"].split(os.pathsep)):
        for program in Path(place).iterdir() if Path(place).is_dir() else ():
            taken = (folder / program.name).is_symlink()
            if not taken and "python" not in program.name and not program.name.startswith("pypy"):
                (folder / program.name).symlink_to(program)
    verilator = find_verilator()
    (folder / "verilator").unlink(missing_ok=True)
    root = f"export VERILATOR_ROOT={verilator.root}\n" if verilator.root else ""
    (folder / "verilator").write_text(
        f"#!/bin/sh\n{root}exec {verilator.program} -MAKEFLAGS CFG_CXXFLAGS_PCH_I=-include "
        '-CFLAGS "-std=c++20 -fcoroutines" "$@"\n'
    )
    (folder / "verilator").chmod(0o755)
    return str(folder)


def started(folder: Path, *command: str) -> tuple[int, str]:
    """Run a command in a package's folder without Python; return exit code and output."""
    done = subprocess.run(
        command, cwd=folder, capture_output=True, text=True, check=False, timeout=300,
        env={"PATH": path_without_python(), "HOME": str(folder)},
    )  # fmt: skip
    return done.returncode, done.stdout + done.stderr
