"""Results by the hash of all that determines them: the same inputs are never worked on twice.

An entry is one archive under its key, behind its own SHA-256, written whole or
not at all, so that several runs may read and write at once; a damaged one is
not there.
Nothing needs the cache: it may be deleted at any time.
"""

from __future__ import annotations

import hashlib
import io
import os
import time
import zipfile
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

from behavgen.files import write_whole

__all__ = ["ResultCache"]

_ALWAYS = (1980, 1, 1, 0, 0, 0)  # the zip format's first moment: the same files, the same bytes
_DIGEST = hashlib.sha256().digest_size


@dataclass(frozen=True, slots=True, kw_only=True)
class ResultCache:
    """A folder of entries, found by their keys.

    Parameters
    ----------
    folder : Path
        Made when the first entry is put.
    """

    folder: Path

    def get(self, key: str) -> dict[str, bytes] | None:
        """Return the files of an entry by their names, or None when there is none."""
        entry = self._entry(key)
        try:
            content = entry.read_bytes()
        except OSError:
            return None
        digest, packed = content[:_DIGEST], content[_DIGEST:]
        if hashlib.sha256(packed).digest() != digest:
            return None
        with zipfile.ZipFile(io.BytesIO(packed)) as archive:
            files = {name: archive.read(name) for name in archive.namelist()}
        with suppress(OSError):  # the cache may be read-only
            os.utime(entry)
        return files

    def put(self, key: str, files: Mapping[str, bytes]) -> None:
        """Keep files under a key.

        Raises
        ------
        ProjectError
            When the folder cannot be written.
        """
        packed = io.BytesIO()
        with zipfile.ZipFile(packed, "w") as archive:
            for name in sorted(files):
                info = zipfile.ZipInfo(name, _ALWAYS)
                archive.writestr(info, files[name], zipfile.ZIP_DEFLATED)
        content = packed.getvalue()
        write_whole(self._entry(key), hashlib.sha256(content).digest() + content)

    def prune(self, unused_for_s: float) -> int:
        """Delete the entries that nobody has asked for as long as that; return how many."""
        oldest = time.time() - unused_for_s
        pruned = 0
        for entry in self.folder.glob("*/*.entry"):
            with suppress(OSError):  # somebody else has pruned it
                if entry.stat().st_mtime < oldest:
                    entry.unlink()
                    pruned += 1
        return pruned

    def _entry(self, key: str) -> Path:
        return self.folder / key[:2] / f"{key}.entry"
