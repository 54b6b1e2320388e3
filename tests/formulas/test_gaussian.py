"""Tails of the normal distribution."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import log_ndtr

from behavgen.formulas.gaussian import gaussian_tails, normal_pdf


def test_logs_agree_with_an_independent_implementation() -> None:
    z = np.linspace(-45.0, 45.0, 1801)
    tails = gaussian_tails(z)
    np.testing.assert_allclose(tails.log_below, log_ndtr(z), rtol=1e-12, atol=1e-300)
    np.testing.assert_allclose(tails.log_above, log_ndtr(-z), rtol=1e-12, atol=1e-300)


def test_hazards_are_the_slopes_of_the_logs() -> None:
    z, h = np.linspace(-30.0, 30.0, 601), 1e-4
    tails = gaussian_tails(z)
    slope = (log_ndtr(z + h) - log_ndtr(z - h)) / (2.0 * h)
    np.testing.assert_allclose(tails.hazard_below, slope, rtol=1e-6, atol=1e-7)
    np.testing.assert_allclose(tails.hazard_above, tails.hazard_below[::-1], rtol=1e-12)


def test_far_tails_keep_their_asymptote() -> None:
    # phi(z) / Phi(-z) = z + 1/z - 2/z^3 + ... (Abramowitz & Stegun 26.2.12)
    z = np.array([50.0, 1e3, 1e6])
    tails = gaussian_tails(z)
    np.testing.assert_allclose(tails.hazard_above, z + 1 / z - 2 / z**3, rtol=1e-9)
    assert np.all(np.isfinite(tails.log_above))


def test_density_at_zero() -> None:
    assert float(normal_pdf(0.0)) == pytest.approx(0.3989422804014327)  # 1/sqrt(2 pi)
