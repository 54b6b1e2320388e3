"""Effects: what was characterised of a comparator, each optional in its model.

Effects depend on the operating condition through `Surface`, a polynomial that
every language evaluates in the same order.
"""

from __future__ import annotations

from dataclasses import dataclass

from behavgen.surface import Matrix, Range, Surface

__all__ = [
    "ApertureEffect",
    "DelayEffect",
    "EnergyEffect",
    "KickbackEffect",
    "MemoryEffect",
    "MemoryTerm",
    "MismatchEffect",
    "NoiseEffect",
    "OffsetEffect",
    "ResetEffect",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class OffsetEffect:
    """Nominal trip point in V (transform plain)."""

    surface: Surface
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class MismatchEffect:
    """Offset differences between instances.

    An instance's mismatch is the sum over components of ``component(condition) * z``
    with one standard normal `z` a component and instance, drawn once.

    Parameters
    ----------
    components : tuple of Surface
        In V per sigma (transform plain).
    instances : int
        How many were measured.
    """

    components: tuple[Surface, ...]
    instances: int


@dataclass(frozen=True, slots=True, kw_only=True)
class NoiseEffect:
    """Input-referred noise sigma of one decision in V (transform log)."""

    surface: Surface


@dataclass(frozen=True, slots=True, kw_only=True)
class DelayEffect:
    """Delay over overdrive, carried by its values at nodes (see `formulas.node_law`).

    Parameters
    ----------
    tau : Surface
        Regeneration time constant in s (transform log).
    node_overdrive_v : tuple of float, length K
        Rising; the last is the largest characterised overdrive.
    nodes : tuple of Surface, length K
        Delay at each node in s (transform log), all with the axes and exponents of `tau`.
    floor_v : float
        Overdrives below it are not distinguished, so that every delay is finite.
    law : str
        Name of the law that gave the nodes their values at each condition.
    law_error : float or None
        Its relative error at rows left out: the mean over conditions of the rms.
    runner_up : str
        The law that came next; empty when there was none.
    runner_up_error : float or None
    measured : str
        Reference levels of the delay in the user's words.
    scatter : Matrix
        Covariance of ln tau and the nodes' ln delays at one tabulated condition from
        the scatter of its rows, shape (K+1, K+1); empty when unknown.
    scatter_freedom : int
        Degrees of freedom of `scatter`.
    lack_of_fit : Matrix
        Covariance of the same between tabulated conditions beyond what scatter
        explains, shape (K+1, K+1); empty with a single condition.
    leverage : Matrix
        Covariance of the surfaces' coefficients for unit scatter, shape (terms, terms).

    Notes
    -----
    With `a` the surfaces' terms at a condition, the logarithms of tau and of the
    node delays there have the covariance ``(a @ leverage @ a) * scatter + lack_of_fit``.
    """

    tau: Surface
    node_overdrive_v: tuple[float, ...]
    nodes: tuple[Surface, ...]
    floor_v: float = 1e-15
    law: str = ""
    law_error: float | None = None
    runner_up: str = ""
    runner_up_error: float | None = None
    measured: str = ""
    scatter: Matrix = ()
    scatter_freedom: int = 0
    lack_of_fit: Matrix = ()
    leverage: Matrix = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class ResetEffect:
    """Time from the reset edge to the outputs' reset state in s (transform log)."""

    surface: Surface


@dataclass(frozen=True, slots=True, kw_only=True)
class MemoryTerm:
    """One decaying part of the memory: ``shift * exp(-t / tau)``.

    Parameters
    ----------
    shift : Surface
        Extrapolated to no reset at all, in V (transform log).
    tau : Surface
        In s (transform log).
    """

    shift: Surface
    tau: Surface


@dataclass(frozen=True, slots=True, kw_only=True)
class MemoryEffect:
    """By how much the trip point moves in favour of the previous decision.

    In V, a time `t` after the reset edge: ``min(cap_v, floor + sum of the terms)``.

    Parameters
    ----------
    terms : tuple of MemoryTerm
        The fastest first; none where no reset time removes anything.
    floor : Surface or None
        What no reset time removes, in V (transform log); None: nothing.
    cap_v : float
        The largest shift that the table vouches for: shorter resets are not extrapolated beyond.
    """

    terms: tuple[MemoryTerm, ...]
    floor: Surface | None
    cap_v: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ApertureEffect:
    """When, relative to the decision edge, the input counts.

    Parameters
    ----------
    centre : Surface
        Mean of the input's weight over time, in s (transform plain).
    width : Surface
        Time in which its share after a step falls from 90 % to 10 %, in s (transform
        log); reported, of no influence on decisions.
    """

    centre: Surface
    width: Surface


@dataclass(frozen=True, slots=True, kw_only=True)
class EnergyEffect:
    """Energy of one decision and the reset after it, in J.

    Parameters
    ----------
    law : str
        ``"constant"``: `fixed`; ``"delay"``: ``fixed + rise * delay``, a current that
        flows while the cell decides; ``"overdrive"``: ``fixed + rise * ln(high / magnitude)``
        with the overdrive's magnitude kept inside `overdrive_v`.
    fixed : Surface
        In J (transform log).
    rise : Surface or None
        In W or, of the law ``"overdrive"``, in J (transform log).
    overdrive_v : Range or None
        Tabulated overdrives; of the law ``"overdrive"`` only.
    cycle_time_s : float or None
        Clock period in which the energy was measured; None where the table does not say.
    """

    law: str
    fixed: Surface
    rise: Surface | None = None
    overdrive_v: Range | None = None
    cycle_time_s: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class KickbackEffect:
    """Charge that a decision drives out of the input pins into their sources.

    Parameters
    ----------
    common : Surface
        Mean of both pins, in C (transform plain).
    differential : Surface
        Of `inp` less that of `inn` at balanced inputs, in C (transform plain).
    differential_per_v : Surface or None
        What a differential input adds to it, in C/V (transform plain); None: nothing.
    """

    common: Surface
    differential: Surface
    differential_per_v: Surface | None = None
