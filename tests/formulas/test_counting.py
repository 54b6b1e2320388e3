"""Fisher's exact test against published and independent values."""

import pytest
from scipy.stats import fisher_exact

from behavgen.formulas.counting import fisher_exact_p


def test_the_lady_tasting_tea():
    """Three of four cups right, two-sided: R. A. Fisher, The Design of Experiments, 1935."""
    assert fisher_exact_p(3, 4, 1, 4) == pytest.approx(34 / 70)


@pytest.mark.parametrize(
    ("a", "n", "b", "m"), [(91, 200, 114, 200), (0, 200, 6, 200), (40, 50, 900, 1000), (5, 5, 0, 7)]
)
def test_it_agrees_with_scipy(a, n, b, m):
    expected = fisher_exact([[a, n - a], [b, m - b]]).pvalue
    assert fisher_exact_p(a, n, b, m) == pytest.approx(expected, rel=1e-6)
