"""Characterisation -> ComparatorModel: every quantity's fit, put together."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TypeVar

from behavgen.errors import Fault, FitError
from behavgen.fit.aperture import ApertureFit, fit_aperture
from behavgen.fit.delay import DelayFit, fit_delay
from behavgen.fit.delay_report import delay_fits, delay_notices
from behavgen.fit.energy import fit_energy
from behavgen.fit.headline import headline_parameters
from behavgen.fit.kickback import fit_kickback
from behavgen.fit.memory import MemoryFit, fit_memory
from behavgen.fit.mismatch import fit_mismatch
from behavgen.fit.noise import NoiseFit, fit_noise
from behavgen.fit.offset import fit_offset
from behavgen.fit.reset import fit_reset
from behavgen.fit.table_points import table_points
from behavgen.model import Box, Cell, ComparatorModel, Pins, Process, Range, Source, Surface
from behavgen.project import CellSettings
from behavgen.provenance import mixed_provenance
from behavgen.tables.characterisation import Characterisation, DelayTable
from behavgen.version import program_version

__all__ = ["fit"]

Fitted = TypeVar("Fitted")


def fit(tables: Characterisation, settings: CellSettings | None = None) -> ComparatorModel:
    """Fit everything that the tables tell.

    Parameters
    ----------
    tables : Characterisation
    settings : CellSettings, optional
        The cell's entry in the project file; default those that the tables were read with.

    Returns
    -------
    ComparatorModel

    Raises
    ------
    FitError
        When data cannot identify what they are meant for; names all such data.
    ValueError
        When neither the tables nor the caller bring settings.
    """
    settings = settings or tables.settings
    if settings is None:
        raise ValueError("these tables carry no settings of a cell; pass them as `settings`")
    processes = _processes(tables, settings)
    names = tuple(process.name for process in processes)
    noise, delay, memory, aperture = _all_or_refusals(
        lambda: fit_noise(tables.noise, names),
        lambda: fit_delay(tables.delay, tables.window, names),
        lambda: fit_memory(tables.memory, names),
        lambda: fit_aperture(tables.aperture, names),
    )
    trip_points = noise.trip_points if noise else None
    offset = fit_offset(trip_points, tables.delay, tables.offset, tables.offset_statistics, names)
    mismatch = fit_mismatch(tables.offset, tables.offset_statistics, names)
    kickback = fit_kickback(tables.kickback, names)
    bare = ComparatorModel(
        cell=_cell(settings, Box()),
        processes=processes,
        box=Box(),
        offset=offset.effect if offset else None,
        mismatch=mismatch.effect if mismatch else None,
        noise=noise.effect if noise else None,
        delay=delay.effect if delay else None,
        reset=fit_reset(tables.reset, settings.reset_delay_s, names),
        memory=memory.effect if memory else None,
        aperture=aperture.effect if aperture else None,
        kickback=kickback.effect if kickback else None,
    )
    bare = _boxed(bare, settings)
    energy = fit_energy(tables.energy, _with_stated_offset(bare, tables.delay))
    bare = _boxed(replace(bare, energy=energy.effect if energy else None), settings)
    parts = (offset, mismatch, noise, delay, memory, aperture, energy, kickback)
    return replace(
        bare,
        parameters=headline_parameters(bare, noise, mismatch),
        fits=(
            *(delay_fits(delay) if delay else ()),
            *(fit for part in (noise, memory, aperture, energy, kickback) if part
              for fit in part.fits),
        ),
        points=table_points(tables, energy),
        notices=(
            *(notice for part in parts if part for notice in part.notices),
            *(delay_notices(delay, tables) if delay else ()),
            *(f"{text[0].upper()}{text[1:]}."
              for text in mixed_provenance((s.file, s.provenance) for s in tables.sources)),
        ),
        sources=tuple(
            Source(quantity=s.quantity, file=s.file, sha256=s.sha256, rows=s.rows,
                   failed_rows=s.failed_rows, provenance=s.provenance)
            for s in tables.sources
        ),
        generator=f"behavgen {program_version()}",
    )  # fmt: skip


def _all_or_refusals(
    noise: Callable[[], NoiseFit | None],
    delay: Callable[[], DelayFit | None],
    memory: Callable[[], MemoryFit | None],
    aperture: Callable[[], ApertureFit | None],
) -> tuple[NoiseFit | None, DelayFit | None, MemoryFit | None, ApertureFit | None]:
    """Fit the quantities that may refuse, and report all refusals at once."""
    faults: list[Fault] = []

    def tried(fit_one: Callable[[], Fitted | None]) -> Fitted | None:
        try:
            return fit_one()
        except FitError as error:
            faults.extend(error.faults)
            return None

    found = tried(noise), tried(delay), tried(memory), tried(aperture)
    if faults:
        raise FitError(*faults)
    return found


def _processes(tables: Characterisation, settings: CellSettings) -> tuple[Process, ...]:
    """Return the cell's processes with their codes, the default first."""
    if settings.process_codes:
        return tuple(Process(name=n, code=c) for n, c in settings.process_codes.items())
    if tables.processes:
        return tuple(Process(name=n, code=c) for c, n in enumerate(tables.processes))
    return (Process(name="nominal", code=0),)


def _cell(settings: CellSettings, box: Box) -> Cell:
    off = settings.supply_off_v
    if off is None and box.vdd_v is not None:
        off = 0.5 * box.vdd_v.low
    return Cell(
        name=settings.name,
        description=settings.description,
        decides_on=settings.decides_on,
        in_reset=settings.in_reset,
        when_unresolved=settings.when_unresolved,
        time_precision=settings.time_precision,
        supply_off_v=off,
        pins=Pins(**dict(settings.pins)),  # type: ignore[arg-type]
    )


def _boxed(model: ComparatorModel, settings: CellSettings) -> ComparatorModel:
    """Give a model its box: the delay table's range, else the union of all others'."""
    surfaces = [model.delay.tau] if model.delay else _surfaces(model)
    boxes = [variant.box for surface in surfaces for variant in surface.variants]
    box = Box(
        vdd_v=_union([box.vdd_v for box in boxes]),
        temperature_k=_union([box.temperature_k for box in boxes]),
        vcm_v=_union([box.vcm_v for box in boxes]),
        overdrive_v=_union([box.overdrive_v for box in boxes]),
    )
    return replace(model, box=box, cell=_cell(settings, box))


def _with_stated_offset(model: ComparatorModel, delay: DelayTable | None) -> ComparatorModel:
    """Return the model with the trip point that the delay table itself states, if it does.

    Like delays, energies come from single decisions, where no noise blurs the
    trip point; that of S-curves is known no better than their counts allow.
    """
    stated = fit_offset(None, delay, None, None, tuple(p.name for p in model.processes))
    return replace(model, offset=stated.effect) if stated else model


def _surfaces(model: ComparatorModel) -> list[Surface]:
    """Return a surface for every range in which a table other than the delay's was measured."""
    found = [effect.surface for effect in (model.offset, model.noise, model.reset) if effect]
    found += model.mismatch.components if model.mismatch else ()
    if model.memory:
        found += [term.tau for term in model.memory.terms]
        found += [model.memory.floor] if model.memory.floor else []
    found += [model.aperture.centre] if model.aperture else []
    found += [model.energy.fixed] if model.energy else []
    found += [model.kickback.common] if model.kickback else []
    return found


def _union(spans: list[Range | None]) -> Range | None:
    known = [span for span in spans if span is not None]
    if not known:
        return None
    return Range(low=min(s.low for s in known), high=max(s.high for s in known))
