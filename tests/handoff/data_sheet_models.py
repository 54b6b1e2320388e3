"""Models whose data sheets are tested. All numbers of hand-made ones are invented."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

from behavgen.demo.layout import copy_demo
from behavgen.fit.fit import fit
from behavgen.model import (
    Box,
    Cell,
    ComparatorModel,
    MismatchEffect,
    NoiseEffect,
    OffsetEffect,
    Process,
    Range,
)
from behavgen.project import load_project
from behavgen.tables.read import read_tables
from tests.example_models import complete_model, constant_surface, minimal_model

LATCH = Path(__file__).parents[1] / "data" / "latch_130n"
SIGMA_V = 4e-4
DEMO_CELLS = ("sense_latch", "slicer")


def bare(name: str, **effects: object) -> ComparatorModel:
    """Return a cell of one process with these effects and no range at all."""
    return ComparatorModel(
        cell=Cell(name=name, description="invented example"),
        processes=(Process(name="nominal", code=0),), box=Box(), **effects,
    )  # fmt: skip


def noise_only() -> ComparatorModel:
    surface = constant_surface("V", "log", math.log(SIGMA_V), "nominal")
    return bare("noise_only", noise=NoiseEffect(surface=replace(surface, covariance=((1e-4,),))))


def offset_only() -> ComparatorModel:
    surface = constant_surface("V", "plain", 2e-3, "nominal")
    return bare("offset_only", offset=OffsetEffect(surface=surface))


def mismatch_only() -> ComparatorModel:
    surface = constant_surface("V", "plain", 5e-3, "nominal")
    return bare("mismatch_only", mismatch=MismatchEffect(components=(surface,), instances=51))


def one_delay_two_supplies() -> ComparatorModel:
    """Return the minimal model with a supply that was characterised and moves nothing."""
    model = minimal_model()
    return replace(model, box=replace(model.box, vdd_v=Range(low=1.0, high=1.2)))


HAND_MADE = {
    "complete": complete_model,
    "delay_only": minimal_model,
    "noise_only": noise_only,
    "offset_only": offset_only,
    "mismatch_only": mismatch_only,
}


def fitted_models(folder: Path) -> dict[str, ComparatorModel]:
    """Return the transistor-level latch and the demo's cells, fitted; the demo goes to `folder`."""
    copy_demo(folder)
    demo, latch = load_project(folder), load_project(LATCH)
    found = {"latch_130n": fit(read_tables(latch, "latch_130n"), latch.cells[0])}
    for cell in demo.cells:
        found[cell.name] = fit(read_tables(demo, cell.name), cell)
    return found
