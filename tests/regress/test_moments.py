"""What people write for the past, and the clock that builds which must repeat go by."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta, timezone

import pytest

from behavgen.errors import ProjectError
from behavgen.regress.moments import moment_of, present_moment

NOW = datetime(2026, 3, 15, 12, 0, tzinfo=UTC)


@pytest.mark.parametrize(
    ("text", "moment"),
    [
        ("2026-03-01", datetime(2026, 3, 1, tzinfo=UTC)),
        ("2026-03-01T06:30", datetime(2026, 3, 1, 6, 30, tzinfo=UTC)),
        (
            "2026-03-01T06:30+02:00",
            datetime(2026, 3, 1, 6, 30, tzinfo=timezone(timedelta(hours=2))),
        ),
        ("12h", datetime(2026, 3, 15, 0, 0, tzinfo=UTC)),
        ("7d", datetime(2026, 3, 8, 12, 0, tzinfo=UTC)),
        (" 2w ", datetime(2026, 3, 1, 12, 0, tzinfo=UTC)),
    ],
)
def test_moments_are_dates_or_ages(text, moment):
    assert moment_of(text, now=NOW) == moment


@pytest.mark.parametrize("text", ["", "yesterday", "7", "7m", "-7d", "2026-13-01"])
def test_anything_else_is_told_with_examples(text):
    with pytest.raises(ProjectError, match=r"is no moment.*2026-03-01.*7d"):
        moment_of(text, now=NOW)


def test_the_present_is_what_the_build_says(monkeypatch):
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1234567890")
    # A well-known moment of POSIX time: 1234567890 s is 2009-02-13 23:31:30 UTC.
    assert present_moment() == datetime(2009, 2, 13, 23, 31, 30, tzinfo=UTC)
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "soon")
    with pytest.raises(ProjectError, match="SOURCE_DATE_EPOCH is 'soon'"):
        present_moment()
    monkeypatch.delenv("SOURCE_DATE_EPOCH")
    assert abs(present_moment() - datetime.now(UTC)) < timedelta(seconds=5)
