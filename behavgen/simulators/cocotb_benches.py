"""What a simulator needs to run cocotb benches, whatever the user's shell says.

Command lines of our own instead of cocotb's runner: that one lets the user's
environment win over its arguments, and ends the process on some failures.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from xml.etree import ElementTree

from behavgen.errors import Fault, ToolError

__all__ = ["BenchOutcome", "bench_environment", "read_outcomes", "vpi_library"]

_PACKAGE_PARENT = Path(__file__).resolve().parents[2]
_MEANINGFUL_TO_PYTHON = ("COCOTB", "GPI", "PYGPI", "PYTHON", "PYTEST", "COV")
_MEANINGFUL_TO_COCOTB = frozenset(
    ("LIBPYTHON_LOC", "MODULE", "RANDOM_SEED", "TESTCASE", "TOPLEVEL", "TOPLEVEL_LANG")
)


@dataclass(frozen=True, slots=True, kw_only=True)
class BenchOutcome:
    """One cocotb test that was run.

    Parameters
    ----------
    module, name : str
    message : str
        Why it failed; "" when it passed.
    """

    module: str
    name: str
    message: str


def vpi_library(simulator: str) -> str:
    """Return the path of cocotb's VPI library for a simulator, e.g. ``"icarus"``."""
    from cocotb_tools import config  # noqa: PLC0415

    return str(config.lib_name_path("vpi", simulator))


def bench_environment(
    *, modules: Sequence[str], folder: Path, top: str, results: Path, variables: dict[str, str]
) -> dict[str, str]:
    """Return the environment of a simulator that is to run benches.

    Nothing that the user has set for Python or cocotb reaches it: an optimising
    Python would drop the assertions, a test filter the tests.

    Parameters
    ----------
    modules : sequence of str
        Names of the bench modules.
    folder : Path
        Where they are.
    top : str
        Top module of the simulation.
    results : Path
        Results file to write.
    variables : dict
        What the benches read themselves.
    """
    kept = {name: value for name, value in os.environ.items() if not _is_meant_for_benches(name)}
    paths = [str(folder), str(_PACKAGE_PARENT), *(p for p in sys.path if Path(p).is_absolute())]
    return {
        **kept,
        **_embedding(),
        "COCOTB_ANSI_OUTPUT": "0",
        "COCOTB_RANDOM_SEED": "1",
        "COCOTB_RESULTS_FILE": str(results),
        "COCOTB_REWRITE_ASSERTION_FILES": "",
        "COCOTB_TEST_MODULES": ",".join(modules),
        "COCOTB_TOPLEVEL": top,
        "OMP_NUM_THREADS": "1",
        "OPENBLAS_NUM_THREADS": "1",
        "PYTHONDONTWRITEBYTECODE": "1",
        "PYTHONHASHSEED": "0",
        "PYTHONPATH": os.pathsep.join(dict.fromkeys(paths)),
        "TOPLEVEL_LANG": "verilog",
        **variables,
    }


def _is_meant_for_benches(name: str) -> bool:
    return name.startswith(_MEANINGFUL_TO_PYTHON) or name in _MEANINGFUL_TO_COCOTB


@cache
def _embedding() -> dict[str, str]:
    """Return what cocotb's libraries need to start this very Python in the simulator."""
    import find_libpython  # noqa: PLC0415
    from cocotb_tools import config  # noqa: PLC0415

    library = find_libpython.find_libpython()
    if library is None:
        fault = Fault(
            what="this Python has no shared library, which cocotb needs inside the simulator",
            allowed="use a Python built with --enable-shared, as distributions have it",
        )
        raise ToolError(fault)
    return {
        "GPI_USERS": f"{library};{config.pygpi_entry_point()}",
        "PYGPI_PYTHON_BIN": sys.executable,
    }


def read_outcomes(results: Path) -> tuple[BenchOutcome, ...]:
    """Return all tests of a results file; none when the simulation ended without writing it."""
    from cocotb_tools.check_results import get_results  # noqa: PLC0415

    try:
        tests, failed = get_results(results)
        root = ElementTree.parse(results).getroot()
    except (RuntimeError, ElementTree.ParseError):
        return ()
    outcomes = tuple(
        BenchOutcome(
            module=case.get("classname", ""), name=case.get("name", ""), message=_message(case)
        )
        for case in root.iter("testcase")
    )
    told = sum(1 for one in outcomes if one.message)
    if (len(outcomes), told) == (tests, failed):
        return outcomes
    doubt = f"{results.name} counts {tests} tests and {failed} failures but lists others"
    return (*outcomes, BenchOutcome(module="results", name="results_file", message=doubt))


def _message(case: ElementTree.Element) -> str:
    for tag in ("failure", "error"):
        found = case.find(tag)
        if found is not None:
            return found.get("message") or found.text or tag
    return ""
