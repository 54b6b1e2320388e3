"""Why nobody can tell some mutants from the original.

Each rule knows one kind of line by its pattern, and what changes of it make no
difference. It is asked only about mutants that the probe did not see. A rule
that excused a mutant that can be told would be a fault of the check.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from behavgen.check.mutation.inertness import Inertness
from behavgen.check.mutation.mutants import Mutant

__all__ = ["reason_for"]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Place:
    """Where a mutant changes the text.

    Parameters
    ----------
    mutant : Mutant
    line : str
        Without indent.
    column : int
        Of the change in it.
    task : str
        Text of the task or function around it; of the whole module outside.
    text : str
        Everything.
    inertness : Inertness
        What the model never makes use of.
    """

    mutant: Mutant
    line: str
    column: int
    task: str
    text: str
    inertness: Inertness


_Applies = Callable[[_Place], bool]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Rule:
    """One reason.

    Parameters
    ----------
    reason : str
    line : str
        Pattern that matches the line from its start.
    kinds : tuple of str
    applies : callable
        What has to hold besides.
    """

    reason: str
    line: str
    kinds: tuple[str, ...]
    applies: _Applies = lambda _: True


def reason_for(mutant: Mutant, text: str, inertness: Inertness) -> str:
    """Return why a mutant cannot be told from the original; "" when no rule knows it.

    Parameters
    ----------
    mutant : Mutant
    text : str
        The original.
    inertness : Inertness
        What the model never makes use of.
    """
    start = text.rfind("\n", 0, mutant.start) + 1
    whole = text[start : text.find("\n", start)]
    line = whole.lstrip()
    indent = len(whole) - len(line)
    place = _Place(
        mutant=mutant, line=line, column=mutant.start - start - indent,
        task=_task_around(text, mutant.start), text=text, inertness=inertness,
    )  # fmt: skip
    fitting = (
        rule.reason
        for rule in _RULES
        if mutant.kind in rule.kinds and re.match(rule.line, line) and rule.applies(place)
    )
    return next(fitting, "")


def _task_around(text: str, start: int) -> str:
    for found in re.finditer(r"^  (task|function).*?^  end\1", text, re.DOTALL | re.MULTILINE):
        if found.start() <= start < found.end():
            return found[0]
    return text


def _is_value(place: _Place) -> bool:
    """Tell whether the change is in the value that a declaration gives."""
    return place.column > place.line.index("=")


def _whole_femtoseconds(place: _Place) -> bool:
    return "timeprecision 1fs;" in place.text


def _becomes(*values: str) -> _Applies:
    return lambda place: place.mutant.becomes in values


def _within(pattern: str) -> _Applies:
    """Return what tells whether the change lies within a part of the line."""

    def applies(place: _Place) -> bool:
        found = re.search(pattern, place.line)
        return found is not None and found.start() <= place.column < found.end()

    return applies


def _one_percent(place: _Place) -> bool:
    """Tell whether a real constant changed by a hundredth."""
    try:
        return 0.98 < float(place.mutant.becomes) / float(place.mutant.was) < 1.02
    except (ValueError, ZeroDivisionError):
        return False


def _both(*all_of: _Applies) -> _Applies:
    return lambda place: all(one(place) for one in all_of)


def _larger(place: _Place) -> bool:
    return float(place.mutant.becomes) > float(place.mutant.was)


def _repeated_later(place: _Place) -> bool:
    """Tell whether the supply's part sets what the common mode's part sets again."""
    after = re.search(r"task take_conditions;.*?endtask", place.text, re.DOTALL)
    own = place.mutant.was if place.mutant.kind == "statement" else place.line
    return (
        place.task.startswith("  task fold_supply")
        and after is not None
        and re.sub(r"\s+", "", own) in re.sub(r"\s+", "", after[0])
    )


def _has_floor(place: _Place) -> bool:
    """Tell whether the memory never fades to nothing, so that 1e-300 V are lost in it."""
    found = re.search(r"memory_floor_v = (exact_exp|[1-9]|0\.0*[1-9])", place.text)
    return found is not None


def _of_the_memory(place: _Place) -> bool:
    return place.task is not place.text


_LIMIT_CHORDS = 3.0
_CONSTANT, _COMPARISON, _CONDITION = ("constant",), ("comparison",), ("condition",)
_OVERWRITTEN = (
    r"(?:vdd_v|vcm_v|trip_v|sigma_v|noise_reach_v|shift_v|memory_v|memory\d*_v|memory_floor_v"
    r"|left\d*_v|recovery\d*_s|first_s|node_s|tau_s|x_ln|magnitude_v|aperture_ticks|delay_ticks"
    r"|reset_ticks|edge_time|reset_time|return_ticks|temperature_k|vcm_steps|energy_fixed_j"
    r"|energy_rise(?:_j)?|energy_decision_j|vcm_step)"
)
_WHOLE_TICKS = r"(?:if \(return_ticks < 1\.0\) )?return_ticks = 1\.0;|real return_ticks = 1\.0;"

_RULES: tuple[_Rule, ...] = (
    _Rule(
        reason="a first value that is overwritten before it is used",
        line=rf"real {_OVERWRITTEN} = ", kinds=_CONSTANT, applies=_is_value,
    ),
    _Rule(
        reason="what is known at the start has first values that conditions overwrite",
        line=r"bit (?:\[\w+:1\] )?\w+_known = ", kinds=_CONSTANT, applies=_is_value,
    ),
    _Rule(
        reason="no reset has such a length",
        line=r"(?:real )?(?:rest|shift)_ticks = -1\.0;", kinds=_CONSTANT, applies=_one_percent,
    ),
    _Rule(
        reason="set again by the common mode's part, which always follows",
        line=r"(?:\w+_known = |(?:rest|shift)_ticks = )",
        kinds=("statement", "constant", "negation"), applies=_repeated_later,
    ),
    _Rule(
        reason="what is already known is only worked out again",
        line=r"if \(!\w+_known(?:\[\d+\])?\)", kinds=_CONDITION, applies=_becomes("(1'b1)"),
    ),
    _Rule(
        reason="what is already known is only worked out again",
        line=r"\w+_known(?:\[\w+\])? = 1'b1;", kinds=("statement", "constant"),
    ),
    _Rule(
        reason="what is already known is only worked out again",
        line=r"if \(edge_time - reset_time != (?:rest|shift)_ticks\)|if \(shift_ticks != rest",
        kinds=_CONDITION, applies=_becomes("(1'b1)"),
    ),
    _Rule(
        reason="what has not changed is only taken in again",
        line=r"vdd_changed = 1'b0;", kinds=("statement", "constant"),
        applies=lambda place: not place.inertness.supply_warns,
    ),
    _Rule(
        reason="what is switched off is only worked out for nothing",
        line=r"if \(MEMORY_ON != 0\) begin", kinds=_CONDITION,
        applies=_both(_becomes("(1'b1)"), _of_the_memory),
    ),
    _Rule(
        reason="at a tie both branches give the same value",
        line=r"(?:clamped|magnitude_v) = .*\?|x_ln = \$ln\(\(magnitude_v < FLOOR_V \?"
             r"|steepest = 3\.0 \* \(|if \(slope_\w+ [<>] |if \(shift_v > |arg = \$sqrt"
             r"|return centred < 0\.0 \?|left\d_v = age <= |if \(delay_ticks < ",
        kinds=_COMPARISON,
        applies=lambda place: place.mutant.becomes.rstrip("=") == place.mutant.was.rstrip("="),
    ),
    _Rule(
        reason="the curve is continuous at its nodes",
        line=r"(?:end else )?if \(magnitude_v >= [\d.e-]+\)"
             r"|(?:else )?if \(magnitude_v < [\d.e-]+\)",
        kinds=_COMPARISON, applies=_becomes(">", "<="),
    ),
    _Rule(
        reason="one draw in 2^52 lies there, and both branches agree on it",
        line=r"if \(centred >= -0\.425 && centred <= 0\.425\)|if \(arg <= 5\.0\)"
             r"|if \(mantissa < 0\.707",
        kinds=_COMPARISON, applies=_becomes(">", "<", "<="),
    ),
    _Rule(
        reason="no draw of the noise reaches so far",
        line=r"if \(magnitude_v < noise_reach_v\)", kinds=_COMPARISON, applies=_becomes("<="),
    ),
    _Rule(
        reason="an upper bound that is replaced by the exact one before it is used",
        line=r"noise_reach_v = noise_on != 0 \? 1\.01 \*", kinds=_CONSTANT,
        applies=_both(_within(r"1\.01"), _larger),
    ),
    _Rule(
        reason="an upper bound that is replaced by the exact one before it is used",
        line=r"noise_reach_v = noise_on != 0 \? 1\.01 \*", kinds=("operator",),
        applies=_within(r"\* \$exp"),
    ),
    _Rule(
        reason="a memory of less than 1e-300 V is lost in its floor",
        line=r"(?:left\d_v = |if \()age <= 700\.0", kinds=("constant", "comparison"),
        applies=_both(
            _within(r"<= 700\.0"), _has_floor,
            lambda place: _one_percent(place) or place.mutant.becomes == "<",
        ),
    ),
    _Rule(
        reason="times are whole femtoseconds, and no simulator counts finer",
        line=r"return moment < \$realtime \+ 0\.5;", kinds=("constant", "comparison"),
        applies=_both(_whole_femtoseconds,
                      lambda place: _one_percent(place) or place.mutant.becomes == "<="),
    ),
    _Rule(
        reason="waits last whole ticks, and the reset is no shorter for a hundredth of one",
        line=_WHOLE_TICKS, kinds=_CONSTANT, applies=_one_percent,
    ),
    _Rule(
        reason="waits last whole ticks, and there is none between none and one",
        line=r"if \(return_ticks < 1\.0\)", kinds=_COMPARISON, applies=_becomes("<="),
    ),
    _Rule(
        reason="no delay of this model is as short as its aperture",
        line=r"if \(delay_ticks < (?:aperture_ticks \+ )?1\.0\)",
        kinds=("constant", "condition", "statement", "operator", "comparison"),
        applies=lambda place: place.inertness.delays_are_longer
        and (_one_percent(place) or place.mutant.becomes in ("(1'b0)", ";", "-", "<=")),
    ),
    _Rule(
        reason="no curve of this model is so steep that its limit acts",
        line=r"steepest = 3\.0 \* \(chord_before > chord \?",
        kinds=("constant", "operator", "comparison"),
        applies=lambda place: place.inertness.first_slope_is_free(_allowed_chords(place)),
    ),
    _Rule(
        reason="no curve of this model is so steep that its limit acts",
        line=r"steepest = 3\.0 \* \(chord_after > chord \?",
        kinds=("constant", "operator", "comparison", "statement"),
        applies=lambda place: place.inertness.last_slope_is_free(_allowed_chords(place))
        and (place.mutant.kind != "statement"
             or place.inertness.last_slope_over_first_limit < _LIMIT_CHORDS),
    ),
    _Rule(
        reason="no curve of this model is so steep that its limit acts",
        line=r"if \(slope_first < steepest\)", kinds=("condition", "statement"),
        applies=lambda place: place.mutant.becomes in ("(1'b0)", ";")
        and place.inertness.first_slope_is_free(_LIMIT_CHORDS),
    ),
    _Rule(
        reason="no curve of this model is so steep that its limit acts",
        line=r"if \(slope_last < steepest\)", kinds=("condition", "statement"),
        applies=lambda place: place.mutant.becomes in ("(1'b0)", ";")
        and place.inertness.last_slope_is_free(_LIMIT_CHORDS),
    ),
    _Rule(
        reason="the last segment is a parabola: it has no cubic part",
        line=r"\+ x_ln \* \(cubic_1\[(\d+)\] \+ x_ln \* \(cubic_2\[\1\] "
             r"\+ x_ln \* cubic_3\[\1\]\)\);",
        kinds=("constant", "operator"),
        applies=lambda place: _in_last_segment(place)
        and place.inertness.first_slope_is_free(_LIMIT_CHORDS)
        and place.inertness.last_slope_is_free(_LIMIT_CHORDS) and place.inertness.slopes_fall,
    ),
    _Rule(
        reason="the wait that is due in this very instant shows it as well",
        line=r"show_decision;  // at this very moment", kinds=("statement",),
        applies=_whole_femtoseconds,
    ),
    _Rule(
        reason="no curve of this model rises",
        line=r"if \(slope_\w+ > 0\.0\)", kinds=("condition", "statement", "constant"),
        applies=lambda place: place.mutant.becomes in ("(1'b0)", ";", "1.0")
        and place.inertness.slopes_fall,
    ),
    _Rule(
        reason="waits that were called off are counted too often: those that end look whether "
               "they are meant, with the same outcome",
        line=r"(?:if \(.*\) )?void_waits = void_waits \+ 1;|int void_waits = 0;",
        kinds=_CONSTANT, applies=_both(_becomes("1", "2")),
    ),
    _Rule(
        reason="waits that were called off are counted too often: those that end look whether "
               "they are meant, with the same outcome",
        line=r"else void_waits = void_waits - 1;", kinds=("statement", "operator"),
        applies=_becomes(";", "+", ""),
    ),
    _Rule(
        reason="a wait that ends looks whether it is meant, with the same outcome",
        line=r"(?:else )?if \(void_waits == 0\)", kinds=_CONDITION, applies=_becomes("(1'b0)"),
    ),
    _Rule(
        reason="the reset state is taken once more at the next decision edge, where it stands",
        line=r"returning = 1'b0;", kinds=("statement", "constant"),
        applies=lambda place: place.task.startswith("  task take_reset_state"),
    ),
    _Rule(
        reason="no level of supply or common mode lies between, as they are rounded to steps",
        line=r"(?:if \(|\|\| )(?:vdd_v|vcm_v|temperature_k) [<>] .* [-+] 1\.0 / STEPS_PER_\w",
        kinds=("constant", "comparison"),
        applies=lambda place: (place.mutant.was == "1.0" and _one_percent(place))
        or place.mutant.becomes in ("<=", ">="),
    ),
    _Rule(
        reason="less than half the last place of the sum that it is part of",
        line=r".*(?:2\.04426310338993978564e-15|1\.0 / 21\.0 \* square"
             r"|1\.0 / 6227020800\.0 \* rest)",
        kinds=_CONSTANT,
        applies=_both(_one_percent, _within(
            r"2\.04426310338993978564e-15|1\.0 / 21\.0 \* square \+ 1\.0 / 19\.0"
            r"|1\.0 / 6227020800\.0 \* rest"
        )),
    ),
    _Rule(
        reason="less than half the last place of the sum that it is part of",
        line=r"centred = \(centred \+ 0\.5\)", kinds=_CONSTANT,
        applies=_both(_one_percent, _within(r"\(centred \+ 0\.5\)")),
    ),
    _Rule(
        reason="less than half the last place of the sum that it is part of",
        line=r".*1\.0 / 21\.0 \* square", kinds=("operator",),
        applies=_both(_within(r"square \+ 1\.0 / 19"), _becomes("-")),
    ),
    _Rule(
        reason="a remainder by zero is unknown, which is no: where there is no X, the check in a "
               "simulator of two states tells it",
        line=r"if \(FORCE_UNRESOLVED_EVERY > 0\)", kinds=("condition", "comparison"),
        applies=_becomes("(1'b1)", ">="),
    ),
)  # fmt: skip


def _in_last_segment(place: _Place) -> bool:
    """Tell whether the change is in the cubic part of the last segment."""
    last = re.search(r"localparam int LAST = (\d+);", place.text)
    if last is None or f"cubic_3[{last[1]}]" not in place.line:
        return False
    return _within(r"(?:\+ x_ln )?\* cubic_3\[\d+\]|\+ x_ln \* cubic_3")(place)


def _allowed_chords(place: _Place) -> float:
    """Return how many chords a slope may have for a changed limit to make no difference."""
    if place.mutant.kind == "constant":
        return min(_LIMIT_CHORDS, float(place.mutant.becomes))
    return _LIMIT_CHORDS
