"""Memory of the previous decision: how large it is, and how it runs through a sequence.

Residues of the previous decision decay while the cell is reset, each internal
node with its own time constant; what is left moves the trip point of the next.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from behavgen.formulas.exact_math import exact_exp

__all__ = ["LONGEST_RESET_TAUS", "memory_shift", "signs_before"]

Floats = npt.NDArray[np.float64]
Signs = npt.NDArray[np.int8]

LONGEST_RESET_TAUS = 700.0
"""A term older than this many of its time constants is left out."""


def memory_shift(
    reset_time_s: Floats, floor_v: Floats, term_v: Floats, tau_s: Floats, cap_v: float
) -> Floats:
    """Return the shift of the trip point in favour of the previous decision, in V.

    Terms are added to the floor in their order, exponentials are the exact ones,
    and the sum is cut at the cap: the same bits in every language.

    Parameters
    ----------
    reset_time_s : ndarray, shape (N,)
        From the reset edge to the decision edge, not negative.
    floor_v : ndarray, shape (N,)
    term_v, tau_s : ndarray, shape (K, N)
    cap_v : float
    """
    shift = np.array(floor_v, dtype=float)
    for height, tau in zip(term_v, tau_s, strict=True):
        age = reset_time_s / tau
        decayed = height * exact_exp(-np.minimum(age, LONGEST_RESET_TAUS))
        shift = shift + np.where(age <= LONGEST_RESET_TAUS, decayed, 0.0)
    return np.minimum(shift, cap_v)


def signs_before(signs_after: Signs, first: int) -> Signs:
    """Return the sign that each decision of a sequence finds, where each hangs on the one before.

    Decisions are maps from the sign they find to the sign they leave; maps are
    composed over doubling distances (W. D. Hillis, G. L. Steele, Communications
    of the ACM 29, 1986, 1170-1183) until each leaves the same whatever it finds.

    Parameters
    ----------
    signs_after : ndarray of int8, shape (3, N)
        Sign left by each decision where it finds -1, 0 and +1.
    first : int
        Sign found by the first decision.

    Returns
    -------
    ndarray of int8, shape (N,)
    """
    left = signs_after + np.int8(1)
    distance = 1
    while distance < left.shape[1] and not (left[0] == left[1:]).all():
        composed = left.copy()
        found, after = left[:, :-distance], left[:, distance:]
        composed[:, distance:] = np.where(
            found == 0, after[0], np.where(found == 1, after[1], after[2])
        )
        left, distance = composed, 2 * distance
    signs = np.append(first, left[first + 1, :-1] - 1)
    return signs.astype(np.int8)
