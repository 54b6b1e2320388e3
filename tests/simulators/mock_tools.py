"""Pretend programs on the PATH that record how they were called."""

from __future__ import annotations

import json
import sys
from pathlib import Path

__all__ = ["calls", "put_on_path"]

_PROGRAM = """#!{python}
import json, os, sys
record = {{"words": sys.argv, "folder": os.getcwd(), "environment": dict(os.environ)}}
with open({log!r}, "a") as stream:
    stream.write(json.dumps(record) + "\\n")
{body}
"""


def put_on_path(folder: Path, monkeypatch, **bodies: str) -> None:
    """Make pretend programs the only ones on the PATH; a body is Python text."""
    folder.mkdir(exist_ok=True)
    for name, body in bodies.items():
        program = folder / name
        log = str(folder / f"{name}.calls")
        program.write_text(_PROGRAM.format(python=sys.executable, log=log, body=body))
        program.chmod(0o755)
    monkeypatch.setenv("PATH", str(folder))


def calls(folder: Path, name: str) -> list[dict]:
    """Return how a pretend program was called, call by call."""
    lines = (folder / f"{name}.calls").read_text().splitlines()
    return [json.loads(line) for line in lines]
