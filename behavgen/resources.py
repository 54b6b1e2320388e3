"""Finds what is shipped beside the Python code: the templates and the simulation benches.

In a checkout, and so in an editable install, they are folders of the project's
root; in an installed wheel they lie inside the package.
"""

from __future__ import annotations

from functools import cache
from pathlib import Path

from behavgen.errors import Fault, ToolError

__all__ = ["sim_folder", "template_folder"]

PACKAGE = Path(__file__).resolve().parent


@cache
def template_folder() -> Path:
    """Return the folder of the Jinja templates.

    Raises
    ------
    ToolError
        When the installation lacks it.
    """
    return _shipped_folder("templates", package=PACKAGE)


@cache
def sim_folder() -> Path:
    """Return the folder of benches and simulation tops.

    Raises
    ------
    ToolError
        When the installation lacks it.
    """
    return _shipped_folder("sim", package=PACKAGE)


def _shipped_folder(name: str, *, package: Path) -> Path:
    installed = package / name
    if installed.is_dir():
        return installed
    # Beside an installed package lie other people's folders: only a project root counts.
    root = package.parent
    if (root / "pyproject.toml").is_file() and (root / name).is_dir():
        return root / name
    fault = Fault(
        file=str(installed),
        what=f"behavgen is installed without its folder '{name}'",
        allowed="install it again from a wheel or a full checkout",
    )
    raise ToolError(fault)
