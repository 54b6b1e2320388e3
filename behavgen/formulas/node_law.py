"""Delay over overdrive, carried by its values at nodes.

Below the first node linear regeneration rules and the delay is a straight
line in the logarithm of the overdrive with slope ``-tau`` (H. Veendrick, IEEE
J. Solid-State Circuits 15, 1980, 169-176). Between nodes it is a cubic
Hermite curve in the logarithm of the overdrive whose slopes are those of the
parabola through three neighbours, limited so that the curve falls wherever
its nodes do (F. N. Fritsch, R. E. Carlson, SIAM J. Numer. Anal. 17, 1980,
238-246). Above the last node the delay stays at its last value.

A single node is the two-parameter law ``t = t_node + tau ln(v_node / v)``.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

__all__ = ["node_law_basis", "node_law_delay", "node_slopes"]

Floats = npt.NDArray[np.float64]


def node_slopes(log_node: Floats, tau_s: Floats, node_s: Floats, *, limited: bool = True) -> Floats:
    """Return d(delay)/d(ln overdrive) at each node.

    Parameters
    ----------
    log_node : ndarray, shape (K,)
        ln of the nodes' overdrives in V, rising.
    tau_s : ndarray, shape (...)
    node_s : ndarray, shape (..., K)
        Delays at the nodes in s.
    limited : bool
        Limit the slopes so that the curve is monotone.

    Returns
    -------
    ndarray, shape (..., K), in s
    """
    slope = np.empty_like(node_s)
    slope[..., 0] = -tau_s
    if len(log_node) == 1:
        return slope
    h = np.diff(log_node)
    secant = np.diff(node_s, axis=-1) / h
    slope[..., 1:-1] = (h[1:] * secant[..., :-1] + h[:-1] * secant[..., 1:]) / (h[1:] + h[:-1])
    if len(log_node) == 2:
        slope[..., -1] = 2.0 * secant[..., -1] + tau_s
    else:
        bend = (secant[..., -1] - secant[..., -2]) / (h[-1] + h[-2])
        slope[..., -1] = secant[..., -1] + h[-1] * bend
    return _limited(slope, secant) if limited else slope


def _limited(slope: Floats, secant: Floats) -> Floats:
    flattest = np.full_like(slope, -np.inf)
    flattest[..., :-1] = secant
    flattest[..., 1:] = np.maximum(flattest[..., 1:], secant)
    return np.minimum(np.maximum(slope, 3.0 * flattest), 0.0)


def _hermite(log_node: Floats, tau_s: Floats, node_s: Floats, slope: Floats, x: Floats) -> Floats:
    tail: Floats = node_s[..., 0] + tau_s * (log_node[0] - x)
    if len(log_node) == 1:
        return np.where(x < log_node[0], tail, node_s[..., 0])
    above = np.nonzero(~(x < log_node[0]))
    x = x[above]
    k = np.clip(np.searchsorted(log_node, x, side="right") - 1, 0, len(log_node) - 2)

    def at(values: Floats, index: npt.NDArray[np.intp]) -> Floats:
        full = np.broadcast_to(values, (*tail.shape, len(log_node)))
        return full[(*above, index)]

    h = log_node[k + 1] - log_node[k]
    s = np.minimum((x - log_node[k]) / h, 1.0)
    r = 1.0 - s
    curve = (
        at(node_s, k) * (1.0 + 2.0 * s) * r * r
        + at(node_s, k + 1) * s * s * (3.0 - 2.0 * s)
        + h * s * r * (at(slope, k) * r - at(slope, k + 1) * s)
    )
    tail[above] = curve
    return tail


def node_law_delay(
    overdrive_v: Floats,
    log_node: Floats,
    tau_s: Floats,
    node_s: Floats,
    slope_s: Floats | None = None,
) -> Floats:
    """Return the delay at each overdrive.

    Parameters
    ----------
    overdrive_v : ndarray, shape (N,)
        Positive, in V.
    log_node : ndarray, shape (K,)
        ln of the nodes' overdrives in V, rising.
    tau_s : ndarray, shape (N,) or ()
    node_s : ndarray, shape (N, K) or (K,)
    slope_s : ndarray or None
        From `node_slopes`, where they are known already.

    Returns
    -------
    ndarray, shape (N,), in s
    """
    slope = node_slopes(log_node, tau_s, node_s) if slope_s is None else slope_s
    return _hermite(log_node, tau_s, node_s, slope, np.log(overdrive_v))


def node_law_basis(overdrive_v: Floats, log_node: Floats) -> Floats:
    """Return the matrix that maps ``(tau, node delays)`` to delays, slopes unlimited.

    Parameters
    ----------
    overdrive_v : ndarray, shape (N,)
    log_node : ndarray, shape (K,)

    Returns
    -------
    ndarray, shape (N, K + 1)
        First column for tau. The law is linear in its parameters, so that a
        least-squares fit needs no starting values.
    """
    unit = np.eye(len(log_node) + 1)[:, None, :]
    tau, node = unit[..., 0], unit[..., 1:]
    slope = node_slopes(log_node, tau, node, limited=False)
    x = np.broadcast_to(np.log(overdrive_v), (len(unit), len(overdrive_v)))
    return _hermite(log_node, tau, node, slope, x).T
