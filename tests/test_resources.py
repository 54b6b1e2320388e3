"""Templates and benches are found in a checkout and in an installed package alike."""

from __future__ import annotations

from pathlib import Path

import pytest

from behavgen import resources
from behavgen.errors import ToolError

ROOT = Path(__file__).parents[1]


def _folder(path: Path) -> Path:
    path.mkdir(parents=True)
    return path


def test_checkout_uses_the_folders_of_its_root():
    assert resources.template_folder().samefile(ROOT / "templates")
    assert resources.sim_folder().samefile(ROOT / "sim")


def test_installed_package_uses_the_folders_inside_it(tmp_path):
    inside = _folder(tmp_path / "behavgen" / "templates")
    assert resources._shipped_folder("templates", package=tmp_path / "behavgen") == inside


def test_folders_of_others_beside_an_installed_package_are_not_taken(tmp_path):
    _folder(tmp_path / "behavgen")
    _folder(tmp_path / "templates")
    with pytest.raises(ToolError, match="without its folder 'templates'"):
        resources._shipped_folder("templates", package=tmp_path / "behavgen")
