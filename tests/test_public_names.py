"""The package shows its public names, each from its home, and imports none of them early."""

from __future__ import annotations

import subprocess
import sys
import types

import pytest

import behavgen

FUNCTIONS = ("check", "emit", "fit", "load_model", "load_project", "read_tables")
CLASSES = ("ComparatorModel", "Reference")


def run_python(script: str) -> str:
    return subprocess.run(
        [sys.executable, "-c", script], check=True, capture_output=True, text=True
    ).stdout


def test_all_names_what_is_public() -> None:
    assert sorted([*FUNCTIONS, *CLASSES, "errors"]) == behavgen.__all__ == dir(behavgen)


def test_a_new_interpreter_has_no_other_public_names() -> None:
    script = "import behavgen; print([n for n in vars(behavgen) if not n.startswith('_')])"
    left_by_the_import_itself = {"TYPE_CHECKING", "annotations", "behavgen"}
    assert set(eval(run_python(script))) == left_by_the_import_itself


@pytest.mark.parametrize("name", FUNCTIONS)
def test_functions_are_functions_even_where_a_package_has_their_name(name: str) -> None:
    assert isinstance(getattr(behavgen, name), types.FunctionType)
    assert getattr(behavgen, name).__name__ == name


@pytest.mark.parametrize("first", ["behavgen.check.verdict", "behavgen.fit.fit", "behavgen.emit"])
def test_importing_a_package_does_not_hide_the_function_of_its_name(first: str) -> None:
    script = f"import behavgen, {first}; print(callable(behavgen.fit), callable(behavgen.check))"
    assert run_python(script) == "True True\n"


@pytest.mark.parametrize("name", CLASSES)
def test_classes_are_classes(name: str) -> None:
    assert isinstance(getattr(behavgen, name), type)


def test_errors_is_the_module() -> None:
    assert issubclass(behavgen.errors.FitError, behavgen.errors.BehavgenError)


def test_an_unknown_name_is_an_attribute_error() -> None:
    with pytest.raises(AttributeError, match="no attribute 'fti'"):
        behavgen.fti  # noqa: B018


def test_importing_the_package_imports_nothing_heavy() -> None:
    script = "import sys, behavgen; print(' '.join(sys.modules))"
    heavy = {"numpy", "scipy", "polars", "jinja2", "pydantic", "rich", "cocotb", "argparse"}
    assert heavy.isdisjoint(run_python(script).split())
