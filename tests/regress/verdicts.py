"""Verdicts with everything in them that a file can have to carry."""

from __future__ import annotations

from behavgen.errors import Fault, TableError
from behavgen.limits import DriftLimit, Limit
from behavgen.regress.compare import compare
from behavgen.regress.limit_verdicts import limit_verdicts
from behavgen.regress.verdict import CellVerdict, RunVerdict

NASTY = 'a "cell" & <more>\x00\x0b of ]]> it | `x` *y*'
"""Characters that XML, Markdown or HTML give a meaning, and some that XML forbids."""

LIMITS = (
    Limit(of="delay", overdrive_v=1e-3, below=400e-12, line=7),
    Limit(of="noise", below=1e-6, line=11),
    Limit(of="memory", reset_time_s=1e-10, below=1e-3, line=15, cell="latch"),
    Limit(of="offset", sigmas=3.0, below=17e-3, line=19),
)


def drifted_run(first, slower) -> RunVerdict:
    limits = {"offset": DriftLimit(of="offset", share=0.5)}
    drifted = CellVerdict(
        name="latch",
        description=NASTY,
        line=3,
        comparison=compare(first, slower, limits),
        limits=limit_verdicts(slower, LIMITS),
        sources=slower.sources,
        notices=("tables of different stages are mixed: schematic in a.csv; extracted in b.csv",),
    )
    calm = CellVerdict(name="calm", line=30, comparison=compare(first, first), limits=())
    faults = (
        Fault(file="tables/in put.csv", row=12, column="delay_ps", what=NASTY, allowed="a number"),
        Fault(file="behavgen.toml", row=40, column="cells.broken", what="no cell"),
    )
    broken = CellVerdict(name="broken", error=TableError(*faults), has_model=False)
    return RunVerdict(project_file="behavgen.toml", cells=(drifted, calm, broken), gone=("gone",))
