"""A cell of a project, and where its results lie."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.freshness import Step, code_version, content_hash

if TYPE_CHECKING:
    from behavgen.project import CellSettings, Project

__all__ = ["CHECK_FILE", "CellPlace"]

CHECK_FILE = "check/check.json"


@dataclass(frozen=True, slots=True, kw_only=True)
class CellPlace:
    """A cell of a project, and where its results lie."""

    project: Project
    settings: CellSettings

    @property
    def name(self) -> str:
        """The cell's name."""
        return self.settings.name

    @property
    def folder(self) -> Path:
        """The cell's output folder."""
        return self.project.out / self.name

    @property
    def model_file(self) -> Path:
        """The model file."""
        return self.folder / f"{self.name}.model.json"

    @property
    def check_file(self) -> Path:
        """What the check of the emitted model said."""
        return self.folder / CHECK_FILE

    @property
    def report_file(self) -> Path:
        """The report page."""
        return self.folder / "report.html"

    def step(self, name: str, *inputs: object) -> Step:
        """Return a step whose result is determined by `inputs` and the program itself."""
        return Step(
            folder=self.folder, name=name, inputs=content_hash(name, code_version(), *inputs)
        )
