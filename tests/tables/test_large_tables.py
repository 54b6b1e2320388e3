"""Ten million rows: time against a bare read by polars, and memory."""

from __future__ import annotations

import subprocess
import sys

import numpy as np
import polars as pl
import pytest

ROWS = 10_000_000

BARE = """
import resource, sys
import polars as pl
pl.read_csv(sys.argv[1])
used = resource.getrusage(resource.RUSAGE_SELF)
print(used.ru_utime + used.ru_stime, used.ru_maxrss)
"""
OURS = """
import resource, sys
from pathlib import Path
from behavgen.project import load_project
from behavgen.tables.read import read_tables
tables = read_tables(load_project(Path(sys.argv[1]).parent), "a")
assert tables.noise.trials.sum() == 10_000_000
used = resource.getrusage(resource.RUSAGE_SELF)
print(used.ru_utime + used.ru_stime, used.ru_maxrss)
"""


def measured(script, file):
    """Return processor seconds, which a busy machine does not stretch, and peak KiB."""
    command = [sys.executable, "-c", script, str(file)]
    result = subprocess.run(command, capture_output=True, text=True, check=True)
    seconds, kibibytes = map(float, result.stdout.split())
    return seconds, kibibytes


@pytest.mark.slow
def test_ten_million_bits_cost_at_most_twice_a_bare_read_and_little_memory(tmp_path):
    random = np.random.default_rng(20240601)
    levels_v = np.round(np.linspace(-1e-3, 1e-3, 21), 6)
    file = tmp_path / "bits.csv"
    pl.DataFrame(
        {
            "vdd": random.choice([1.62, 1.8, 1.98], ROWS),
            "temp": random.choice([-40, 27, 125], ROWS),
            "vdiff": random.choice(levels_v, ROWS),
            "bit": random.integers(0, 2, ROWS),
        }
    ).write_csv(file)
    (tmp_path / "behavgen.toml").write_text(
        '[[cells.a.tables]]\nquantity = "noise"\nfile = "bits.csv"\n'
    )
    bare_s = min(measured(BARE, file)[0] for _ in range(2))
    ours_s, ours_kib = min(measured(OURS, file) for _ in range(2))
    assert ours_s < 2.0 * bare_s
    assert ours_kib < 1.5 * 1024 * 1024
