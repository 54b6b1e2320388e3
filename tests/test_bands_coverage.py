"""Intervals cover what produced the data as often as they say, selection of the law included."""

import numpy as np
import pytest

from behavgen.bands import Bands
from behavgen.fit.fit import fit
from behavgen.project import CellSettings
from behavgen.tables.characterisation import Characterisation, Conditions, DelayTable

OVERDRIVE_V = np.geomspace(1e-6, 0.3, 25)
TAU_S = 10e-12


def saturating_latch(overdrive_v):
    # t = tau ln[sinh(V_L/Vs) / sinh(V0/Vs)] with V_L 0.5 V, Vs 0.2 V: closed form.
    return TAU_S * np.log(np.sinh(0.5 / 0.2) / np.sinh(overdrive_v / 0.2))


def fitted(rng, scatter):
    count = len(OVERDRIVE_V)
    nothing = np.full(count, np.nan)
    delay = saturating_latch(OVERDRIVE_V) * (1.0 + scatter * rng.normal(size=count))
    table = DelayTable(
        conditions=Conditions(
            vdd_v=nothing, temperature_k=nothing, vcm_v=nothing, process=np.array([""] * count)
        ),
        overdrive_v=OVERDRIVE_V, delay_s=delay, observed_for_s=nothing, offset_v=nothing,
        decision=np.full(count, -1), measured="", sources=(),
    )  # fmt: skip
    settings = CellSettings(
        name="made_up", description="", decides_on="rising", in_reset="high", when_unresolved="x",
        process_codes={}, reset_delay_s=None, supply_off_v=None, time_precision="1fs", pins={},
        tables=(),
    )  # fmt: skip
    return fit(Characterisation(cell="made_up", processes=(), delay=table), settings)


@pytest.mark.slow
def test_intervals_cover_what_produced_the_data():
    # 95 % intervals of tau, the delay at 1 mV and the window at 150 ps, delays with 0.2 %
    # Gaussian scatter: 94..96 % of 4000 replicates; here 500 with 3 standard errors of slack.
    rng = np.random.default_rng(21)
    truth_window = 2.0 * 0.2 * np.arcsinh(np.sinh(0.5 / 0.2) * np.exp(-150e-12 / TAU_S))
    covered = []
    for _ in range(500):
        model = fitted(rng, 0.002)
        tau = next(p for p in model.parameters if p.name == "tau_s").estimate
        delay = Bands(model).delay(1e-3)
        window = Bands(model).window(150e-12)
        covered.append(
            (
                tau.low <= TAU_S <= tau.high,
                delay.low <= saturating_latch(1e-3) <= delay.high,
                window.low <= truth_window <= window.high,
            )
        )
    share = np.mean(covered, axis=0)
    slack = 3.0 * np.sqrt(0.95 * 0.05 / 500)
    assert (share > 0.94 - slack + 0.01).all(), share
    assert (share < 0.96 + slack - 0.01).all(), share
