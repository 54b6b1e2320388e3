"""Where a table comes from in the user's own words, and which of these words do not go together."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

__all__ = ["NOT_SAID", "STAGES", "Provenance", "mixed_provenance"]

STAGES = ("estimated", "schematic", "extracted", "measured")
"""What was characterised, from a guess to the made circuit."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Provenance:
    """What the user says of a table; empty where nothing is said.

    Parameters
    ----------
    stage : str
        One of `STAGES`.
    kit : str
        Name and version of the process kit.
    netlist_hash : str
        Of the netlist that was simulated.
    date : str
        When it was simulated or measured, ISO 8601.
    """

    stage: str = ""
    kit: str = ""
    netlist_hash: str = ""
    date: str = ""


NOT_SAID = Provenance()


def mixed_provenance(tables: Iterable[tuple[str, Provenance]]) -> tuple[str, ...]:
    """Return a sentence for each thing in which tables of one cell should agree and do not.

    Dates may differ: tables are seldom made in one night.

    Parameters
    ----------
    tables : iterable of (str, Provenance)
        The file and what is said of it.
    """
    listed = list(tables)
    found = []
    for name, words in _AGREEING.items():
        files: dict[str, list[str]] = {}
        for file, provenance in listed:
            if value := getattr(provenance, name):
                files.setdefault(value, []).append(file)
        if len(files) > 1:
            parts = (f"{value} in {', '.join(dict.fromkeys(of))}" for value, of in files.items())
            found.append(f"tables of different {words} are mixed: {'; '.join(parts)}")
    return tuple(found)


_AGREEING = {"stage": "stages", "kit": "process kits", "netlist_hash": "netlists"}
