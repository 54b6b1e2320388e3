"""Jinja as the emitted texts use it: strict, and free of arithmetic and of escaping."""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING

from behavgen.resources import template_folder

if TYPE_CHECKING:
    from jinja2 import Environment

__all__ = ["render"]


def render(template: str, **facts: object) -> str:
    """Fill in a template.

    Parameters
    ----------
    template : str
        Path below ``templates/``, e.g. ``"systemverilog/module.sv"``.
    **facts : object
        Everything the template names; a name that is missing is an error.
    """
    return _environment().get_template(template).render(**facts)


@cache
def _environment() -> Environment:
    from jinja2 import Environment, FileSystemLoader, StrictUndefined  # noqa: PLC0415  heavy

    return Environment(
        loader=FileSystemLoader(template_folder()),
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
        autoescape=False,
    )
