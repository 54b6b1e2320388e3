"""What every candidate law yields: node values at each condition and their errors."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

__all__ = ["DelayRows", "LawSolution", "inverse_of"]

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DelayRows:
    """Resolved delays by condition, padded to equal length.

    Parameters
    ----------
    overdrive_v : ndarray, shape (C, R)
        Magnitudes; 1 where padded.
    delay_s : ndarray, shape (C, R)
        1 where padded.
    weight : ndarray, shape (C, R)
        Of the relative error; 0 where padded.
    """

    overdrive_v: Floats
    delay_s: Floats
    weight: Floats

    @property
    def used(self) -> Floats:
        """How many rows each condition has, shape (C,)."""
        return np.maximum((self.weight > 0.0).sum(axis=-1), 1).astype(float)

    def at(self, conditions: npt.NDArray[np.intp]) -> DelayRows:
        """Return the rows of some conditions."""
        return DelayRows(
            overdrive_v=self.overdrive_v[conditions],
            delay_s=self.delay_s[conditions],
            weight=self.weight[conditions],
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LawSolution:
    """One law at every condition.

    Parameters
    ----------
    name : str
    log_node : ndarray, shape (K,)
    parameters : ndarray, shape (C, K + 1)
        tau, then the delays at the nodes, s.
    inverse : ndarray, shape (C, K + 1, K + 1)
        Covariance of the parameters for relative errors of unit variance.
    residual_variance : ndarray, shape (C,)
        Of the relative errors.
    left_out_rms : ndarray, shape (C,)
        Relative error at rows left out, by generalised cross-validation.
    freedom : ndarray, shape (C,)
        Degrees of freedom of `residual_variance`.
    """

    name: str
    log_node: Floats
    parameters: Floats
    inverse: Floats
    residual_variance: Floats
    left_out_rms: Floats
    freedom: Floats

    @classmethod
    def of(
        cls, *, name: str, rows: DelayRows, log_node: Floats, parameters: Floats, inverse: Floats,
        squares: Floats, spent: Floats,
    ) -> LawSolution:  # fmt: skip
        """Return a solution from its sum of squares and the parameters it spent, (C,) each.

        Generalised cross-validation (P. Craven, G. Wahba, Numer. Math. 31, 1979,
        377-403) does not mistake the sparse ends of a table for a bad law.
        """
        freedom = np.maximum(rows.used - spent, 1.0)
        variance = squares / freedom
        return cls(
            name=name,
            log_node=log_node,
            parameters=parameters,
            inverse=inverse,
            residual_variance=variance,
            left_out_rms=np.sqrt(variance * rows.used / freedom),
            freedom=freedom,
        )


def inverse_of(normal: Floats) -> Floats:
    """Invert positive definite matrices, scaled to a unit diagonal first."""
    scale = 1.0 / np.sqrt(np.maximum(np.diagonal(normal, axis1=-2, axis2=-1), 1e-300))
    unit = normal * scale[..., :, None] * scale[..., None, :]
    unit = unit + 1e-12 * np.eye(normal.shape[-1])
    return np.linalg.inv(unit) * scale[..., :, None] * scale[..., None, :]
