"""Rules: kinds of lines, and which changes of them make no difference and why."""

from __future__ import annotations

import re
from dataclasses import dataclass

from behavgen.check.mutation.places import (
    LIMIT_CHORDS,
    Applies,
    allowed_chords,
    becomes,
    both,
    has_floor,
    in_a_task,
    in_last_segment,
    is_looser,
    is_value,
    larger,
    one_percent,
    repeated_later,
    tie,
    whole_femtoseconds,
    within,
)

__all__ = ["RULES", "Rule"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
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
    applies: Applies = lambda _: True


_DUE_FIRST = (
    "in this simulator what is due comes before an edge of the same instant; where it comes "
    "after, the check in that simulator tells it"
)
_CONSTANT, _COMPARISON, _CONDITION = ("constant",), ("comparison",), ("condition",)
_OVERWRITTEN = (
    r"(?:vdd_v|vcm_v|trip_v|sigma_v|noise_reach_v|shift_v|memory_v|memory\d*_v|memory_floor_v"
    r"|left\d*_v|recovery\d*_s|first_s|node_s|tau_s|x_ln|magnitude_v|aperture_ticks"
    r"|reset_ticks|edge_time|reset_time|return_ticks|temperature_k|vcm_steps|energy_fixed_j"
    r"|energy_rise(?:_j)?|energy_decision_j|vcm_step)"
)
_WHOLE_TICKS = r"(?:if \(return_ticks < 1\.0\) )?return_ticks = 1\.0;|real return_ticks = 1\.0;"

RULES: tuple[Rule, ...] = (
    Rule(
        reason="a first value that is overwritten before it is used",
        line=rf"real {_OVERWRITTEN} = ", kinds=_CONSTANT, applies=is_value,
    ),
    Rule(
        reason="what is known at the start has first values that conditions overwrite",
        line=r"bit (?:\[\w+:1\] )?\w+_known = ", kinds=_CONSTANT, applies=is_value,
    ),
    Rule(
        reason="no reset has such a length",
        line=r"(?:real )?(?:rest|shift)_ticks = -1\.0;", kinds=_CONSTANT, applies=one_percent,
    ),
    Rule(
        reason="set again by the common mode's part, which always follows",
        line=r"(?:\w+_known = |(?:rest|shift)_ticks = )",
        kinds=("statement", "constant", "negation"), applies=repeated_later,
    ),
    Rule(
        reason="what is already known is only worked out again",
        line=r"if \(!\w+_known(?:\[\w+\])?\)", kinds=_CONDITION, applies=becomes("(1'b1)"),
    ),
    Rule(
        reason="what is already known is only worked out again",
        line=r"\w+_known(?:\[\w+\])? = 1'b1;", kinds=("statement", "constant"),
    ),
    Rule(
        reason="what is already known is only worked out again",
        line=r"if \(edge_time - reset_time != (?:rest|shift)_ticks\)|if \(shift_ticks != rest",
        kinds=_CONDITION, applies=becomes("(1'b1)"),
    ),
    Rule(
        reason="what is already known is only worked out again",
        line=r"if \(edge_time - reset_time != (?:rest|shift)_ticks\)",
        kinds=("operator",), applies=becomes("+"),
    ),
    Rule(
        reason="what has not changed is only taken in again",
        line=r"vdd_changed = 1'b0;", kinds=("statement", "constant"),
        applies=lambda place: not place.inertness.supply_warns,
    ),
    Rule(
        reason="what is switched off is only worked out for nothing",
        line=r"if \(MEMORY_ON != 0\) begin", kinds=_CONDITION,
        applies=both(becomes("(1'b1)"), in_a_task),
    ),
    Rule(
        reason="at a tie both branches give the same value",
        line=r"(?:clamped|magnitude_v) = .*\?|x_ln = \$ln\(\(magnitude_v < FLOOR_V \?"
             r"|steepest = 3\.0 \* \(|if \(slope_\w+ [<>] |if \(shift_v > |arg = \$sqrt"
             r"|return centred < 0\.0 \?|left\d_v = age <= |if \(delay_ticks < "
             r"|aperture_ticks = DELAY_ON != 0 && aperture_c0 > 0\.0",
        kinds=_COMPARISON, applies=tie,
    ),
    Rule(
        reason="the curve is continuous at its nodes",
        line=r"(?:end else )?if \(magnitude_v >= [\d.e-]+\)"
             r"|(?:else )?if \(magnitude_v < [\d.e-]+\)",
        kinds=_COMPARISON, applies=tie,
    ),
    Rule(
        reason="one draw in 2^52 lies there, and both branches agree on it",
        line=r"if \(centred >= -0\.425 && centred <= 0\.425\)|if \(arg <= 5\.0\)"
             r"|if \(mantissa < 0\.707",
        kinds=_COMPARISON, applies=tie,
    ),
    Rule(
        reason="a memory of less than 1e-300 V is lost in its floor",
        line=r"(?:left\d_v = |if \()age <= 700\.0", kinds=("constant", "comparison"),
        applies=both(
            within(r"<= 700\.0"), has_floor,
            lambda place: one_percent(place) or place.mutant.becomes == "<",
        ),
    ),
    Rule(
        reason="times are whole femtoseconds, and no simulator counts finer",
        line=r"return moment < \$realtime \+ 0\.5;", kinds=("constant", "comparison"),
        applies=both(whole_femtoseconds,
                      lambda place: one_percent(place) or place.mutant.becomes == "<="),
    ),
    Rule(
        reason="waits last whole ticks, and the reset is no shorter for a hundredth of one",
        line=_WHOLE_TICKS, kinds=_CONSTANT, applies=one_percent,
    ),
    Rule(
        reason="waits last whole ticks, and nothing else depends on a hundredth of one",
        line=r"real delay_ticks = 1\.0;", kinds=_CONSTANT,
        applies=lambda place: one_percent(place) and "energy_rise" not in place.text,
    ),
    Rule(
        reason="waits last whole ticks, and there is none between none and one",
        line=r"if \(return_ticks < 1\.0\)", kinds=_COMPARISON, applies=becomes("<="),
    ),
    Rule(
        reason="no delay of this model is as short as its aperture",
        line=r"if \(delay_ticks < (?:aperture_ticks \+ )?1\.0\)",
        kinds=("constant", "condition", "statement", "operator", "comparison"),
        applies=lambda place: place.inertness.delays_are_longer
        and (one_percent(place) or place.mutant.becomes in ("(1'b0)", ";", "-", "<=")),
    ),
    Rule(
        reason="no curve of this model is so steep that its limit acts",
        line=r"if \(slope_first < 3\.0 \* chord",
        kinds=("constant", "operator", "condition", "statement"),
        applies=lambda place: is_looser(place)
        and place.inertness.first_slope_is_free(allowed_chords(place)),
    ),
    Rule(
        reason="no curve of this model is so steep that its limit acts",
        line=r"if \(slope_last < 3\.0 \* chord",
        kinds=("constant", "operator", "condition", "statement"),
        applies=lambda place: is_looser(place)
        and place.inertness.last_slope_is_free(allowed_chords(place)),
    ),
    Rule(
        reason="a bound beyond which nobody looks; the exact reach is looked at inside it",
        line=r"localparam real WIDEST_REACH_V = ", kinds=_CONSTANT, applies=larger,
    ),
    Rule(
        reason="a bound beyond which nobody looks; the exact reach is looked at inside it",
        line=r"if \(magnitude_v < WIDEST_REACH_V\)", kinds=("condition", "comparison"),
        applies=lambda place: place.mutant.becomes == "(1'b1)" or tie(place),
    ),
    Rule(
        reason="waits that were called off are counted too often: those that end look whether "
        "they are meant, with the same outcome",
        line=r"decision_state = FORCED;", kinds=("statement",),
    ),
    Rule(
        reason="there is room for a segment more, which nobody uses",
        line=r"localparam int LAST = ", kinds=_CONSTANT,
        applies=lambda place: not re.search(r"\bLAST\b(?![\]:]| = )", place.text),
    ),
    Rule(
        reason="the last segment is a parabola: it has no cubic part",
        line=r"\+ x_ln \* \(cubic_1\[(\d+)\] \+ x_ln \* \(cubic_2\[\1\] "
             r"\+ x_ln \* cubic_3\[\1\]\)\);",
        kinds=("constant", "operator"),
        applies=lambda place: in_last_segment(place)
        and place.inertness.first_slope_is_free(LIMIT_CHORDS)
        and place.inertness.last_slope_is_free(LIMIT_CHORDS) and place.inertness.slopes_fall,
    ),
    Rule(
        reason="the wait that is due in this very instant shows it as well",
        line=r"show_decision;  // at this very moment", kinds=("statement",),
        applies=whole_femtoseconds,
    ),
    Rule(
        reason="no curve of this model rises",
        line=r"if \(slope_\w+ > 0\.0\)", kinds=("condition", "statement", "constant"),
        applies=lambda place: place.mutant.becomes in ("(1'b0)", ";", "1.0")
        and place.inertness.slopes_fall,
    ),
    Rule(
        reason="waits that were called off are counted too often: those that end look whether "
               "they are meant, with the same outcome",
        line=r"if \((?:returning|decision_state == SAMPLING .*)\) void_waits = void_waits \+ 1;",
        kinds=_CONDITION, applies=becomes("(1'b1)"),
    ),
    Rule(
        reason=_DUE_FIRST,
        line=r"if \(decision_state == DECIDING && \(DELAY_ON == 0 \|\| is_due",
        kinds=_CONDITION, applies=becomes("(1'b0)"),
    ),
    Rule(
        reason=_DUE_FIRST, line=r"if \(is_due\(reset_time \+ return_ticks\)\) take_reset_state;",
        kinds=("condition", "statement"), applies=becomes("(1'b0)", ";"),
    ),
    Rule(
        reason=_DUE_FIRST, line=r"void_waits = void_waits \+ 1;",
        kinds=("statement", "operator", "constant"),
        applies=lambda place: place.task.startswith("  task end_undecided"),
    ),
    Rule(
        reason="waits that were called off are counted too often: those that end look whether "
               "they are meant, with the same outcome",
        line=r"(?:if \(.*\) )?void_waits = void_waits \+ 1;|int void_waits = 0;",
        kinds=_CONSTANT, applies=both(becomes("1", "2")),
    ),
    Rule(
        reason="waits that were called off are counted too often: those that end look whether "
               "they are meant, with the same outcome",
        line=r"else void_waits = void_waits - 1;", kinds=("statement", "operator"),
        applies=becomes(";", "+", ""),
    ),
    Rule(
        reason="a wait that ends looks whether it is meant, with the same outcome",
        line=r"(?:else )?if \(void_waits == 0\)", kinds=_CONDITION, applies=becomes("(1'b0)"),
    ),
    Rule(
        reason="the reset state is taken once more at the next decision edge, where it stands",
        line=r"returning = 1'b0;", kinds=("statement", "constant"),
        applies=lambda place: place.task.startswith("  task take_reset_state")
        or not in_a_task(place),
    ),
    Rule(
        reason="no level of supply or common mode lies between, as they are rounded to steps",
        line=r"(?:if \(|\|\| |: )(?:vdd_v|vcm_v|temperature_k) [<>] .* [-+] 1\.0 / STEPS_PER_\w",
        kinds=("constant", "comparison"),
        applies=lambda place: (place.mutant.was == "1.0" and one_percent(place))
        or tie(place),
    ),
    Rule(
        reason="less than half the last place of the sum that it is part of",
        line=r".*(?:2\.04426310338993978564e-15"
             r"|1\.0 / 6227020800\.0 \* rest)",
        kinds=_CONSTANT,
        applies=both(one_percent, within(
            r"2\.04426310338993978564e-15"
            r"|1\.0 / 6227020800\.0 \* rest"
        )),
    ),
    Rule(
        reason="less than half the last place of the sum that it is part of",
        line=r"centred = \(centred \+ 0\.5\)", kinds=_CONSTANT,
        applies=both(one_percent, within(r"\(centred \+ 0\.5\)")),
    ),
    Rule(
        reason="a remainder by zero is unknown, which is no: where there is no X, the check in a "
               "simulator of two states tells it",
        line=r".*\(FORCE_UNRESOLVED_EVERY > 0", kinds=("comparison",), applies=becomes(">="),
    ),
)  # fmt: skip
