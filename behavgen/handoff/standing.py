"""What the check says of a package, in the sentence that stands on each of its pages."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass

from behavgen.check.verdict import CheckReport

__all__ = ["CAUTION", "Standing", "standing_of"]

CAUTION = (
    "Holds only inside the characterised range; replaces neither transistor-level sign-off nor "
    "your own safety process."
)
"""The shortest caution, where a page has room for no more."""

_WIDTH = 82
_INSISTED = "It was packed all the same, because its sender insisted."


@dataclass(frozen=True, slots=True, kw_only=True)
class Standing:
    """Whether the packed files passed their check, and the sentence that says so."""

    sound: bool
    sentence: str

    @property
    def remarks(self) -> tuple[str, ...]:
        """Return the sentence and the caution as lines of a comment in source text."""
        return tuple(textwrap.wrap(f"{self.sentence} {CAUTION}", _WIDTH))


def standing_of(check: CheckReport | None) -> Standing:
    """Return what to say of a check; None: there is none of the present files."""
    if check is None:
        return Standing(sound=False, sentence=f"NOT CHECKED in its present state. {_INSISTED}")
    played = f"{check.decisions:,} decisions in {check.simulator}"
    if check.passed:
        sentence = f"Checked: {played} against the reference, none in disagreement."
        return Standing(sound=True, sentence=sentence)
    failed = sum(not bench.passed for bench in check.benches)
    what = f"{check.disagreement_count:,} of {played} disagree with the reference, "
    return Standing(
        sound=False,
        sentence=f"THE CHECK FAILED: {what}{failed} of {len(check.benches)} benches fail. "
        + _INSISTED,
    )
