"""Lays the demo project out in a folder of the user's."""

from __future__ import annotations

from pathlib import Path

from behavgen.errors import Fault, ProjectError
from behavgen.files import write_whole

__all__ = ["copy_demo"]

PROJECT_FILE = "behavgen.toml"


def copy_demo(folder: Path) -> Path:
    """Lay the demo project out in `folder`.

    Files already there must be the demo's own, so that the demo may be run again in place
    and nothing of the user's is lost.

    Parameters
    ----------
    folder : Path
        Created when missing.

    Returns
    -------
    Path
        The project file.

    Raises
    ------
    ProjectError
        When files are there under the demo's names with other content, all of them named,
        or when the folder cannot be written.
    """
    texts = {folder / name: text for name, text in _demo_texts().items()}
    taken = [path for path, text in texts.items() if path.exists() and not _holds(path, text)]
    if taken:
        raise ProjectError(*map(_not_ours, taken))
    for path, text in texts.items():
        write_whole(path, text)
    return folder / PROJECT_FILE


def _demo_texts() -> dict[str, str]:
    """Return the demo's files by their name in the project; the project file comes last."""
    here = Path(__file__).parent
    tables = sorted(path for path in (here / "tables").rglob("*") if path.is_file())
    paths = [*tables, here / PROJECT_FILE]
    return {path.relative_to(here).as_posix(): path.read_text(encoding="utf-8") for path in paths}


def _holds(path: Path, text: str) -> bool:
    try:
        return path.read_bytes() == text.encode("utf-8")
    except OSError:
        return False


def _not_ours(path: Path) -> Fault:
    return Fault(
        file=str(path),
        what="is there already and is not the demo's",
        allowed="choose another folder with --out, or move it away",
    )
