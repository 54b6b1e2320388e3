"""behavgen.toml -> Project.  (interface; the reader follows)"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

__all__ = ["CellSettings", "Corner", "Project", "TableSettings"]


@dataclass(frozen=True, slots=True, kw_only=True)
class TableSettings:
    """One ``[[cells.NAME.tables]]`` entry, defaults already applied."""

    quantity: str
    file: str
    columns: Mapping[str, str]
    units: Mapping[str, str]
    where: Mapping[str, tuple[str | float, ...]]
    at: Mapping[str, str | float]
    failed: tuple[str, ...]
    measured: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Corner:
    """A named set of conditions, as used in a ``corner`` column; None: not fixed."""

    name: str
    process: str | None
    temperature_k: float | None
    vdd_v: float | None
    vcm_v: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class CellSettings:
    """One cell as the user describes it; SI units."""

    name: str
    description: str
    decides_on: str
    in_reset: str
    when_unresolved: str
    process_codes: Mapping[str, int]
    reset_delay_s: float | None
    supply_off_v: float | None
    time_precision: str
    pins: Mapping[str, str | None]
    tables: tuple[TableSettings, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Project:
    """A project file, read and judged."""

    file: Path
    out: Path
    cells: tuple[CellSettings, ...]
    corners: tuple[Corner, ...]
