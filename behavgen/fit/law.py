"""Delay rows at each condition -> node values of the delay law.

Candidates are the logarithmic law, textbook laws (`law_families`) and free
node values (`formulas.node_law`, linear in its parameters). All conditions are
fitted in one batch; errors count relative to the delay. The law is chosen by
generalised cross-validation over the rows.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt
from scipy.optimize import nnls

from behavgen.fit.law_families import solve_families
from behavgen.fit.law_solution import DelayRows, LawSolution, inverse_of
from behavgen.formulas.node_law import node_law_basis

__all__ = ["LawFit", "LawTrial", "fit_law", "scaled_basis", "solve_nodes"]

Floats = npt.NDArray[np.float64]

_NODE_COUNTS = (2, 3, 4, 5, 6, 8, 10, 12)
_FIRST_NODE_SHARES = (0.3, 0.1, 0.03, 0.01, 0.003, 0.001, 0.0003, 0.0001)
"""Candidates for the first node's overdrive as a share of the largest one."""
_MOST_NODES_SHARE = 0.75
"""Of a condition's distinct overdrives."""
_ROUGHNESS = 1e-3
"""Weight of bends against relative errors: only speaks where no data do."""
_CHANCE = 12.0
"""Laws within a factor 1 + 12/rows of the best are as good. A law too flexible, taken by chance,
understates its errors; with this that happens in fewer than one table of a hundred."""
_AS_GOOD = 1.05
"""The same for node laws of a long table."""
_NEGLIGIBLE = 1e-3
"""Left-out relative error below which nothing is gained any more."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LawTrial:
    """One candidate law and its left-out error.

    Parameters
    ----------
    name : str
    first_node_v : float
        Below this overdrive the law is straight in the logarithm of the overdrive.
    left_out : float
        Mean over conditions of the rms relative error at rows left out.
    """

    name: str
    first_node_v: float
    left_out: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LawFit:
    """The chosen law at every condition.

    Parameters
    ----------
    log_node : ndarray, shape (K,)
    parameters : ndarray, shape (C, K + 1)
        tau, then the delays at the nodes, s; all positive, nodes falling.
    covariance : ndarray, shape (C, K + 1, K + 1)
        Of the parameters, from each condition's own scatter.
    residual_variance : ndarray, shape (C,)
        Of the relative errors: that scatter.
    freedom : ndarray, shape (C,)
        Its degrees of freedom.
    metric : ndarray, shape (C, K + 1, K + 1)
        Mean square relative delay error caused by relative errors of the parameters.
    chosen, runner_up : LawTrial
    """

    log_node: Floats
    parameters: Floats
    covariance: Floats
    residual_variance: Floats
    freedom: Floats
    metric: Floats
    chosen: LawTrial
    runner_up: LawTrial | None

    def at(self, conditions: npt.NDArray[np.bool_]) -> LawFit:
        """Return the law at some of its conditions."""
        return replace(
            self,
            parameters=self.parameters[conditions],
            covariance=self.covariance[conditions],
            residual_variance=self.residual_variance[conditions],
            freedom=self.freedom[conditions],
            metric=self.metric[conditions],
        )


def fit_law(rows: DelayRows) -> LawFit:
    """Choose the law and fit it at every condition.

    Parameters
    ----------
    rows : DelayRows
        Every condition has at least two distinct overdrives.
    """
    simple, free = _candidates(rows)
    errors = np.array([float(s.left_out_rms.mean()) for s in (*simple, *free)])
    chosen = _preferred(rows, simple, free, errors)
    solution = (*simple, *free)[chosen]
    others = [i for i in np.argsort(errors) if (*simple, *free)[i].name != solution.name]
    parameters = _monotone(rows, solution)
    scaled = scaled_basis(rows, solution.log_node)
    relative = scaled * parameters[:, None, :]
    return LawFit(
        log_node=solution.log_node,
        parameters=parameters,
        covariance=solution.inverse * solution.residual_variance[:, None, None],
        residual_variance=solution.residual_variance,
        freedom=solution.freedom,
        metric=relative.transpose(0, 2, 1) @ relative / rows.used[:, None, None],
        chosen=_trial(solution),
        runner_up=_trial((*simple, *free)[others[0]]) if others else None,
    )


def _candidates(rows: DelayRows) -> tuple[list[LawSolution], list[LawSolution]]:
    """Return textbook laws, the simplest first, and laws of free node values."""
    simple = [solve_nodes(rows, log_node) for log_node in _node_sets(rows, (1,))]
    free = [solve_nodes(rows, log_node) for log_node in _node_sets(rows, _NODE_COUNTS)]
    return simple + solve_families(rows), free


def _trial(solution: LawSolution) -> LawTrial:
    return LawTrial(
        name=solution.name,
        first_node_v=float(np.exp(solution.log_node[0])),
        left_out=float(solution.left_out_rms.mean()),
    )


def _preferred(
    rows: DelayRows, simple: list[LawSolution], free: list[LawSolution], errors: Floats
) -> int:
    """Return the simplest textbook law that is as good as any, else the straightest free one.

    Metastability extrapolates the tail over many decades: of free laws as good
    as the best, the one whose tail starts lowest bends it least; of those, the
    one with the fewest nodes.
    """
    chance = 1.0 + _CHANCE / rows.used.sum()
    as_good = errors <= max(float(errors.min()) * chance, _NEGLIGIBLE)
    for i in range(len(simple)):
        if as_good[i] or not free:
            return i
    own = errors[len(simple) :]
    enough = max(float(own.min()) * max(chance, _AS_GOOD), _NEGLIGIBLE)
    good = [i for i in range(len(free)) if own[i] <= enough]
    best = min(good, key=lambda i: (free[i].log_node[0], len(free[i].log_node)))
    return len(simple) + best


def _node_sets(rows: DelayRows, counts: tuple[int, ...]) -> list[Floats]:
    used = rows.weight > 0.0
    lowest, highest = rows.overdrive_v[used].min(), rows.overdrive_v[used].max()
    if counts == (1,):
        return [np.log([highest])]
    distinct = [len(np.unique(v[u])) for v, u in zip(rows.overdrive_v, used, strict=True)]
    most = int(_MOST_NODES_SHARE * np.median(distinct))
    return [
        np.linspace(np.log(highest * share), np.log(highest), count)
        for count in counts
        for share in _FIRST_NODE_SHARES
        if count <= most and highest * share > 1.5 * lowest
    ]


def scaled_basis(rows: DelayRows, log_node: Floats) -> Floats:
    """Return relative delays per unit of each parameter, times root weight, (C, R, K + 1)."""
    # Tables repeat their overdrives from condition to condition.
    distinct, index = np.unique(rows.overdrive_v, return_inverse=True)
    basis = node_law_basis(distinct, log_node)[index.reshape(rows.overdrive_v.shape)]
    scaled = basis / rows.delay_s[..., None]
    return scaled * np.sqrt(rows.weight)[..., None]


def solve_nodes(rows: DelayRows, log_node: Floats, roughness: float = _ROUGHNESS) -> LawSolution:
    """Fit free node values at all conditions.

    Parameters
    ----------
    rows : DelayRows
    log_node : ndarray, shape (K,)
    roughness : float
        Weight of bends, in relative errors.
    """
    root = np.sqrt(rows.weight)
    scaled = scaled_basis(rows, log_node)
    fastest = np.where(rows.weight > 0.0, rows.delay_s, np.inf).min(axis=-1)
    bend = roughness * _bends(log_node)
    normal = scaled.transpose(0, 2, 1) @ scaled
    inverse = inverse_of(normal + (bend.T @ bend) / (fastest * fastest)[:, None, None])
    parameters = (inverse @ scaled.transpose(0, 2, 1) @ root[..., None])[..., 0]
    residual = (scaled @ parameters[..., None])[..., 0] - root
    name = f"{len(log_node)} nodes from {np.exp(log_node[0]) * 1e3:.3g} mV"
    return LawSolution.of(
        name=name if len(log_node) > 1 else "logarithmic law",
        rows=rows,
        log_node=log_node,
        parameters=parameters,
        inverse=inverse,
        squares=(residual**2).sum(axis=-1),
        spent=np.einsum("ckl,clk->c", inverse, normal),
    )


def _bends(log_node: Floats) -> Floats:
    """Return the rows that measure how the slope changes from node to node, in s."""
    count = len(log_node)
    if count == 1:
        return np.array([[1e-3, 0.0]])
    secant = np.zeros((count, count + 1))
    secant[0, 0] = -1.0
    for k, h in enumerate(np.diff(log_node)):
        secant[k + 1, k + 1 : k + 3] = -1.0 / h, 1.0 / h
    return np.diff(secant, axis=0)


def _monotone(rows: DelayRows, solution: LawSolution) -> Floats:
    """Refit the conditions whose nodes do not fall, with falls that cannot be negative."""
    parameters = solution.parameters.copy()
    falls = -np.diff(parameters[:, 1:], axis=-1)
    bad = (parameters[:, 0] <= 0.0) | (parameters[:, -1] <= 0.0) | (falls <= 0.0).any(axis=-1)
    if not bad.any():
        return parameters
    scaled = scaled_basis(rows, solution.log_node)
    bend = _ROUGHNESS * _bends(solution.log_node)
    cumulate = np.eye(parameters.shape[-1])
    cumulate[1:, 1:] = np.triu(np.ones((parameters.shape[-1] - 1,) * 2))
    for c in np.flatnonzero(bad):
        scale = rows.delay_s[c][rows.weight[c] > 0.0].min()
        matrix = np.vstack([scaled[c] * scale, bend]) @ cumulate
        target = np.concatenate([np.sqrt(rows.weight[c]), np.zeros(len(bend))])
        steps, _ = nnls(matrix, target)
        parameters[c] = cumulate @ np.maximum(steps * scale, 1e-3 * scale)
    return parameters
