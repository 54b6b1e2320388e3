"""How far it is and how long it takes, in round numbers."""

from __future__ import annotations

import pytest

from behavgen.regress.progress import progress_text


@pytest.mark.parametrize(
    ("done", "total", "elapsed_s", "text"),
    [
        (1, 300, 0.1, "1 of 300 cells, about 30 s left"),
        (299, 300, 100.0, "299 of 300 cells, a few seconds left"),
        (10, 20, 80.0, "10 of 20 cells, about 80 s left"),
        (10, 20, 600.0, "10 of 20 cells, about 10 min left"),
        (1, 301, 60.0, "1 of 301 cells, about 5.0 h left"),
        (300, 300, 100.0, "300 of 300 cells"),
    ],
)
def test_the_time_left_is_the_average_time_for_each_that_is_left(done, total, elapsed_s, text):
    assert progress_text(done, total, elapsed_s) == text
