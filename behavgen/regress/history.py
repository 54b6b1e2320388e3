"""What past runs found: parameters over runs, in an embedded database.

    with History(file) as history:
        run = history.begin(present_moment())
        history.record(run, values)     # for each cell, as it comes
        history.finish(run, passed=True)
        trends = history.trends(cell="latch_a")

The baseline is elsewhere: the file may be deleted at any time, and only past
values are lost. Several processes may use it at once; none waits longer than
for another's write of one cell.
"""

from __future__ import annotations

import sqlite3
import time
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from datetime import UTC, datetime
from itertools import groupby
from pathlib import Path
from types import TracebackType
from typing import Any, Self

from behavgen.errors import Fault, ProjectError
from behavgen.regress.past import PastRun, PastValue, Trend, TrendPoint

__all__ = ["HISTORY_FILE", "History"]

HISTORY_FILE = "history.sqlite"
"""Under the project's output folder."""

FORMAT = 1
"""Version of the tables below, kept as SQLite's ``user_version``."""

_TABLES = """
CREATE TABLE run (
    number INTEGER PRIMARY KEY AUTOINCREMENT,
    began INTEGER NOT NULL,              -- s since 1970, UTC
    passed INTEGER                       -- NULL while it runs, and for ever if it was killed
);
CREATE TABLE series (
    id INTEGER PRIMARY KEY,
    cell TEXT NOT NULL,
    parameter TEXT NOT NULL,
    unit TEXT NOT NULL,
    UNIQUE (cell, parameter)
);
CREATE TABLE value (
    series INTEGER NOT NULL REFERENCES series ON DELETE CASCADE,
    run INTEGER NOT NULL REFERENCES run ON DELETE CASCADE,
    value REAL NOT NULL,
    low REAL,
    high REAL,
    verdict TEXT NOT NULL,
    PRIMARY KEY (series, run)
) WITHOUT ROWID;
CREATE INDEX value_of_run ON value (run);
"""
_WAIT_S = 30.0


class History:
    """The database of one project, opened.

    Parameters
    ----------
    file : Path
        Made, with the folders above it, when it is not there.

    Raises
    ------
    ProjectError
        From any method, when the file cannot be used.
    """

    def __init__(self, file: Path) -> None:
        self._file = file
        with self._told():
            file.parent.mkdir(parents=True, exist_ok=True)
            self._base = sqlite3.connect(file, timeout=_WAIT_S, isolation_level=None)
            _write_ahead(self._base)
            self._base.execute("PRAGMA synchronous = NORMAL")
            self._base.execute("PRAGMA foreign_keys = ON")
            self._prepare()

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.close()

    def close(self) -> None:
        """Close the file; what was recorded stays."""
        self._base.close()

    def begin(self, began: datetime) -> int:
        """Note that a run begins, and return its number; numbers are never used again."""
        with self._writing() as base:
            row = base.execute(
                "INSERT INTO run (began) VALUES (?) RETURNING number", (int(began.timestamp()),)
            ).fetchone()
        return int(row[0])

    def record(self, run: int, values: Iterable[PastValue]) -> None:
        """Keep what a run found, usually of one cell; all of it or nothing."""
        rows = [(v.cell, v.parameter, v.unit, v.value, v.low, v.high, v.verdict) for v in values]
        with self._writing() as base:
            base.executemany(
                "INSERT INTO series (cell, parameter, unit) VALUES (?, ?, ?) "
                "ON CONFLICT DO UPDATE SET unit = excluded.unit",
                [row[:3] for row in rows],
            )
            base.executemany(
                "INSERT OR REPLACE INTO value SELECT id, ?, ?, ?, ?, ? FROM series "
                "WHERE cell = ? AND parameter = ?",
                [(run, *row[3:], *row[:2]) for row in rows],
            )

    def finish(self, run: int, *, passed: bool) -> None:
        """Note how a run ended."""
        with self._writing() as base:
            base.execute("UPDATE run SET passed = ? WHERE number = ?", (passed, run))

    def runs(self) -> tuple[PastRun, ...]:
        """Return all runs, the oldest first."""
        with self._told():
            rows = self._base.execute("SELECT number, began, passed FROM run ORDER BY number")
            return tuple(
                PastRun(number=n, began=_moment(t), passed=None if p is None else bool(p))
                for n, t, p in rows
            )

    def run_at(self, moment: datetime) -> PastRun | None:
        """Return the last finished run that had begun by then, or None."""
        past = [r for r in self.runs() if r.passed is not None and r.began <= moment]
        return max(past, key=lambda run: (run.began, run.number), default=None)

    def values(self, run: int, cell: str) -> tuple[PastValue, ...]:
        """Return what a run found of a cell, in the order of the parameters' names."""
        with self._told():
            rows = self._base.execute(
                "SELECT cell, parameter, unit, value, low, high, verdict FROM value "
                "JOIN series ON series.id = series WHERE run = ? AND cell = ? ORDER BY parameter",
                (run, cell),
            )
            return tuple(
                PastValue(cell=c, parameter=p, unit=u, value=v, low=low, high=high, verdict=said)
                for c, p, u, v, low, high, said in rows
            )

    def trends(self, cell: str, *, last: int = 60) -> tuple[Trend, ...]:
        """Return the parameters of a cell over its runs, in the order of their names.

        Parameters
        ----------
        cell : str
        last : int
            How many runs to go back at most.
        """
        with self._told():
            rows = self._base.execute(
                "SELECT parameter, unit, number, began, value, low, high, verdict FROM series "
                "JOIN value ON series.id = series JOIN run ON number = run WHERE cell = ? "
                "AND number IN (SELECT number FROM run ORDER BY number DESC LIMIT ?) "
                "ORDER BY parameter, number",
                (cell, last),
            ).fetchall()
        return tuple(
            Trend(cell=cell, parameter=name, unit=unit, points=tuple(_point(row) for row in group))
            for (name, unit), group in groupby(rows, key=lambda row: row[:2])
        )

    def prune(self, *, keep_runs: int) -> int:
        """Delete all but the last runs and what is left without any; return how many went."""
        with self._writing() as base:
            gone = base.execute(
                "DELETE FROM run WHERE number NOT IN "
                "(SELECT number FROM run ORDER BY number DESC LIMIT ?)",
                (keep_runs,),
            ).rowcount
            base.execute("DELETE FROM series WHERE id NOT IN (SELECT series FROM value)")
        return gone

    def _prepare(self) -> None:
        """Make the tables; whoever comes first does."""
        if self._format() == FORMAT:
            return
        with self._writing() as base:
            found = self._format()
            if found == 0:
                for statement in _TABLES.split(";"):
                    base.execute(statement)
                base.execute(f"PRAGMA user_version = {FORMAT}")
            elif found != FORMAT:
                raise self._unusable(f"history format {found}, this version reads {FORMAT}")

    def _format(self) -> int:
        return int(self._base.execute("PRAGMA user_version").fetchone()[0])

    @contextmanager
    def _writing(self) -> Iterator[sqlite3.Connection]:
        """Hold the file for one write, done whole or not at all."""
        with self._told():
            self._base.execute("BEGIN IMMEDIATE")
            try:
                yield self._base
            except BaseException:
                self._base.execute("ROLLBACK")
                raise
            self._base.execute("COMMIT")

    @contextmanager
    def _told(self) -> Iterator[None]:
        """Tell of the database's errors as of a fault of the file."""
        try:
            yield
        except (sqlite3.Error, OSError) as error:
            raise self._unusable(str(error)) from None

    def _unusable(self, why: str) -> ProjectError:
        fault = Fault(
            file=str(self._file),
            what=f"cannot be used: {why}",
            allowed="delete it: only the values of past runs are lost, not the baseline",
        )
        return ProjectError(fault)


def _write_ahead(base: sqlite3.Connection) -> None:
    """Let readers and a writer work at once; SQLite does not wait by itself to switch to that."""
    begin = time.monotonic()
    while True:
        try:
            base.execute("PRAGMA journal_mode = WAL")
            return
        except sqlite3.OperationalError:
            if time.monotonic() - begin > _WAIT_S:
                raise
            time.sleep(0.02)


def _moment(seconds: int) -> datetime:
    return datetime.fromtimestamp(seconds, UTC)


def _point(row: Sequence[Any]) -> TrendPoint:
    _, _, number, began, value, low, high, verdict = row
    return TrendPoint(
        run=number, began=_moment(began), value=value, low=low, high=high, verdict=verdict
    )
