"""The rows that one file contributes to one quantity."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import polars as pl

from behavgen.quantities import Form
from behavgen.tables.characterisation import TableSource

__all__ = ["Part"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Part:
    """Rows of one file, in SI.

    Parameters
    ----------
    form : Form
        The form in which the quantity stands in this file.
    frame : polars.DataFrame
        Line numbers and our columns.
    fixed : mapping
        Values that hold for all rows of the file.
    headers : mapping
        Our column names to the user's headers, for messages.
    source : TableSource
        Where the rows came from.
    """

    form: Form
    frame: pl.DataFrame
    fixed: Mapping[str, str | float]
    headers: Mapping[str, str]
    source: TableSource
