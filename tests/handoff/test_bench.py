"""The self-checking bench in a bare folder: it passes on the model and fails on anything else."""

from __future__ import annotations

import re
import shutil
import subprocess

import pytest

from behavgen.handoff.vectors import checksum
from tests.example_models import complete_model, full_model
from tests.handoff.packages import MODELS, path_without_python, started, written


def bench_alone(folder):
    """Compile and run the bench as its README says, without looking at the manifest."""
    name = folder.name.removesuffix("_handoff")
    code, said = started(folder, "iverilog", "-g2012", "-s", f"{name}_bench", "-o", "bench.vvp",
                         "-c", "files.f", "-c", "bench.f")  # fmt: skip
    assert code == 0, said
    return started(folder, "vvp", "-n", "bench.vvp")


def test_the_path_of_these_tests_has_no_python():
    assert shutil.which("python3", path=path_without_python()) is None
    assert shutil.which("python", path=path_without_python()) is None


@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS)
def test_unpacking_and_one_command_pass_in_icarus(model, tmp_path):
    written(model(), tmp_path / "sent")
    (tmp_path / "received").mkdir()
    archive = next((tmp_path / "sent").glob("*.tar.gz"))
    subprocess.run(["tar", "-xzf", archive, "-C", tmp_path / "received"], check=True)
    (folder,) = (tmp_path / "received").iterdir()
    for command in (("./run.sh", "icarus"), ("make", "-s", "icarus"), ("make",)):
        code, said = started(folder, *command)
        assert code == 0, said
        assert re.search(r"^PASS +\d{4,} values compared in \d{3,4} decisions, none wrong$", said,
                         re.MULTILINE), said  # fmt: skip
        assert "warning" not in said.lower()


@pytest.mark.slow
def test_unpacking_and_one_command_pass_in_verilator(tmp_path):
    folder = written(full_model(), tmp_path)
    code, said = started(folder, "./run.sh", "verilator")
    assert code == 0, said
    assert re.search(r"^PASS +\d{4,} values", said, re.MULTILINE), said
    turn_one_expectation(folder)
    code, said = started(folder, "work/bench")
    assert code != 0
    assert re.search(r"FAIL  1 of \d+ values wrong", said)
    (folder / "bench" / "vectors" / "run0_inputs.hex").unlink()
    code, said = started(folder, "work/bench")
    assert code != 0
    assert "a vector file is missing or damaged" in said


MUTANTS = {
    "trip point": (r"offset_t0v0c0 = 0\.001;", "offset_t0v0c0 = 0.0010001;"),
    "regeneration": (r"tau_t0v0c0 = -24\.635;", "tau_t0v0c0 = -24.6349;"),
    "noise": (r"noise_t0v0c0 = -7\.6;", "noise_t0v0c0 = -7.599;"),
    "reset": (r"reset_t0v0c0 = -24\.41;", "reset_t0v0c0 = -24.409;"),
    "random numbers": (r"64'h9e37_79b9_7f4a_7c15", "64'h9e37_79b9_7f4a_7c13"),
    "seed": (r"SEED == 64'd0 \?", "SEED != 64'd0 ?"),
}


@pytest.mark.parametrize("what", MUTANTS)
def test_a_tampered_model_fails(what, tmp_path):
    folder = written(full_model(), tmp_path)
    module = folder / "models" / "latch_full.sv"
    pattern, other = MUTANTS[what]
    text, count = re.subn(pattern, other, module.read_text())
    assert count > 0, "the mutant must change something"
    module.write_text(text)
    code, said = bench_alone(folder)
    assert code != 0
    assert "FAIL" in said
    assert "PASS" not in said
    code, said = started(folder, "./run.sh", "icarus")
    assert code != 0
    assert "models/latch_full.sv: FAILED" in said


def test_a_model_without_its_memory_fails(tmp_path):
    folder = written(complete_model(), tmp_path)
    module = folder / "models" / f"{complete_model().cell.name}.sv"
    text, count = re.subn(r"MEMORY_ON != 0", "MEMORY_ON == 0", module.read_text())
    assert count > 0
    module.write_text(text)
    code, said = bench_alone(folder)
    assert code != 0
    assert "FAIL" in said


@pytest.mark.parametrize("kind", ["clock", "inputs", "expected"])
@pytest.mark.parametrize("damage", ["digit", "cut", "gone"])
def test_damaged_vectors_fail_even_without_the_manifest(kind, damage, tmp_path):
    folder = written(full_model(), tmp_path)
    file = folder / "bench" / "vectors" / f"run1_{kind}.hex"
    lines = file.read_text().splitlines(keepends=True)
    digit = lines[5][7]
    damaged = {
        "digit": [*lines[:5], lines[5][:7] + ("1" if digit != "1" else "2") + lines[5][8:],
                  *lines[6:]],
        "cut": lines[:40],
        "gone": [],
    }[damage]  # fmt: skip
    if damaged:
        file.write_text("".join(damaged))
    else:
        file.unlink()
    code, said = bench_alone(folder)
    assert code != 0
    assert "FAIL  typ, hottest, noise off: a vector file is missing or damaged" in said
    assert "PASS" not in said
    code, said = started(folder, "./run.sh")
    assert code != 0
    assert file.name in said


def turn_one_expectation(folder):
    """Expect the opposite of one output, under a checksum that fits."""
    file = folder / "bench" / "vectors" / "run0_expected.hex"
    head, *words = file.read_text().split("\n")
    values = [int(word, 16) for word in words[:-2]]
    place = next(n for n, value in enumerate(values) if value & 3 in (0, 1))
    values[place] ^= 1
    rows = [f"{value:016x}" for value in (*values, checksum(values))]
    file.write_text("\n".join([head, *rows, ""]))


def test_an_expectation_that_is_wrong_but_whole_fails(tmp_path):
    folder = written(full_model(), tmp_path)
    turn_one_expectation(folder)
    code, said = bench_alone(folder)
    assert code != 0
    assert re.search(r"^FAIL  typ, coldest, noise off: outp is [01] at [0-9.]+ ns, expected [01]$",
                     said, re.MULTILINE)  # fmt: skip
    assert re.search(r"FAIL  1 of \d+ values wrong", said)


def test_the_checksum_is_that_of_the_published_hash():
    # FNV-1a of the one-byte texts "a" and "b": Fowler, Noll, Vo, IETF draft, test vectors.
    assert checksum([ord("a")]) == 0xAF63DC4C8601EC8C
    assert checksum([ord("b")]) == 0xAF63DF4C8601F1A5
    assert checksum([]) == 0xCBF29CE484222325
