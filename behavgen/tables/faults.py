"""Faults of the tables of one cell, gathered until all of them are known."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import islice

from behavgen.errors import Fault, TableError

__all__ = ["LISTED", "TableFaults"]

LISTED = 5
"""How many faults of one kind in one column are listed one by one."""


class TableFaults:
    """A list that faults are added to and that is raised as one error at the end."""

    def __init__(self) -> None:
        self._found: list[Fault] = []

    def __len__(self) -> int:
        return len(self._found)

    def add(
        self, file: str, what: str, allowed: str = "", *, row: int | None = None, column: str = ""
    ) -> None:
        """Note one fault, once."""
        fault = Fault(file=file, row=row, column=column, what=what, allowed=allowed)
        if fault not in self._found:
            self._found.append(fault)

    def add_rows(
        self, file: str, column: str, rows: Iterable[tuple[int, str]], total: int, allowed: str = ""
    ) -> None:
        """Note faults of one kind: the first few with their rows, the rest as a number.

        Parameters
        ----------
        file, column : str
            The file and the user's header.
        rows : iterable of (int, str)
            Line and what was found there; only the first `LISTED` are taken.
        total : int
            How many there are in all.
        allowed : str
            What is allowed.
        """
        for row, what in islice(rows, LISTED):
            self.add(file, what, allowed, row=row, column=column)
        if total > LISTED:
            self.add(file, f"{total - LISTED} more rows like these", column=column)

    def raise_if_any(self) -> None:
        """Raise all of them.

        Raises
        ------
        TableError
            When there is at least one.
        """
        if self._found:
            raise TableError(*self._found)
