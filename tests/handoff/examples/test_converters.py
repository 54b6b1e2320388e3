"""Converters built from emitted modules, against closed forms and published values."""

from __future__ import annotations

import json
import re
from pathlib import Path

import numpy as np
import pytest

from behavgen.formulas.converters import sar_easy_regeneration_taus
from behavgen.handoff.examples.converter import Converter, middle_point
from behavgen.handoff.examples.experiment import Experiment
from behavgen.handoff.examples.experiments import (
    flash_noise,
    offset_yield,
    sar_metastability,
    sar_noise,
)
from behavgen.handoff.examples.page import examples_page
from behavgen.model import (
    Box,
    Cell,
    ComparatorModel,
    DelayEffect,
    Process,
    Range,
)
from tests.example_models import constant_surface, full_model, renamed_pins_model

PUBLISHED = Path(__file__).parents[2] / "published" / "sar_regeneration.json"

pytestmark = pytest.mark.slow


# Intervals are 4 standard errors wide to each side: 25 points in all, whose expectations chance
# alone would put outside in 0.16 % of cases. Seeds are fixed, so it never happens anew.
@pytest.mark.parametrize("experiment", [sar_noise, flash_noise, offset_yield, sar_metastability])
def test_a_simulated_converter_agrees_with_its_closed_form(experiment, tmp_path):
    found: Experiment = experiment(full_model(), tmp_path)
    assert found.agrees, np.c_[found.x, found.measured, found.low, found.high, found.expected]
    width = found.high - found.low
    assert np.all(width > 0.0)
    if experiment in (sar_noise, flash_noise):
        assert np.all(width < 0.3), "a quarter of a bit must be seen"
        assert found.measured[0] - found.measured[-1] > 1.2


def test_another_noise_than_the_models_is_seen(tmp_path, monkeypatch):
    import behavgen.handoff.examples.experiments as experiments  # noqa: PLC0415

    point = middle_point(full_model())
    louder = type(point)(**{name: getattr(point, name) for name in point.__slots__}
                         | {"noise_v": 1.2 * point.noise_v})  # fmt: skip
    monkeypatch.setattr(experiments, "middle_point", lambda _: louder)
    assert not experiments.sar_noise(full_model(), tmp_path).agrees


def logarithmic_model(full_scale_v: float, tau_s: float) -> ComparatorModel:
    """A latch that needs tau ln(full scale / overdrive) and nothing else."""
    return ComparatorModel(
        cell=Cell(name="log_latch", description="invented"),
        processes=(Process(name="nominal", code=0),),
        box=Box(overdrive_v=Range(low=1e-6, high=full_scale_v)),
        delay=DelayEffect(
            tau=constant_surface("s", "log", float(np.log(tau_s)), "nominal"),
            node_overdrive_v=(full_scale_v,),
            nodes=(constant_surface("s", "log", float(np.log(1e-16)), "nominal"),),
        ),
    )


@pytest.mark.parametrize("bits", range(6, 15))
def test_the_published_regeneration_time_of_a_sar_converter(bits, tmp_path):
    published = json.loads(PUBLISHED.read_text())["sar_easy_regeneration_tau"][str(bits)]
    assert round(sar_easy_regeneration_taus(bits)) == published
    full_scale_v, tau_s, conversions = 1.0, 10e-12, 4000
    model = logarithmic_model(full_scale_v, tau_s)
    converter = Converter(kind="sar", model=model, bits=bits, parameters={"NOISE_ON": "0"})
    x = (np.arange(conversions) + 0.37) / conversions - 0.5  # never at a trip point
    phase_s = np.full(conversions, 1e-9)  # a hundred tau: all decisions resolve
    found = converter.build(tmp_path).convert(
        np.random.default_rng(4).permutation(x) * full_scale_v,
        lsb_v=full_scale_v / 2.0**bits, phase_s=phase_s,
    )  # fmt: skip
    assert not found.lost.any()
    # All decisions but the slowest, to 1 % of the closed form, which rounds to the table's value.
    mean = found.easy_s.mean() / tau_s
    assert mean == pytest.approx(sar_easy_regeneration_taus(bits), rel=0.01)
    assert abs(mean - published) < 0.5 + 0.01 * published
    # All decisions: ln2 B (B + 1) / 2 + B, from E[-ln u] = 1 of a uniform u at each decision.
    every = (found.easy_s + found.slowest_s).mean() / tau_s
    assert every == pytest.approx(0.5 * np.log(2.0) * bits * (bits + 1) + bits, rel=0.01)


def test_a_quiet_converter_is_ideal_in_every_code(tmp_path):
    model = renamed_pins_model()
    parameters = {"NOISE_ON": "0", "DELAY_ON": "0"}
    codes = np.arange(64)
    for kind in ("sar",) if model.cell.pins.unresolved is None else ("sar", "flash"):
        converter = Converter(kind=kind, model=model, bits=6, parameters=parameters)
        found = converter.build(tmp_path / kind).convert((codes + 0.5 - 32.0) * 5e-3, lsb_v=5e-3)
        values = [r if kind == "sar" else r.bit_count() for r in found.result]
        assert values == codes.tolist()


def test_the_page_shows_every_experiment_and_the_cautions(tmp_path):
    found = sar_metastability(full_model(), tmp_path, conversions=300)
    page = examples_page(full_model(), (found,))
    assert page.count('<svg class="chart"') == 1
    assert found.title in page
    assert "sign-off" in page
    assert "invented" in page
    assert not re.search(r"<script|https?://", page.replace("http://www.w3.org", ""))
    wrong = Experiment(**{name: getattr(found, name) for name in Experiment.__slots__}
                       | {"expected": found.expected * 10.0})  # fmt: skip
    assert "DISAGREES" in examples_page(full_model(), (wrong,))
