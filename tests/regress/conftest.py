"""Models of the invented latch, fitted once for all tests."""

from __future__ import annotations

import pytest

from tests.regress.invented_cells import Truth, drawn_model


@pytest.fixture(scope="session")
def first():
    """The latch as it was recorded."""
    return drawn_model(Truth(), seed=1)


@pytest.fixture(scope="session")
def slower():
    """The same latch, 3 % slower in the process ``slow``."""
    return drawn_model(Truth(slow_factor=1.2 * 1.03), seed=2)
