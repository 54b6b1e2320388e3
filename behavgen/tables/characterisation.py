"""What the tables say, in SI units: the input of every fit.

Each quantity is one frozen table of equally long numpy arrays. A condition
that a table neither has nor fixes holds everywhere: its array is NaN (or ""
for the process) throughout. A table's `origin` says where its rows stand; it is
None where no file was read, and that of the S-curves in the table of the noise.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.project import CellSettings
from behavgen.provenance import NOT_SAID, Provenance

__all__ = [
    "ApertureTable",
    "Characterisation",
    "Conditions",
    "DelayTable",
    "EnergyTable",
    "KickbackTable",
    "MemoryTable",
    "NoiseTable",
    "OffsetStatistics",
    "OffsetTable",
    "ResetTable",
    "RowOrigin",
    "TableSource",
    "WindowTable",
]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Texts = npt.NDArray[np.str_]


@dataclass(frozen=True, slots=True, kw_only=True)
class TableSource:
    """Where rows came from, for provenance and messages.

    Parameters
    ----------
    quantity : str
        Quantity as named in the project file, e.g. ``"delay"``.
    file : str
        Path relative to the project file, with forward slashes.
    sha256 : str
        Hash of the file's bytes.
    rows : int
        Rows used.
    failed_rows : int
        Rows dropped because a cell held a failed-run token.
    measured : str
        The user's words on how it was measured; may be empty.
    provenance : Provenance
        The user's words on what was characterised.
    """

    quantity: str
    file: str
    sha256: str
    rows: int
    failed_rows: int = 0
    measured: str = ""
    provenance: Provenance = NOT_SAID


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RowOrigin:
    """In which line of which file each row of a table stands.

    Parameters
    ----------
    files : tuple of str
    file : ndarray of int, shape (N,)
        Index into `files`.
    line : ndarray of int, shape (N,)
        1-based, header included.
    """

    files: tuple[str, ...]
    file: Integers
    line: Integers


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Conditions:
    """Operating conditions, one entry a row.

    Parameters
    ----------
    vdd_v, temperature_k, vcm_v : ndarray, shape (N,)
        Supply (V), temperature (K), input common mode (V); NaN: holds everywhere.
    process : ndarray of str, shape (N,)
        Process name; "" holds for all.
    """

    vdd_v: Floats
    temperature_k: Floats
    vcm_v: Floats
    process: Texts

    def taken(self, use: npt.NDArray[np.bool_]) -> Conditions:
        """Return the conditions of some rows."""
        return Conditions(
            vdd_v=self.vdd_v[use],
            temperature_k=self.temperature_k[use],
            vcm_v=self.vcm_v[use],
            process=self.process[use],
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class OffsetTable:
    """Offsets of single instances, shape (N,) each.

    `offset_low_v` and `offset_high_v` bracket the measurement error, NaN where not given.
    """

    conditions: Conditions
    instance: Texts
    offset_v: Floats
    offset_low_v: Floats
    offset_high_v: Floats
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class OffsetStatistics:
    """Offset statistics somebody else computed, shape (N,) each."""

    conditions: Conditions
    mean_v: Floats
    sigma_v: Floats
    instances: Integers
    sources: tuple[TableSource, ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class NoiseTable:
    """S-curves and ready-made sigmas.

    Parameters
    ----------
    conditions : Conditions
        Of the S-curve rows, shape (N,).
    instance : ndarray of str, shape (N,)
        "" where the table has no such column.
    vdiff_v : ndarray, shape (N,)
        Input level in V.
    trials, ones : ndarray of int, shape (N,)
        Decisions at that level and how many were one. Rows of single bits
        arrive here already counted.
    sigma_conditions : Conditions
        Of the ready-made sigmas, shape (M,).
    sigma_v, sigma_error_v : ndarray, shape (M,)
        Noise sigma in V and its standard error, NaN where not given.
    """

    conditions: Conditions
    instance: Texts
    vdiff_v: Floats
    trials: Integers
    ones: Integers
    sigma_conditions: Conditions
    sigma_v: Floats
    sigma_error_v: Floats
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DelayTable:
    """Decision delays, shape (N,) each.

    Parameters
    ----------
    overdrive_v : ndarray
        Signed where the table gave the sign (`vdiff` less `offset`), V.
    delay_s : ndarray
        NaN: not resolved within `observed_for_s`.
    observed_for_s : ndarray
        How long an unresolved row was watched; NaN when unknown.
    offset_v : ndarray
        Trip point the table itself states at that row; NaN when it does not.
    decision : ndarray
        1, 0, or -1 where the table has no such column.
    measured : str
        Reference levels of the delay in the user's words.
    """

    conditions: Conditions
    overdrive_v: Floats
    delay_s: Floats
    observed_for_s: Floats
    offset_v: Floats
    decision: Integers
    measured: str
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class WindowTable:
    """Metastable windows, shape (N,) each.

    Parameters
    ----------
    resolve_time_s : ndarray
        Time after the decision edge, s.
    window_v : ndarray
        Width of the input interval still unresolved then, V; NaN: wider than
        `searched_span_v`. Rows given as counts arrive as
        ``span * unresolved / trials``.
    window_relative_error : ndarray
        Standard error over value for counted rows, 0 for searched ones.
    searched_span_v : ndarray
        NaN when not given.
    measured : str
        Reference levels in the user's words.
    """

    conditions: Conditions
    resolve_time_s: Floats
    window_v: Floats
    window_relative_error: Floats
    searched_span_v: Floats
    measured: str
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ResetTable:
    """Reset delays, shape (N,) each, in s."""

    conditions: Conditions
    reset_delay_s: Floats
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MemoryTable:
    """Memory of the previous decision, shape (N,) each.

    Parameters
    ----------
    reset_time_s : ndarray
        From the reset edge to the next decision edge, s.
    memory_shift_v : ndarray
        Half the distance between the trip points after a one and after a zero, V.
    censored : ndarray of bool
        The shift is at least so large.
    """

    conditions: Conditions
    reset_time_s: Floats
    memory_shift_v: Floats
    censored: npt.NDArray[np.bool_]
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ApertureTable:
    """Weight of the input over time, shape (N,) each.

    Parameters
    ----------
    step_time_s : ndarray
        When the input steps, relative to the decision edge, s.
    step_weight : ndarray
        Share of the input's weight that lies after the step.
    step_v : ndarray
        Height of the step, V; NaN when not given.
    """

    conditions: Conditions
    step_time_s: Floats
    step_weight: Floats
    step_v: Floats
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class EnergyTable:
    """Energy of a decision and the reset after it, shape (N,) each.

    Parameters
    ----------
    overdrive_v, vdiff_v : ndarray
        One of them per row, V; the other is NaN.
    energy_j : ndarray
    cycle_time_s : ndarray
        Clock period, s; NaN when not given.
    """

    conditions: Conditions
    overdrive_v: Floats
    vdiff_v: Floats
    energy_j: Floats
    cycle_time_s: Floats
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class KickbackTable:
    """Charge driven out of the input pins by a decision, shape (N,) each.

    Parameters
    ----------
    charge_common_c, charge_differential_c : ndarray
        Mean of both pins, and of `inp` less that of `inn`, C.
    vdiff_v, source_resistance_ohm : ndarray
        NaN when not given.
    """

    conditions: Conditions
    charge_common_c: Floats
    charge_differential_c: Floats
    vdiff_v: Floats
    source_resistance_ohm: Floats
    sources: tuple[TableSource, ...]
    origin: RowOrigin | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Characterisation:
    """All tables of one cell; an absent table is an absent effect.

    `settings` are the cell's entry in the project file, where there is one.
    `notices` are what a user should look at although nothing is wrong.
    """

    cell: str
    processes: tuple[str, ...]
    settings: CellSettings | None = None
    offset: OffsetTable | None = None
    offset_statistics: OffsetStatistics | None = None
    noise: NoiseTable | None = None
    delay: DelayTable | None = None
    window: WindowTable | None = None
    reset: ResetTable | None = None
    memory: MemoryTable | None = None
    aperture: ApertureTable | None = None
    energy: EnergyTable | None = None
    kickback: KickbackTable | None = None
    sources: tuple[TableSource, ...] = ()
    notices: tuple[str, ...] = ()
