"""Cells and checks whose pages are tested. All numbers are invented."""

from __future__ import annotations

import hashlib
import itertools
from dataclasses import replace

import numpy as np

from behavgen.check.verdict import BenchResult, CheckReport, Disagreement, Stratum
from behavgen.model import ComparatorModel, Condition, ConditionFit, CurvePoints
from behavgen.model_file import dump_model
from behavgen.reference import Reference
from tests.example_models import full_model

OVERDRIVES_V = np.geomspace(1e-6, 0.3, 35)
SUPPLIES_V = (1.08, 1.2, 1.32)
TEMPERATURES_K = (233.15, 300.15, 398.15)
COMMON_MODES_V = (0.5, 0.65, 0.8)
WORST_AT = Condition(process="typ", vdd_v=1.32, temperature_k=398.15, vcm_v=0.5)
WORST_ERROR = 0.0625
"""Put into one row of one condition; every other row is off by at most a tenth of it."""


def many_conditions() -> list[Condition]:
    """Return 29 conditions: a grid in one process and two points in another."""
    grid = [
        Condition(process="typ", vdd_v=v, temperature_k=t, vcm_v=c)
        for v, t, c in itertools.product(SUPPLIES_V, TEMPERATURES_K, COMMON_MODES_V)
    ]
    slow = Condition(process="slow", vdd_v=1.2, temperature_k=300.15, vcm_v=0.65)
    return [*grid, slow, replace(slow, vcm_v=0.6)]


def many_conditions_model(conditions: list[Condition] | None = None) -> ComparatorModel:
    """Return the full example with table points and fits at 29 conditions."""
    bare = full_model()
    conditions = conditions or many_conditions()
    points = [_delay_points(bare, c, number) for number, c in enumerate(conditions)]
    fits = [
        ConditionFit(quantity="delay", condition=c, rows=35, rms_relative=0.002,
                     worst_relative=WORST_ERROR if c == WORST_AT else 0.005,
                     held_out_rms_relative=0.01, parameters=bare.parameters)
        for c in conditions
    ]  # fmt: skip
    others = [p for p in bare.points if p.quantity != "delay"]
    return replace(bare, points=(*points, *others), fits=tuple(fits))


def _delay_points(model: ComparatorModel, condition: Condition, number: int) -> CurvePoints:
    """Return the model's own delays, divided by one plus a known error a row."""
    error = 0.00625 * np.sin(np.arange(35) + number)
    if condition == WORST_AT:
        error[20] = WORST_ERROR
    delay_s = Reference(model).delay(
        OVERDRIVES_V, vdd=condition.vdd_v, temp_c=condition.temperature_k - 273.15,
        vcm=condition.vcm_v, process=condition.process,
    )  # fmt: skip
    return CurvePoints(quantity="delay", condition=condition, x=tuple(OVERDRIVES_V.tolist()),
                       y=tuple((delay_s / (1.0 + error)).tolist()))  # fmt: skip


def passing_check(model: ComparatorModel) -> CheckReport:
    """Return a check of exactly this model that found nothing wrong."""
    return CheckReport(
        cell=model.cell.name,
        passed=True,
        simulator="invented simulator 1.0",
        model_sha256=hashlib.sha256(dump_model(model).encode("utf-8")).hexdigest(),
        emitted_sha256="ab" * 32,
        decisions=25312,
        strata=(
            Stratum(group="overdrive decade", name="1 uV..10 uV", decisions=1200, required=100),
            Stratum(group="process", name="typ", decisions=4000, required=400),
        ),
        benches=(BenchResult(name="an unresolved decision raises the flag", passed=True),),
    )


def failing_check(model: ComparatorModel) -> CheckReport:
    """Return a check of this model with a failed bench, a thin stratum and disagreements."""
    wrong = Disagreement(
        run="random_typ", decision=41, time_s=3.21e-7, conditions="typ, 1.2 V, 27 C",
        vdiff_v=3.2e-3, overdrive_v=3.1e-3, what="delay", expected="131.2 ps", got="133.0 ps",
    )  # fmt: skip
    return replace(
        passing_check(model),
        passed=False,
        strata=(
            Stratum(group="overdrive decade", name="1 uV..10 uV", decisions=12, required=100),
            Stratum(group="process", name="typ", decisions=4000, required=400, disagreements=7),
        ),
        benches=(BenchResult(name="outputs go X", passed=False, message="outp is 1, not X"),),
        disagreements=(wrong,),
        disagreement_count=7,
        worst_delay_ticks=1800,
    )
