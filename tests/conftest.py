"""The switch that writes expected outputs anew, and property tests that repeat."""

from __future__ import annotations

from hypothesis import settings

# The same examples in every run: a change is judged by itself, not by the day's luck.
settings.register_profile("repeatable", derandomize=True, deadline=None)
settings.load_profile("repeatable")


def pytest_addoption(parser):
    parser.addoption(
        "--update-golden",
        action="store_true",
        help="write the files in tests/golden anew; read the difference before committing it",
    )
