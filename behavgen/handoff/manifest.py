"""The manifest: what ``sha256sum -c`` needs to tell whether a file was changed."""

from __future__ import annotations

from collections.abc import Iterable

from behavgen.files import sha256_of_text
from behavgen.handoff.packed_file import PackedFile

__all__ = ["MANIFEST", "manifest"]

MANIFEST = "MANIFEST.sha256"


def manifest(files: Iterable[PackedFile]) -> PackedFile:
    """Return one line a file, sorted by path."""
    lines = [f"{sha256_of_text(file.text)}  {file.path}\n" for file in files]
    return PackedFile(path=MANIFEST, text="".join(sorted(lines, key=lambda line: line[66:])))
