"""Delays fall with the overdrive everywhere inside the box."""

import itertools
from importlib import import_module

import numpy as np
import pytest

from behavgen.fit.delay import fit_delay
from behavgen.fit.delay_laws import delay_laws
from behavgen.fit.delay_rows import resolved_rows
from behavgen.fit.delay_surfaces import delay_family, falling_family
from behavgen.fit.node_order import first_crossing, held_apart
from behavgen.formulas.node_law import node_law_delay
from tests.fit.weak_latches import LATCHES, OVERDRIVE_V, delay_table, read_rows

VDD_V = (0.9, 1.0, 1.1)
TAU_S = (20e-12, 0.4e-12, 0.8e-12)
"""Delays that all but stop to depend on the overdrive at two of three supplies."""


def levelling_off(temperatures_c):
    rows = [
        (temp_c, vdd_v, np.nan, v, (1.0 + 5e-4 * temp_c) * (100e-12 + tau_s * np.log1p(0.05 / v)))
        for temp_c in temperatures_c
        for vdd_v, tau_s in zip(VDD_V, TAU_S, strict=True)
        for v in OVERDRIVE_V
    ]
    return np.array(rows)


def dense_delays(found, steps=13):
    """Return delays all over the box, shape (N, V), in s."""
    box = found.family.boxes["nominal"]
    spans = (box.temperature_k, box.vdd_v, box.vcm_v)
    levels = [[np.nan] if s is None else np.linspace(s.low, s.high, steps) for s in spans]
    values = np.array(list(itertools.product(*levels)))
    parameters = np.exp(found.family.fit.predict(values))
    overdrive_v = np.geomspace(1e-7, 0.3, 80)
    return np.array(
        [node_law_delay(overdrive_v, found.law.log_node, p[0], p[1:]) for p in parameters]
    )


@pytest.mark.parametrize("temperatures_c", [(27.0,), (-40.0, 27.0, 125.0)])
def test_surfaces_that_would_cross_are_held_apart(temperatures_c):
    rows = levelling_off(temperatures_c)
    found = fit_delay(delay_table(rows, np.nan), None, ("nominal",))
    assert any("gave larger overdrives longer delays" in notice for notice in found.notices)
    delays = dense_delays(found)
    assert (delays > 0.0).all()
    # The grid on which nodes are held apart is coarser than this one.
    assert (np.diff(delays, axis=1) < 1e-4 * delays[:, 1:]).all()
    values = np.column_stack([rows[:, 0] + 273.15, rows[:, 1], rows[:, 2]])
    tau, nodes = np.split(np.exp(found.family.fit.predict(values)), [1], axis=1)
    modelled = node_law_delay(rows[:, 3], found.law.log_node, tau[:, 0], nodes)
    assert modelled == pytest.approx(rows[:, 4], rel=0.03)


@pytest.mark.parametrize("name", LATCHES)
def test_delays_of_weak_latches_fall_everywhere(name):
    table = delay_table(read_rows(name), LATCHES[name].observed_for_s)
    delays = dense_delays(fit_delay(table, None, ("nominal",)))
    assert (np.diff(delays, axis=1) <= 1e-3 * delays[:, 1:]).all()


def crossing_surfaces():
    rows = resolved_rows(delay_table(levelling_off((27.0,)), np.nan), None, ("nominal",))
    laws = delay_laws(rows, ("nominal",))
    return laws, delay_family(laws.sites, laws.law, ("nominal",))


def test_surfaces_that_do_not_cross_stay_as_they_are():
    laws, family = crossing_surfaces()
    apart = held_apart(family, laws.sites)
    assert first_crossing(family) is not None
    assert first_crossing(apart) is None
    again, notices = falling_family(apart, laws.sites, laws.law, ("nominal",))
    assert again is apart
    assert notices == []


def test_where_holding_apart_fails_a_lower_order_is_taken(monkeypatch):
    laws, family = crossing_surfaces()
    module = import_module("behavgen.fit.delay_surfaces")
    monkeypatch.setattr(module, "held_apart", lambda family, sites: family)
    found, notices = falling_family(family, laws.sites, laws.law, ("nominal",))
    assert first_crossing(found) is None
    assert max(map(sum, found.fit.form.exponents)) < max(map(sum, family.fit.form.exponents))
    assert "surfaces of lower order" in notices[0]
