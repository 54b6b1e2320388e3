"""Runs a command's work on every cell that was asked for."""

from __future__ import annotations

import os
import shlex
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from behavgen.cli.parser import Options
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.errors import BehavgenError, Fault, ProjectError
from behavgen.nearest import did_you_mean
from behavgen.pipeline import CellPlace
from behavgen.project import CellSettings, Project, load_project

__all__ = [
    "CellResult",
    "add_cells_argument",
    "command_line",
    "count_of",
    "each_cell",
    "places",
    "shown_path",
]
