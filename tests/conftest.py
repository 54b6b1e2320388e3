"""The switch that writes expected outputs anew."""

from __future__ import annotations


def pytest_addoption(parser):
    parser.addoption(
        "--update-golden",
        action="store_true",
        help="write the files in tests/golden anew; read the difference before committing it",
    )
