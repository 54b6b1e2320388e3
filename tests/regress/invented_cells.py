"""Tables of an invented latch, drawn again and again from one truth.

The truth is in closed form, so that a drift is planted by changing one number of it:
trip point, Gaussian noise, mismatch, and the delay ``t0 + tau ln(1 + v_x / v)``, times a
factor that rises as the supply falls.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr

from behavgen.fit.fit import fit
from behavgen.model import ComparatorModel
from behavgen.project import CellSettings
from behavgen.provenance import NOT_SAID, Provenance
from behavgen.tables.characterisation import (
    Characterisation,
    Conditions,
    DelayTable,
    NoiseTable,
    OffsetTable,
    RowOrigin,
    TableSource,
)

SUPPLIES_V = (0.9, 1.0, 1.1)
LEVELS = np.array([-1.6, -1.1, -0.6, 0.0, 0.6, 1.1, 1.6])
OVERDRIVES_V = np.geomspace(1e-5, 0.1, 13)
PINS = {name: name for name in ("inp", "inn", "clk", "outp", "outn", "vdd", "unresolved", "vss")}


@dataclass(frozen=True)
class Truth:
    offset_v: float = 3e-4
    sigma_v: float = 6e-4
    mismatch_v: float = 5e-3
    tau_s: float = 12e-12
    slow_factor: float = 1.2
    """Of the delays in the process ``slow``, measured at the middle supply only."""
    delay_scatter: float = 2e-3
    trials: int = 1000
    instances: int = 60


def settings(name="latch", **changes) -> CellSettings:
    given = {
        "name": name,
        "description": "invented latch",
        "decides_on": "rising",
        "in_reset": "low",
        "when_unresolved": "x",
        "process_codes": {"typ": 0, "slow": 1},
        "reset_delay_s": None,
        "supply_off_v": None,
        "time_precision": "1fs",
        "pins": {**PINS, "enable": None},
        "tables": (),
    }
    return CellSettings(**{**given, **changes})


def conditions(vdd_v, process) -> Conditions:
    rows = len(vdd_v)
    return Conditions(
        vdd_v=np.asarray(vdd_v, dtype=float),
        temperature_k=np.full(rows, np.nan),
        vcm_v=np.full(rows, np.nan),
        process=np.broadcast_to(np.asarray(process, dtype=np.str_), rows),
    )


def origin(file, rows) -> RowOrigin:
    return RowOrigin(files=(file,), file=np.zeros(rows, int), line=np.arange(2, rows + 2))


def source(quantity, seed, rows, provenance):
    return (
        TableSource(
            quantity=quantity,
            file=f"{quantity}.csv",
            sha256=f"{seed:064x}",
            rows=rows,
            provenance=provenance,
        ),
    )


def drawn_tables(truth: Truth, seed: int, provenance: Provenance = NOT_SAID) -> Characterisation:
    """Measure the latch once more; the seed also stands for the hash of the files."""
    rng = np.random.default_rng(seed)
    noise, offset, delay = _noise(truth, rng), _offset(truth, rng), _delay(truth, rng)
    tables = {
        name: (make, source(name, seed, len(make["conditions"].vdd_v), provenance))
        for name, make in (("noise", noise), ("offset", offset), ("delay", delay))
    }
    kinds = {"noise": NoiseTable, "offset": OffsetTable, "delay": DelayTable}
    built = {
        name: kinds[name](**make, sources=sources, origin=origin(f"{name}.csv", sources[0].rows))
        for name, (make, sources) in tables.items()
    }
    return Characterisation(
        cell="latch",
        processes=("typ", "slow"),
        settings=settings(),
        sources=tuple(one for _, sources in tables.values() for one in sources),
        **built,
    )


def drawn_model(truth: Truth, seed: int, provenance: Provenance = NOT_SAID) -> ComparatorModel:
    return fit(drawn_tables(truth, seed, provenance))


def _noise(truth, rng):
    vdd = np.repeat(SUPPLIES_V, len(LEVELS))
    # Levels are set beforehand, by somebody who knows the first truth.
    first = Truth()
    vdiff = first.offset_v + first.sigma_v * np.tile(LEVELS, len(SUPPLIES_V))
    share = ndtr((vdiff - truth.offset_v) / truth.sigma_v)
    rows = len(vdiff)
    nothing = np.empty(0)
    return {
        "conditions": conditions(vdd, "typ"),
        "instance": np.full(rows, ""),
        "vdiff_v": vdiff,
        "trials": np.full(rows, truth.trials),
        "ones": rng.binomial(truth.trials, share),
        "sigma_conditions": conditions(nothing, ""),
        "sigma_v": nothing,
        "sigma_error_v": nothing,
    }


def _offset(truth, rng):
    rows = truth.instances
    return {
        "conditions": conditions(np.full(rows, 1.0), "typ"),
        "instance": np.array([f"i{k}" for k in range(rows)]),
        "offset_v": rng.normal(0.0, truth.mismatch_v, rows),
        "offset_low_v": np.full(rows, np.nan),
        "offset_high_v": np.full(rows, np.nan),
    }


def _delay(truth, rng):
    supplies = np.repeat([*SUPPLIES_V, 1.0], len(OVERDRIVES_V))
    process = np.repeat(["typ", "typ", "typ", "slow"], len(OVERDRIVES_V))
    overdrive = np.tile(OVERDRIVES_V, len(SUPPLIES_V) + 1)
    law = 30e-12 + truth.tau_s * np.log1p(0.05 / overdrive)
    factor = (1.0 / supplies) ** 1.5 * np.where(process == "slow", truth.slow_factor, 1.0)
    rows = len(supplies)
    return {
        "conditions": conditions(supplies, process),
        "overdrive_v": overdrive,
        "delay_s": law * factor * np.exp(rng.normal(0.0, truth.delay_scatter, rows)),
        "observed_for_s": np.full(rows, np.nan),
        "offset_v": np.full(rows, np.nan),
        "decision": np.full(rows, -1),
        "measured": "clk 50 % to outp-outn at half supply",
    }
