"""Experiments on converters built from a packed model, each against its closed form.

Seeds are fixed: the same model gives the same numbers.
"""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.formulas.converters import (
    effective_bits,
    flash_noise_power,
    flash_yield,
    sar_noise_power,
    unresolved_share,
)
from behavgen.handoff.examples.converter import Converter, middle_point
from behavgen.handoff.examples.experiment import Experiment, mean_interval, share_interval
from behavgen.model import ComparatorModel
from behavgen.reference import Reference

__all__ = ["flash_noise", "offset_yield", "sar_metastability", "sar_noise"]

Floats = npt.NDArray[np.float64]

NOISE_RATIOS = (0.02, 0.1, 0.2, 0.35, 0.5, 0.75, 1.0)
"""Noise of a decision over the LSB."""
YIELD_RATIOS = (0.13, 0.14699, 0.18, 0.22, 0.28, 0.36)
"""Deviation of the offset over the LSB; 0.14699 gives four bits a yield of 99 %."""
UNRESOLVED_SHARES = (0.2, 0.08, 0.03, 0.01)
"""Of conversions, at the chosen lengths of the decision phase."""

_IDEAL_DELAYS = {"DELAY_ON": "0"}


def sar_noise(
    model: ComparatorModel, folder: Path, *, bits: int = 8, conversions: int = 2000
) -> Experiment:
    """Sweep the noise of a SAR converter and count its effective bits."""
    rng = np.random.default_rng(1)
    sigma = np.repeat(NOISE_RATIOS, conversions)
    x = rng.uniform(0.0, 2.0**bits, len(sigma))
    lsb = middle_point(model).noise_v / sigma
    converter = Converter(kind="sar", model=model, bits=bits, parameters=_IDEAL_DELAYS)
    vin = (x - 2.0 ** (bits - 1)) * lsb
    codes = converter.build(folder / "sar_noise").convert(vin, lsb_v=lsb).result
    power = (np.array(codes) + 0.5 - x) ** 2
    exact = [sar_noise_power(ratio, bits) for ratio in NOISE_RATIOS]
    law_x = np.linspace(0.0, 1.05, 22)
    law = np.array([sar_noise_power(ratio, bits) for ratio in law_x])
    return _effective(
        power.reshape(-1, conversions), bits, np.array(exact), (law_x, law),
        name="sar-noise",
        title=f"Effective number of bits of a {bits} bit SAR converter over comparator noise",
        law="product of the probabilities of the decisions that lead to each code, averaged over "
            "the input; below half an LSB it is 1/12 LSB² + sigma²",
    )  # fmt: skip


def flash_noise(
    model: ComparatorModel, folder: Path, *, bits: int = 5, conversions: int = 1000
) -> Experiment:
    """Sweep the noise of a flash converter that counts its ones, in the middle of its range."""
    rng = np.random.default_rng(2)
    sigma = np.repeat(NOISE_RATIOS, conversions)
    middle = 2.0 ** (bits - 1)
    x = rng.uniform(0.5 * middle, 1.5 * middle, len(sigma))
    lsb = middle_point(model).noise_v / sigma
    converter = Converter(kind="flash", model=model, bits=bits, parameters=_IDEAL_DELAYS)
    found = converter.build(folder / "flash_noise").convert((x - middle) * lsb, lsb_v=lsb).result
    power = (np.array([ones.bit_count() for ones in found]) + 0.5 - x) ** 2
    law_x = np.linspace(0.0, 1.05, 64)
    return _effective(
        power.reshape(-1, conversions), bits, flash_noise_power(np.array(NOISE_RATIOS)),
        (law_x, flash_noise_power(law_x)),
        name="flash-noise",
        title=f"Effective number of bits of a {bits} bit flash converter over comparator noise",
        law="sigma LSB / sqrt(pi) of added power, and what the noise leaves of the quantisation "
            "error",
    )  # fmt: skip


def _effective(
    power: Floats,
    bits: int,
    expected: Floats,
    curve: tuple[Floats, Floats],
    *,
    name: str,
    title: str,
    law: str,
) -> Experiment:
    """Turn error powers, shape (sweep, conversions), into effective bits."""
    intervals = np.array([mean_interval(row) for row in power])
    measured, most, least = (effective_bits(bits, column) for column in intervals.T)
    return Experiment(
        name=name, title=title,
        x_label="noise of a decision over the LSB", x_unit="1",
        y_label="effective number of bits", y_unit="1",
        x=np.array(NOISE_RATIOS), measured=measured, low=least, high=most,
        expected=effective_bits(bits, expected),
        law_x=curve[0], law_y=effective_bits(bits, curve[1]),
        law=law, trials=f"{power.shape[1]} conversions of uniform inputs at each point",
    )  # fmt: skip


def offset_yield(
    model: ComparatorModel,
    folder: Path,
    *,
    bits: int = 4,
    chips: int = 25,
    run_seeds: Sequence[int] = range(1, 7),
) -> Experiment:
    """Count flash converters that are right in the middle of every code, over mismatch."""
    ratios = np.array(YIELD_RATIOS)
    codes = 2**bits
    lsb = np.repeat(middle_point(model).mismatch_v / ratios, codes)
    middles = np.tile(np.arange(codes) + 0.5, len(ratios))
    converter = Converter(
        kind="flash", model=model, bits=bits, chips=chips,
        parameters={**_IDEAL_DELAYS, "NOISE_ON": "0", "MISMATCH_ON": "1"},
    ).build(folder / "offset_yield")  # fmt: skip
    good = np.zeros(len(ratios), dtype=np.int64)
    for seed in run_seeds:
        vin = (middles - codes / 2) * lsb
        found = converter.convert(vin, lsb_v=lsb, run_seed=seed).result
        good += _good_chips(found, chips, codes - 1).reshape(len(ratios), codes, chips).all(
            axis=1).sum(axis=1)  # fmt: skip
    trials = chips * len(run_seeds)
    intervals = np.array([share_interval(int(count), trials) for count in good])
    law_x = np.linspace(0.1, 0.4, 61)
    return Experiment(
        name="offset-yield",
        title=f"Yield of {bits} bit flash converters over comparator mismatch",
        x_label="deviation of the offset over the LSB", x_unit="1",
        y_label="share of converters with all offsets within half an LSB", y_unit="1",
        x=ratios, measured=intervals[:, 0], low=intervals[:, 1], high=intervals[:, 2],
        expected=flash_yield(ratios, bits), law_x=law_x, law_y=flash_yield(law_x, bits),
        law=f"(1 - 2 Q(0.5 LSB / sigma)) ^ {codes - 1} for independent normal offsets",
        trials=f"{trials} converters of {codes - 1} comparators at each point",
    )  # fmt: skip


def _good_chips(found: Sequence[int], chips: int, count: int) -> npt.NDArray[np.bool_]:
    """Return which chips show the right thermometer at each input, shape (inputs, chips)."""
    mask = (1 << count) - 1
    codes = count + 1
    return np.array(
        [
            [(ones >> (chip * count)) & mask == (1 << (number % codes)) - 1
             for chip in range(chips)]
            for number, ones in enumerate(found)
        ]
    )  # fmt: skip


def sar_metastability(
    model: ComparatorModel, folder: Path, *, bits: int = 6, conversions: int = 2000
) -> Experiment:
    """Shorten the decision phase of a SAR converter and count conversions it leaves undecided."""
    point, reference = middle_point(model), Reference(model, noise=False)
    largest = 0.3 if model.box.overdrive_v is None else model.box.overdrive_v.high
    lsb = largest / 2.0**bits
    window = np.array(UNRESOLVED_SHARES) * lsb * 2.0**bits / (2**bits - 1)
    time_s = reference.delay(0.5 * window, **point.keywords)
    rng = np.random.default_rng(3)
    phase = np.repeat(time_s, conversions)
    vin = rng.uniform(-0.5, 0.5, len(phase)) * lsb * 2.0**bits
    converter = Converter(kind="sar", model=model, bits=bits, parameters={"NOISE_ON": "0"})
    lost = converter.build(folder / "sar_metastability").convert(vin, lsb_v=lsb, phase_s=phase).lost
    hits = (lost.reshape(-1, conversions) > 0).sum(axis=1)
    intervals = np.array([share_interval(int(count), conversions) for count in hits])
    law_x = np.linspace(time_s.min(), time_s.max() * 1.1, 50)
    return Experiment(
        name="sar-metastability",
        title=f"Conversions of a {bits} bit SAR converter that metastability spoils",
        x_label="time given to each decision", x_unit="s",
        y_label="share of conversions with an unresolved decision", y_unit="1",
        x=time_s, measured=intervals[:, 0], low=intervals[:, 1], high=intervals[:, 2],
        expected=unresolved_share(reference.window(time_s, **point.keywords), lsb, bits),
        law_x=law_x,
        law_y=unresolved_share(reference.window(law_x, **point.keywords), lsb, bits),
        law=f"{2**bits - 1} windows of the delay law over the full scale, for uniform inputs; "
            "in the regenerative tail exp(-t / tau)",
        trials=f"{conversions} conversions of uniform inputs at each point",
        logarithmic=True,
    )  # fmt: skip
