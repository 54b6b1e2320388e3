"""Where in a TOML text a key stands, so that a fault can name its line.

tomllib keeps no positions. This finds the line on which a key or a table
header begins; what stands inside an inline table or array has the line of the
key that holds it.
"""

from __future__ import annotations

import re

__all__ = ["KeyPath", "key_lines", "line_of"]

KeyPath = tuple[str | int, ...]

_PART = r"""(?:[A-Za-z0-9_-]+|"(?:[^"\\]|\\.)*"|'[^']*')"""
_DOTTED = rf"{_PART}(?:\s*\.\s*{_PART})*"
_TABLE = re.compile(rf"\s*(\[\[?)\s*({_DOTTED})\s*\]\]?\s*(?:#.*)?")
_KEY = re.compile(rf"\s*({_DOTTED})\s*=")


def key_lines(text: str) -> dict[KeyPath, int]:
    """Return the 1-based line of every table header and key of a TOML text."""
    lines: dict[KeyPath, int] = {}
    elements: dict[KeyPath, int] = {}
    section: KeyPath = ()
    for number, line in enumerate(text.splitlines(), start=1):
        if header := _TABLE.fullmatch(line):
            section = _resolved(_parts(header[2]), elements)
            if header[1] == "[[":
                elements[section] = elements.get(section, -1) + 1
                section = (*section, elements[section])
            _note(section, number, lines)
        elif key := _KEY.match(line):
            _note((*section, *_parts(key[1])), number, lines)
    return lines


def line_of(path: KeyPath, lines: dict[KeyPath, int]) -> int | None:
    """Return the line of a key, or of the nearest thing around it that has one."""
    for end in range(len(path), 0, -1):
        if path[:end] in lines:
            return lines[path[:end]]
    return None


def _note(path: KeyPath, number: int, lines: dict[KeyPath, int]) -> None:
    """Note the line of a path and of all that it brings into being."""
    for end in range(1, len(path) + 1):
        lines.setdefault(path[:end], number)


def _parts(dotted: str) -> tuple[str, ...]:
    return tuple(part.strip("\"'") for part in re.findall(_PART, dotted))


def _resolved(parts: tuple[str, ...], elements: dict[KeyPath, int]) -> KeyPath:
    """Insert the index of the latest element wherever a part names an array of tables."""
    path: KeyPath = ()
    for part in parts[:-1]:
        path = (*path, part)
        if path in elements:
            path = (*path, elements[path])
    return (*path, parts[-1])
