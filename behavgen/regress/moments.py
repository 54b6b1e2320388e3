"""Moments in time: now, as builds that must repeat see it, and what people write for the past."""

from __future__ import annotations

import os
import re
from datetime import UTC, datetime, timedelta

from behavgen.errors import Fault, ProjectError

__all__ = ["moment_of", "present_moment"]

_AGE = {"h": timedelta(hours=1), "d": timedelta(days=1), "w": timedelta(weeks=1)}


def present_moment() -> datetime:
    """Return the time of SOURCE_DATE_EPOCH where it is set, else the clock's, in UTC.

    Source: reproducible-builds.org, specification of SOURCE_DATE_EPOCH 1.1.

    Raises
    ------
    ProjectError
        When the variable holds no number of seconds.
    """
    given = os.environ.get("SOURCE_DATE_EPOCH", "")
    if not given:
        return datetime.now(UTC).replace(microsecond=0)
    try:
        return datetime.fromtimestamp(int(given), UTC)
    except (ValueError, OverflowError, OSError):
        fault = Fault(
            what=f"SOURCE_DATE_EPOCH is '{given}'",
            allowed="whole seconds since 1970, or leave it unset",
        )
        raise ProjectError(fault) from None


def moment_of(text: str, *, now: datetime) -> datetime:
    """Read ``2026-03-01``, ``2026-03-01T06:30``, or an age such as ``12h``, ``7d``, ``2w``.

    Parameters
    ----------
    text : str
        Without a zone it is UTC.
    now : datetime
        What ages count from.

    Raises
    ------
    ProjectError
        When it is none of these.
    """
    if age := re.fullmatch(r"(\d{1,5})([hdw])", text.strip()):
        return now - int(age[1]) * _AGE[age[2]]
    try:
        moment = datetime.fromisoformat(text.strip())
    except ValueError:
        fault = Fault(
            what=f"'{text}' is no moment", allowed="a date such as 2026-03-01, or an age such as 7d"
        )
        raise ProjectError(fault) from None
    return moment if moment.tzinfo else moment.replace(tzinfo=UTC)
