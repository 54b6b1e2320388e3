"""The emitted models as they are packed, and the lists that name them to a simulator."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from behavgen.emit.emit import emit
from behavgen.emit.emitted_file import EmittedFile
from behavgen.handoff.disclosure import same_but_for_comments
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.standing import Standing
from behavgen.model import ComparatorModel

__all__ = ["file_list", "model_files"]


def model_files(
    told: ComparatorModel, checked: Iterable[EmittedFile], standing: Standing
) -> tuple[PackedFile, ...]:
    """Return the models, emitted from what is told of the model.

    Parameters
    ----------
    told : ComparatorModel
    checked : iterable of EmittedFile
        The texts that were checked.
    standing : Standing
        Stands on top of each where the check does not vouch for it.
    """
    known = {file.path: file.text for file in checked}
    emitted = emit(told)
    for file in emitted:
        assert same_but_for_comments(file.text, known[file.path]), file.path
    mark = "" if standing.sound else f"// {standing.sentence}\n"
    return tuple(PackedFile(path=f"models/{f.path}", text=mark + f.text) for f in emitted)


def file_list(path: str, sources: Sequence[PackedFile]) -> PackedFile:
    """Return a list of sources for a simulator that runs in the package's folder."""
    return PackedFile(path=path, text="".join(f"{source.path}\n" for source in sources))
