"""What every self-contained page is made with: templates, inlined texts and their hashes."""

from __future__ import annotations

import base64
import hashlib
from functools import cache

from jinja2 import Environment, FileSystemLoader, StrictUndefined
from markupsafe import Markup

from behavgen.resources import template_folder

__all__ = ["csp_hash", "html_environment", "shipped_text"]


@cache
def html_environment() -> Environment:
    """Return the environment of all pages; templates are named by their folder and file."""
    environment = Environment(
        loader=FileSystemLoader(template_folder()),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters["drawing"] = Markup  # our own SVG, whose texts are escaped where drawn
    return environment


def shipped_text(name: str) -> str:
    """Return the text of a file beside the templates."""
    return (template_folder() / name).read_text(encoding="utf-8")


def csp_hash(text: str) -> str:
    """Return the source expression that lets a page use exactly this inline text.

    W3C, Content Security Policy Level 3, 2.3.1: ``'sha256-'`` and the base64 of the digest.
    """
    digest = hashlib.sha256(text.encode("utf-8")).digest()
    return f"'sha256-{base64.b64encode(digest).decode('ascii')}'"
