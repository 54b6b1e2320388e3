"""Which results of a cell still follow from what they were made from.

Beside a cell's results lies ``.steps.json``: for every step the hash of all
that went into it and the hashes of the files that came out. A step is current
when both still hold; times of files play no part.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, fields, is_dataclass
from functools import cache
from importlib.metadata import version
from pathlib import Path

from behavgen.files import sha256_of_file, sha256_of_text, write_whole
from behavgen.resources import PACKAGE, sim_folder, template_folder

__all__ = ["RECORD_FILE", "Step", "code_version", "content_hash", "recorded_steps"]

RECORD_FILE = ".steps.json"
RECORD_FORMAT = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One step of one cell, as it should be now.

    Parameters
    ----------
    folder : Path
        The cell's output folder.
    name : str
        E.g. ``"fit"``.
    inputs : str
        Hash of everything that determines the result; empty when it cannot be known yet.
    """

    folder: Path
    name: str
    inputs: str

    def state(self) -> str:
        """Return ``"current"``, ``"stale"`` or ``"missing"``."""
        noted = _read_records(self.folder).get(self.name)
        outputs = noted.get("outputs") if isinstance(noted, dict) else None
        if not isinstance(noted, dict) or not isinstance(outputs, dict):
            return "missing"
        found = {name: sha256_of_file(self.folder / name) for name in outputs}
        if None in found.values():
            return "missing"
        return "current" if noted.get("inputs") == self.inputs and found == outputs else "stale"

    def is_current(self) -> bool:
        """Tell whether the step need not be done again."""
        return self.state() == "current"

    def noted_files(self) -> tuple[str, ...]:
        """Return the names of the files that the step wrote last, relative to the folder."""
        noted = _read_records(self.folder).get(self.name, {})
        outputs = noted.get("outputs", {}) if isinstance(noted, dict) else {}
        return tuple(outputs)

    def write(self, contents: Mapping[str, str]) -> None:
        """Write the step's files, names relative to the folder, and note the step as done."""
        for name, text in contents.items():
            write_whole(self.folder / name, text)
        self.note(contents)

    def note(self, names: Iterable[str]) -> None:
        """Note as done a step whose files are written."""
        outputs = {name: sha256_of_file(self.folder / name) for name in sorted(names)}
        records = _read_records(self.folder)
        records[self.name] = {"inputs": self.inputs, "outputs": outputs}
        record = {"format": RECORD_FORMAT, "steps": records}
        write_whole(self.folder / RECORD_FILE, json.dumps(record, indent=2, sort_keys=True) + "\n")


def content_hash(*parts: object) -> str:
    """Return one hash of texts, numbers, mappings, sequences and dataclasses of these."""
    return sha256_of_text(json.dumps(parts, sort_keys=True, default=_plain))


def recorded_steps(record: bytes, folder: Path) -> Iterator[tuple[Step, tuple[str, ...]]]:
    """Yield the steps that a record notes, and the files of each, relative to the folder."""
    for name, noted in _parsed(record).items():
        outputs = noted.get("outputs") if isinstance(noted, dict) else None
        if isinstance(noted, dict) and isinstance(outputs, dict):
            step = Step(folder=folder, name=name, inputs=str(noted.get("inputs", "")))
            yield step, tuple(outputs)


@cache
def code_version() -> str:
    """Return the hash of the program itself: its code, templates and benches, its libraries.

    A version number would not notice a changed line in a checkout. The version of
    Python is left out: it does not change results.
    """
    folders = {"code": PACKAGE, "templates": template_folder(), "sim": sim_folder()}
    return content_hash(
        {
            f"{name}/{file.relative_to(folder).as_posix()}": sha256_of_file(file)
            for name, folder in folders.items()
            for file in sorted(folder.rglob("*"))
            if file.is_file() and "__pycache__" not in file.parts
        },
        {name: version(name) for name in _LIBRARIES},
    )


_LIBRARIES = ("cocotb", "jinja2", "numpy", "polars", "scipy")
"""Those whose versions may change the last digit of a number, or a line of text."""


def _read_records(folder: Path) -> dict[str, object]:
    """Return what is noted; a record that cannot be read has noted nothing."""
    try:
        return _parsed((folder / RECORD_FILE).read_bytes())
    except OSError:
        return {}


def _parsed(record: bytes) -> dict[str, object]:
    try:
        raw = json.loads(record)
    except ValueError:
        return {}
    steps = raw.get("steps") if isinstance(raw, dict) else None
    known = isinstance(raw, dict) and raw.get("format") == RECORD_FORMAT
    return dict(steps) if known and isinstance(steps, dict) else {}


def _plain(value: object) -> object:
    if isinstance(value, Mapping):
        return dict(value)
    if is_dataclass(value):
        return {field.name: getattr(value, field.name) for field in fields(value)}
    if isinstance(value, frozenset | set):
        return sorted(value)
    if isinstance(value, Path):
        return value.as_posix()
    raise TypeError(f"no plain form of {type(value).__name__}")
