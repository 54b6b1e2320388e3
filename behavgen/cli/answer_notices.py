"""What the reader of an answer must know: what was clamped, and what is not counted."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

from behavgen.cli.question import Question
from behavgen.cli.wording import range_text
from behavgen.model import ComparatorModel, Range

TYPE_CHECKING = False
if TYPE_CHECKING:
    from collections.abc import Sequence

    from behavgen.evidence import Outside

__all__ = ["clamped", "uncounted"]

_NAMES = {"vdd_v": "supply", "temperature_k": "temperature", "vcm_v": "common mode"}


def clamped(outside: Sequence[tuple[Outside, ...]]) -> Iterator[str]:
    """Yield a sentence for each range that some case asks outside of.

    Parameters
    ----------
    outside : sequence of tuple of Outside
        One tuple a case.
    """
    counts = Counter(one for of_case in outside for one in of_case)
    groups: dict[tuple[str, Range, int], list[str]] = {}
    for one, count in counts.items():
        groups.setdefault((one.condition, one.measured, count), []).append(one.quantity)
    for (condition, measured, count), quantities in groups.items():
        unit = "K" if condition == "temperature_k" else "V"
        where = f"{_NAMES[condition]} {range_text(measured, unit)}"
        share = "" if len(outside) == 1 else f" in {count} of {len(outside)} settings"
        yield f"{' and '.join(quantities)}: characterised at {where}, clamped to that{share}"


def uncounted(question: Question, model: ComparatorModel) -> Iterator[str]:
    """Yield what the numbers leave out because it is not known or was not asked."""
    if model.noise is None:
        yield "noise is not characterised: no error by noise is counted"
    if model.offset is None and question.kind in ("input", "levels"):
        yield "the offset is not characterised: the trip point is taken at 0 V"
    if model.delay is None:
        yield "the delay is not characterised: every decision counts as resolved"
    elif not (question.resolve_time_s or question.clock_hz):
        yield "without --resolve-time or --clock every decision counts as resolved"
    if model.memory is not None:
        yield "memory of the previous decision is not counted: long resets are assumed"
    if model.mismatch is None and question.instances != "nominal":
        yield "mismatch is not characterised: all instances are the nominal one"
    box, asked = model.box, (question.vdd_v, question.temp_c, question.vcm_v)
    for name, values, span in zip(
        _NAMES.values(), asked, (box.vdd_v, box.temperature_k, box.vcm_v), strict=True
    ):
        if values and span is None:
            yield f"the {name} is not characterised and has no influence"
