"""What a check would have caught: against published sample sizes, and against planted errors."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from behavgen.check.distribution import distribution as module
from behavgen.check.power import BY_DECISION, block_power, decision_power, distribution_power
from behavgen.check.runs import plan_batches, reference_of
from behavgen.check.slices import PlayedRun
from behavgen.check.stimulus import make_stimulus
from behavgen.check.verdict import DistributionResult
from behavgen.check.waveform import expect
from behavgen.model import Surface
from tests.check.reference_bench import reference_bench
from tests.example_models import full_model, noisy_model

BEST_SIGMA_LEVEL = 1.5750362489552387
PER_CHECK = 0.01 / 300.0


def counted(level, sample, least_p=PER_CHECK):
    return DistributionResult(
        name=f"ones at {level:+g} sigma, typ", sample=sample, p_value=1.0, least_p=least_p, told=""
    )


def by_distribution(*results):
    return {one.quantity: one.error for one in distribution_power(results)}


# Decisions needed to see an offset of 0.1 sigma at the trip point and 2 % of sigma at the best
# level, two-sided, with 99 %: normal approximation of the binomial information of a probit
# (R. A. Fisher, Proc. Camb. Phil. Soc. 22, 1925, 700-725), worked out apart from this project
@pytest.mark.parametrize(
    ("least_p", "mu_sample", "sigma_sample"),
    [(0.05, 2886, 75493), (0.01, 3775, 98746), (PER_CHECK, 6588, 172314)],
)
def test_sample_sizes_are_those_of_the_binomial_information(least_p, mu_sample, sigma_sample):
    mu = by_distribution(counted(0.0, mu_sample, least_p))["offset"]
    sigma = by_distribution(counted(BEST_SIGMA_LEVEL, sigma_sample, least_p))["sigma"]
    assert mu == pytest.approx(0.1, rel=0.03)
    assert sigma == pytest.approx(0.02, rel=0.03)


def test_four_times_the_sample_sees_half_the_error():
    one, four = (by_distribution(counted(0.5, n))["offset"] for n in (5_000, 20_000))
    assert four == pytest.approx(0.5 * one, rel=0.03)


def test_the_process_with_fewer_decisions_counts():
    few = replace(counted(0.0, 500), name="ones at +0 sigma, slow")
    assert by_distribution(counted(0.0, 5_000), few) == by_distribution(few)


# Planted errors -------------------------------------------------------------------------------

RUNS = 100
LEAST_CAUGHT = 97


def with_constant(surface: Surface, change) -> Surface:
    """Return a surface whose constant term is changed."""
    variants = tuple(
        replace(v, coefficients=(change(v.coefficients[0]), *v.coefficients[1:]))
        for v in surface.variants
    )
    return replace(surface, variants=variants)


def with_error(model, quantity, error):
    """Return a model that is off by an error; in V, sigmas or a share."""
    if quantity == "offset":
        surface = with_constant(model.offset.surface, lambda c: c + error)
        return replace(model, offset=replace(model.offset, surface=surface))
    if quantity == "sigma":
        surface = with_constant(model.noise.surface, lambda c: c + np.log1p(error))
        return replace(model, noise=replace(model.noise, surface=surface))
    tau = with_constant(model.delay.tau, lambda c: c + np.log1p(error))
    nodes = model.delay.nodes
    if quantity == "delay":
        nodes = tuple(with_constant(node, lambda c: c + np.log1p(error)) for node in nodes)
    return replace(model, delay=replace(model.delay, tau=tau, nodes=nodes))


@pytest.mark.slow
@pytest.mark.parametrize("quantity", ["offset", "sigma"])
def test_an_error_of_the_stated_size_changes_the_distribution(quantity, monkeypatch, tmp_path):
    """In 97 of 100 runs with seeds of their own; one of a tenth mostly does not."""
    model = noisy_model()
    sigma_v = float(np.exp(model.noise.surface.variants[0].coefficients[0]))
    stated = {
        one.quantity: one.error
        for one in distribution_power(judged(model, model, 1, monkeypatch, tmp_path))
    }[quantity]
    scale = sigma_v if quantity == "offset" else 1.0
    whole, tenth = (with_error(model, quantity, share * stated * scale) for share in (1.0, 0.1))
    assert alarms(model, whole, RUNS, monkeypatch, tmp_path) >= LEAST_CAUGHT
    assert alarms(model, tenth, 20, monkeypatch, tmp_path) <= 5


def judged(model, played, seed, monkeypatch, folder):
    """Judge what another model's reference decides, by the model's distribution."""
    monkeypatch.setattr(module, "Bench", reference_bench(played))
    return module.distribution(None, model, "", seed=seed)


def alarms(model, played, runs, monkeypatch, folder):
    return sum(
        any(not one.passed for one in judged(model, played, 1000 + n, monkeypatch, folder))
        for n in range(runs)
    )


@pytest.mark.slow
@pytest.mark.parametrize("quantity", ["offset", "sigma", "tau", "delay"])
def test_an_error_of_the_stated_size_is_seen_decision_by_decision(quantity):
    """In 97 of 100 checks with stimulus of their own, by what they compare."""
    model, seen, tenth = noisy_model(), 0, 0
    for seed in range(RUNS):
        runs = [run for run in plan_batches(model, seed=seed, decisions=1)[0].runs if run.decisions
                and run.name.endswith(("noise off, between", "noise on"))]  # fmt: skip
        played = [played_run(model, replace(run, decisions=200), seed) for run in runs]
        stated = {
            one.quantity: one.error
            for one in decision_power([block_power(model, one) for one in played])
        }[quantity]
        seen += any(parts(model, with_error(model, quantity, stated), one) for one in played)
        tenth += any(parts(model, with_error(model, quantity, 0.1 * stated), one)
                     for one in played)  # fmt: skip
    assert seen >= LEAST_CAUGHT
    assert tenth <= RUNS // 2


def played_run(model, run, seed):
    """Return a run in which everything agreed."""
    from behavgen.check.agreement import Agreement  # noqa: PLC0415

    stimulus = make_stimulus(model, run, seed=seed)
    expected, none = expect(model, run, stimulus), np.zeros(len(stimulus.edge), dtype=np.int64)
    agreement = Agreement(
        fault=none.astype(np.int8), compared=~expected.excluded, delay_error=none,
        timed=expected.resolved & ~expected.excluded,
    )  # fmt: skip
    return PlayedRun(run=run, stimulus=stimulus, expected=expected, agreement=agreement)


def parts(model, changed, played):
    """Tell whether a changed model shows another bit, a delay off by two ticks or many by one."""
    stimulus, run = played.stimulus, played.run
    given = {"vcm": stimulus.vcm_v, "vdd": stimulus.vdd_v, "temp_c": run.meant.temperature_c,
             "process": run.meant.process}  # fmt: skip
    if np.isnan(stimulus.vdd_v).any() or model.cell.pins.vdd is None:
        given.pop("vdd")
    phase = stimulus.end - stimulus.edge
    trace = reference_of(changed, run).trace(stimulus.sampled_v, phase, stimulus.reset, **given)
    shown = played.agreement.timed
    off = np.abs(trace.delay_ticks - stimulus.trace.delay_ticks)[shown]
    bits = (trace.leaning != stimulus.trace.leaning)[shown]
    return bool(bits.any() or (off >= 2).any() or (off > 0).sum() > 1 + 0.01 * shown.sum())


def test_power_is_stated_of_every_effect_that_is_there():
    model = full_model()
    run = next(r for r in plan_batches(model)[0].runs if r.name == "typ, noise on")
    found = decision_power([block_power(model, played_run(model, replace(run, decisions=300), 1))])
    assert [one.quantity for one in found] == ["offset", "sigma", "tau", "delay"]
    assert {one.how for one in found} == {BY_DECISION}
