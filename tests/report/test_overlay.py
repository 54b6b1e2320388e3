"""Which conditions stand out among many."""

from behavgen.model import Condition
from behavgen.reference import Reference
from behavgen.report.conditions import middle_condition
from behavgen.report.curves import curves
from behavgen.report.delay_figures import delay_multiples, delay_overview
from behavgen.report.overlay import MOST_DRAWN, drawn_curves, spotlights
from tests.report.sample_cells import WORST_AT, many_conditions, many_conditions_model


def delay_curves(conditions=None):
    model = many_conditions_model(conditions)
    return model, curves(model, Reference(model), "delay")


def test_roles_go_to_the_right_conditions():
    model, members = delay_curves()
    slowness = [float(c.model_y.max()) for c in members]
    found = {role: s.curve.condition
             for s in spotlights(members, middle_condition(model), slowness)
             for role in s.role.split(", ")}  # fmt: skip
    assert found["fits worst"] == WORST_AT
    assert found["slowest"] == members[max(range(29), key=slowness.__getitem__)].condition
    assert found["fastest"] == members[min(range(29), key=slowness.__getitem__)].condition
    # By hand: middle of 1.08..1.32 V, -40..125 C, 0.5..0.8 V
    assert found["nearest the middle"] == Condition(
        process="typ", vdd_v=1.2, temperature_k=300.15, vcm_v=0.65
    )


def test_few_conditions_are_all_drawn_in_full():
    model, members = delay_curves(many_conditions()[:3])
    chosen = spotlights(members, middle_condition(model), [1.0, 2.0, 3.0])
    assert [s.curve for s in chosen] == list(members)
    assert delay_multiples(members) is None


def test_small_charts_hold_every_condition_once():
    _, members = delay_curves()
    small = delay_multiples(members)
    assert len(small.figures) == 9 + 2
    assert [e.text for e in small.legend] == [
        f"supply {v}\N{NO-BREAK SPACE}V" for v in ("1.08", "1.2", "1.32")
    ]
    drawn = sum(f.svg.count('<path class="line') for f in small.figures)
    assert drawn == 29


def test_too_many_conditions_are_thinned_to_the_worst_and_said():
    conditions = [Condition(process="typ", vdd_v=1.08 + 0.002 * i, temperature_k=300.15, vcm_v=0.65)
                  for i in range(100)]  # fmt: skip
    conditions.append(WORST_AT)
    model, members = delay_curves(conditions)
    drawn = drawn_curves(members)
    assert len(drawn) == MOST_DRAWN
    assert WORST_AT in [c.condition for c in drawn]
    figure = delay_overview(members, middle_condition(model))
    assert f"Of 101 conditions the {MOST_DRAWN}" in figure.caption
