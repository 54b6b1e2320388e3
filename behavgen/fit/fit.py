"""Characterisation -> ComparatorModel: every quantity's fit, put together."""

from __future__ import annotations

from importlib.metadata import PackageNotFoundError, version

from behavgen.errors import Fault, FitError
from behavgen.fit.delay import DelayFit, fit_delay
from behavgen.fit.delay_report import delay_fits, delay_notices
from behavgen.fit.headline import headline_parameters
from behavgen.fit.mismatch import MismatchFit, fit_mismatch
from behavgen.fit.noise import NoiseFit, fit_noise
from behavgen.fit.offset import OffsetFit, fit_offset
from behavgen.fit.process_surfaces import SurfaceFamily
from behavgen.fit.reset import fit_reset
from behavgen.fit.table_points import table_points
from behavgen.model import Box, Cell, ComparatorModel, Pins, Process, Range, ResetEffect, Source
from behavgen.project import CellSettings
from behavgen.tables.characterisation import Characterisation

__all__ = ["fit"]


def fit(tables: Characterisation, settings: CellSettings) -> ComparatorModel:
    """Fit everything that the tables tell.

    Parameters
    ----------
    tables : Characterisation
    settings : CellSettings
        The cell's entry in the project file.

    Returns
    -------
    ComparatorModel

    Raises
    ------
    FitError
        When data cannot identify what they are meant for; names all such data.
    """
    processes = _processes(tables, settings)
    names = tuple(process.name for process in processes)
    noise, delay = _noise_and_delay(tables, names)
    trip_points = noise.trip_points if noise else None
    offset = fit_offset(trip_points, tables.delay, tables.offset, tables.offset_statistics, names)
    mismatch = fit_mismatch(tables.offset, tables.offset_statistics, names)
    reset = fit_reset(tables.reset, settings.reset_delay_s, names)
    box = _box(offset, mismatch, noise, delay, reset, names)
    bare = ComparatorModel(
        cell=_cell(settings, box),
        processes=processes,
        box=box,
        offset=offset.effect if offset else None,
        mismatch=mismatch.effect if mismatch else None,
        noise=noise.effect if noise else None,
        delay=delay.effect if delay else None,
        reset=reset,
    )
    return ComparatorModel(
        cell=bare.cell, processes=processes, box=box, offset=bare.offset, mismatch=bare.mismatch,
        noise=bare.noise, delay=bare.delay, reset=reset,
        parameters=headline_parameters(bare, noise, mismatch),
        fits=(*(delay_fits(delay) if delay else ()), *(noise.fits if noise else ())),
        points=table_points(tables),
        notices=_notices(tables, offset, mismatch, noise, delay),
        sources=tuple(
            Source(quantity=s.quantity, file=s.file, sha256=s.sha256, rows=s.rows,
                   failed_rows=s.failed_rows)
            for s in tables.sources
        ),
        generator=f"behavgen {_version()}",
    )  # fmt: skip


def _version() -> str:
    try:
        return version("behavgen")
    except PackageNotFoundError:
        return "from a source tree"


def _noise_and_delay(
    tables: Characterisation, names: tuple[str, ...]
) -> tuple[NoiseFit | None, DelayFit | None]:
    """Fit the two quantities that may refuse, and report all refusals at once."""
    faults: list[Fault] = []
    noise, delay = None, None
    try:
        noise = fit_noise(tables.noise, names)
    except FitError as error:
        faults.extend(error.faults)
    try:
        delay = fit_delay(tables.delay, tables.window, names)
    except FitError as error:
        faults.extend(error.faults)
    if faults:
        raise FitError(*faults)
    return noise, delay


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


def _box(
    offset: OffsetFit | None,
    mismatch: MismatchFit | None,
    noise: NoiseFit | None,
    delay: DelayFit | None,
    reset: ResetEffect | None,
    names: tuple[str, ...],
) -> Box:
    """Return the delay table's range, else the union of all others'."""
    if delay is not None:
        boxes = [delay.family.boxes[name] for name in names]
    else:
        boxes = [f.boxes[n] for f in _families(offset, noise) for n in names]
        boxes += [v.box for v in reset.surface.variants] if reset else []
        boxes += [v.box for c in mismatch.effect.components for v in c.variants] if mismatch else []
    return Box(
        vdd_v=_union([box.vdd_v for box in boxes]),
        temperature_k=_union([box.temperature_k for box in boxes]),
        vcm_v=_union([box.vcm_v for box in boxes]),
        overdrive_v=_union([box.overdrive_v for box in boxes]),
    )


def _families(offset: OffsetFit | None, noise: NoiseFit | None) -> list[SurfaceFamily]:
    return [found.family for found in (offset, noise) if found is not None]


def _union(spans: list[Range | None]) -> Range | None:
    known = [span for span in spans if span is not None]
    if not known:
        return None
    return Range(low=min(s.low for s in known), high=max(s.high for s in known))


def _notices(
    tables: Characterisation,
    offset: OffsetFit | None,
    mismatch: MismatchFit | None,
    noise: NoiseFit | None,
    delay: DelayFit | None,
) -> tuple[str, ...]:
    found: list[str] = []
    for part in (offset, mismatch, noise, delay):
        found.extend(part.notices if part is not None else ())
    found.extend(delay_notices(delay, tables) if delay else ())
    return tuple(found)
