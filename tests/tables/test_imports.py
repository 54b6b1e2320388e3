"""What is slow to load is loaded only when a table is read."""

from __future__ import annotations

import subprocess
import sys

SCRIPT = """
import sys
import behavgen.project, behavgen.units, behavgen.identifiers, behavgen.tables.read
import behavgen.tables.starter, behavgen.tables.guess
print(*sorted({"polars", "pydantic", "scipy", "python_calamine"} & sys.modules.keys()))
"""


def test_polars_and_pydantic_wait_until_they_are_needed():
    command = [sys.executable, "-c", SCRIPT]
    result = subprocess.run(command, capture_output=True, text=True, check=True)
    assert result.stdout.split() == []
