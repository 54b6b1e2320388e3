"""What tests do with the text of an emitted Verilog-A module."""

from __future__ import annotations

import re
from pathlib import Path

from behavgen.simulators.openvaf import Compilation, find_openvaf


def declared(text: str) -> set[str]:
    """Return the names of all variables, nodes, constants, parameters and functions inside."""
    module = re.sub(r"//.*", "", text).partition("module ")[2]
    ports, _, body = module.partition(");\n")
    names = re.findall(r"(?:parameter|localparam|function) (?:real|integer) (\w+)", body)
    for listed in re.findall(r"^ +(?:real|integer|electrical|input) ([\w,\s]+);", body, re.M):
        names += re.findall(r"\w+", listed)
    return set(names) - set(re.findall(r"\w+", ports))


def without_events(text: str) -> str:
    """Put what a compiler without analogue events takes in their places.

    What stands around them has to be Verilog-A to the letter, every name declared.
    """
    for found, instead in (
        (r"@\(timer\((\w+)\)\)", r"if (\1 > $abstime)"),
        (r"@\(cross\((.*), ([+-]1), (\w+)\)\)", r"if ((\1) * \2 > \3)"),
        (r"transition\((\w+), 0\.0, (\w+), (\w+)\)", r"(\1 * \2 / \3)"),
        (r"\$rdist_(?:normal|uniform)\((\w+), 0\.0, 1\.0\)", r"(0.5 * \1)"),
    ):
        text = re.sub(found, instead, text)
    return text


def compiled(text: str, folder: Path) -> Compilation:
    """Compile a text, its events put aside."""
    source = folder / "model.va"
    source.write_text(without_events(text), encoding="utf-8")
    return find_openvaf().compile(source, library=folder / "model.osdi", log=folder / "log")
