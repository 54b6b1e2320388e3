"""An invented clocked latch: two differential equations, solved in time.

Nothing here knows the behavioural laws that are fitted later: there is no delay
formula and no noise formula, only node currents. The devices are those of no
real process. Both outputs rest low; a tail device switched by the clock charges
them through the input pair, and once they pass a threshold the cross-coupled
devices take over and regenerate the difference.

The devices follow coarse textbook laws:

- drain current ``k ov**1.5``, between the square law and full velocity
  saturation (alpha-power law; T. Sakurai & A. R. Newton, IEEE JSSC 1990);
- gate overdrive smoothed to ``n phi ln(1 + exp(v / n phi))``, so that conduction
  is exponential below threshold (after C. Enz, F. Krummenacher & E. Vittoz,
  Analog Integrated Circuits and Signal Processing 1995);
- mobility as ``T**-1.5``, threshold falling by 0.7 mV/K (common practice);
- white noise currents of one-sided density ``4 k T gamma gm`` (A. van der Ziel)
  from the input pair and ``4 k T g`` (H. Nyquist, 1928) from the reset switches.

Arrays of node voltages have shape (2, N, K): outp and outn, N circuits, K runs of each.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

__all__ = [
    "BOLTZMANN_J_PER_K",
    "SENSE_LATCH",
    "SLICER",
    "Circuit",
    "Design",
    "Mismatch",
    "Operating",
    "circuit_at",
    "clock_fall",
    "clock_rise",
    "node_slopes",
    "separation",
    "steering",
]

Floats = npt.NDArray[np.float64]
Clock = Callable[[float], float]
Slopes = Callable[[float, Floats], Floats]

BOLTZMANN_J_PER_K = 1.380649e-23  # CODATA 2018, exact
ELEMENTARY_CHARGE_C = 1.602176634e-19  # CODATA 2018, exact
CLOCK_EDGE_S = 30e-12  # the whole edge, 0 to 100 %
REFERENCE_K = 300.0
SUBTHRESHOLD_SLOPE_FACTOR = 1.3
SATURATION_V = 0.12  # drain-source voltage at which a device's current levels off


@dataclass(frozen=True, slots=True, kw_only=True)
class Design:
    """Sizes of an invented latch.

    Parameters
    ----------
    capacitance_f : float
        At each output, F.
    capacitance_skew : float
        Relative difference between the two, outp larger; gives a systematic offset.
    tail, pair, pull_up, pull_down, reset : float
        Drive of each device, A/V**1.5.
    threshold_v : float
        Of all devices at 300 K.
    noise_factor : float
        Channel noise over ``4 k T gm``.
    """

    capacitance_f: float
    capacitance_skew: float
    tail: float
    pair: float
    pull_up: float
    pull_down: float
    reset: float
    threshold_v: float
    noise_factor: float


SENSE_LATCH = Design(
    capacitance_f=10e-15,
    capacitance_skew=0.006,
    tail=0.30e-3,
    pair=4.0e-3,
    pull_up=1.6e-3,
    pull_down=1.5e-3,
    reset=0.5e-3,
    threshold_v=0.33,
    noise_factor=2 / 3,
)
SLICER = Design(
    capacitance_f=16e-15,
    capacitance_skew=-0.004,
    tail=0.40e-3,
    pair=5.0e-3,
    pull_up=1.6e-3,
    pull_down=1.9e-3,
    reset=0.5e-3,
    threshold_v=0.30,
    noise_factor=2 / 3,
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Operating:
    """Operating conditions, shape (N, 1) each.

    Parameters
    ----------
    vdd_v, temperature_k, vcm_v : ndarray
        Supply (V), temperature (K), input common mode (V).
    threshold_shift_v, drive_factor : ndarray
        What the process does to every threshold (V) and to every drive.
    """

    vdd_v: Floats
    temperature_k: Floats
    vcm_v: Floats
    threshold_shift_v: Floats
    drive_factor: Floats


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Mismatch:
    """Differences between the two halves of each instance, shape (N, 1) or scalar.

    Parameters
    ----------
    pair_threshold_v, latch_threshold_v : ndarray or float
        Threshold of the half at inp less that at inn (V), of the pair and of the
        cross-coupled pull-down devices.
    pair_drive : ndarray or float
        Relative difference of the pair's drives.
    """

    pair_threshold_v: Floats | float = 0.0
    pair_drive: Floats | float = 0.0
    latch_threshold_v: Floats | float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Circuit:
    """A design at its conditions: the constants of its equations.

    Shapes are (N, 1), or (2, N, 1) where outp and outn differ.
    """

    vdd_v: Floats
    smoothing_v: Floats  # n phi
    tail_threshold_v: Floats
    pull_up_threshold_v: Floats
    pull_down_threshold_v: Floats  # (2, N, 1)
    tail: Floats
    pull_up: Floats
    pull_down: Floats
    reset_s: Floats
    pair_overdrive_v: Floats
    pair_threshold_v: Floats | float
    pair_drive: Floats | float
    capacitance_f: Floats  # (2, 1, 1)
    pair_noise_a2_s: Floats  # two-sided densities, A**2 s
    reset_noise_a2_s: Floats


def _overdrive(v: Floats, smoothing_v: Floats) -> Floats:
    return smoothing_v * np.log1p(np.exp(v / smoothing_v))


def _drain_current(drive: Floats, overdrive_v: Floats) -> Floats:
    return drive * overdrive_v * np.sqrt(overdrive_v)


def circuit_at(design: Design, at: Operating, mismatch: Mismatch | None = None) -> Circuit:
    """Return the constants of `design` at the conditions `at`, balanced unless told otherwise."""
    mismatch = mismatch or Mismatch()
    thermal_j = BOLTZMANN_J_PER_K * at.temperature_k
    smoothing_v = SUBTHRESHOLD_SLOPE_FACTOR * thermal_j / ELEMENTARY_CHARGE_C
    threshold_v = (
        design.threshold_v + at.threshold_shift_v - 0.7e-3 * (at.temperature_k - REFERENCE_K)
    )
    drive = at.drive_factor * (at.temperature_k / REFERENCE_K) ** -1.5
    gate_overdrive_v = _overdrive(at.vdd_v - threshold_v, smoothing_v)
    pair_overdrive_v = gate_overdrive_v * (design.tail / design.pair) ** (2 / 3)
    # The pair's common source follows the common mode and can starve the tail device.
    tail_drop_v = _overdrive(at.vcm_v - threshold_v - 0.6 * pair_overdrive_v, smoothing_v)
    tail = drive * design.tail * np.tanh(tail_drop_v / SATURATION_V)
    pair_s = 1.5 * _drain_current(tail, gate_overdrive_v) / pair_overdrive_v
    reset_s = 1.5 * drive * design.reset * np.sqrt(gate_overdrive_v)
    skew = np.array([0.5, -0.5])[:, None, None]
    return Circuit(
        vdd_v=at.vdd_v,
        smoothing_v=smoothing_v,
        tail_threshold_v=threshold_v,
        pull_up_threshold_v=threshold_v,
        pull_down_threshold_v=threshold_v - skew * mismatch.latch_threshold_v,
        tail=tail,
        pull_up=drive * design.pull_up,
        pull_down=drive * design.pull_down,
        reset_s=reset_s,
        pair_overdrive_v=pair_overdrive_v,
        pair_threshold_v=mismatch.pair_threshold_v,
        pair_drive=mismatch.pair_drive,
        capacitance_f=design.capacitance_f * (1 + skew * design.capacitance_skew),
        pair_noise_a2_s=2 * thermal_j * design.noise_factor * pair_s,
        reset_noise_a2_s=2 * thermal_j * reset_s,
    )


def clock_rise(time_s: float) -> float:
    """Return a rising clock, 0..1 of the supply: a raised cosine, half way at 0 s."""
    phase = min(max(time_s / CLOCK_EDGE_S, -0.5), 0.5)
    return 0.5 + 0.5 * math.sin(math.pi * phase)


def clock_fall(time_s: float) -> float:
    """Return a falling clock, 0..1 of the supply, half way at 0 s."""
    return 1.0 - clock_rise(time_s)


def steering(circuit: Circuit, vdiff_v: Floats) -> Floats:
    """Return the shares of the tail current that charge outp and outn, shape (2, N, K)."""
    balance = np.tanh((vdiff_v - circuit.pair_threshold_v) / circuit.pair_overdrive_v)
    shares = np.stack(
        [
            (1 + balance) * (1 + circuit.pair_drive / 2),
            (1 - balance) * (1 - circuit.pair_drive / 2),
        ]
    )
    return np.asarray(shares / shares.sum(axis=0), dtype=np.float64)


def node_slopes(circuit: Circuit, shares: Floats, clock: float, nodes_v: Floats) -> Floats:
    """Return the rates of change of outp and outn without noise, V/s, shape (2, N, K)."""
    vdd_v, smoothing_v = circuit.vdd_v, circuit.smoothing_v
    others_v = nodes_v[::-1]
    tail_a = _drain_current(
        circuit.tail, _overdrive(clock * vdd_v - circuit.tail_threshold_v, smoothing_v)
    )
    pair_a = shares * tail_a
    pull_up_a = _drain_current(
        circuit.pull_up, _overdrive(vdd_v - others_v - circuit.pull_up_threshold_v, smoothing_v)
    )
    pull_down_a = _drain_current(
        circuit.pull_down, _overdrive(others_v - circuit.pull_down_threshold_v, smoothing_v)
    )
    # Pair and pull-up device stand in series: the weaker one limits.
    charging_a = pair_a * pull_up_a / (pair_a + pull_up_a)
    current_a = (
        charging_a * np.tanh((vdd_v - nodes_v) / SATURATION_V)
        - pull_down_a * np.tanh(nodes_v / SATURATION_V)
        - circuit.reset_s * (1 - clock) * nodes_v
    )
    return np.asarray(current_a / circuit.capacitance_f, dtype=np.float64)


def _runge_kutta_step(slopes: Slopes, time_s: float, step_s: float, nodes_v: Floats) -> Floats:
    """Take one classical fourth-order step (W. Kutta, 1901)."""
    half_s = step_s / 2
    a = slopes(time_s, nodes_v)
    b = slopes(time_s + half_s, nodes_v + half_s * a)
    c = slopes(time_s + half_s, nodes_v + half_s * b)
    d = slopes(time_s + step_s, nodes_v + step_s * c)
    return nodes_v + step_s / 6 * (a + 2 * b + 2 * c + d)


def _heun_step(
    slopes: Slopes, time_s: float, step_s: float, nodes_v: Floats, kick_v: Floats
) -> Floats:
    """Take one stochastic Heun step; the noise is additive, so Ito and Stratonovich agree."""
    a = slopes(time_s, nodes_v)
    b = slopes(time_s + step_s, nodes_v + step_s * a + kick_v)
    return nodes_v + step_s / 2 * (a + b) + kick_v


def _noise_step(circuit: Circuit, clock: float, step_s: float) -> Floats:
    """Return the standard deviation of what noise adds in one step, V, shape (2, N, 1)."""
    density = clock * circuit.pair_noise_a2_s + (1 - clock) * circuit.reset_noise_a2_s
    return np.asarray(np.sqrt(density * step_s) / circuit.capacitance_f, dtype=np.float64)


def separation(
    circuit: Circuit,
    vdiff_v: Floats,
    times_s: Floats,
    *,
    clock: Clock = clock_rise,
    decided: bool = False,
    noise: np.random.Generator | None = None,
) -> Floats:
    """Solve the equations and return outp less outn.

    Parameters
    ----------
    circuit : Circuit
        N circuits.
    vdiff_v : ndarray, shape (N, K)
        Input difference of each run, V.
    times_s : ndarray, shape (T,)
        Evenly spaced times; the step of the solver.
    clock : callable
        Clock over time, 0..1 of the supply.
    decided : bool
        Start with outp at the supply instead of both outputs low.
    noise : numpy Generator, optional
        Source of device noise; none: a noise-free solution.

    Returns
    -------
    ndarray, shape (T, N, K)
        Separation of the outputs, V.
    """
    step_s = float(times_s[1] - times_s[0])
    shares = steering(circuit, vdiff_v)
    nodes_v = np.zeros_like(shares)
    if decided:
        nodes_v[0] += circuit.vdd_v

    def slopes(time_s: float, at_v: Floats) -> Floats:
        return node_slopes(circuit, shares, clock(time_s), at_v)

    trace_v = np.empty((len(times_s), *nodes_v.shape[1:]))
    trace_v[0] = nodes_v[0] - nodes_v[1]
    for row, time_s in enumerate(times_s[:-1].tolist(), start=1):
        if noise is None:
            nodes_v = _runge_kutta_step(slopes, time_s, step_s, nodes_v)
        else:
            spread_v = _noise_step(circuit, clock(time_s + step_s / 2), step_s)
            kick_v = spread_v * noise.standard_normal(nodes_v.shape)
            nodes_v = _heun_step(slopes, time_s, step_s, nodes_v, kick_v)
        trace_v[row] = nodes_v[0] - nodes_v[1]
    return trace_v
