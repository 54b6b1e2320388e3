"""Rows read from files -> the tables of a characterisation, one function a quantity.

Arrays are taken out of the frames column by column, so that a large table is
never in memory twice.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Any

import numpy as np
import polars as pl

from behavgen.tables.characterisation import (
    ApertureTable,
    Conditions,
    DelayTable,
    EnergyTable,
    Floats,
    Integers,
    KickbackTable,
    MemoryTable,
    NoiseTable,
    OffsetStatistics,
    OffsetTable,
    ResetTable,
    RowOrigin,
    TableSource,
    Texts,
    WindowTable,
)
from behavgen.tables.parts import Part
from behavgen.tables.readers import LINE

__all__ = ["ASSEMBLERS", "conditions_of"]


def conditions_of(parts: Sequence[Part]) -> Conditions:
    """Return the operating conditions of all rows, one after another."""
    return Conditions(
        vdd_v=_numbers(parts, "vdd"),
        temperature_k=_numbers(parts, "temp"),
        vcm_v=_numbers(parts, "vcm"),
        process=_texts(parts, "process"),
    )


def offset_tables(parts: Sequence[Part]) -> dict[str, OffsetTable | OffsetStatistics]:
    """Return the single instances and the ready-made statistics, where there are any."""
    tables: dict[str, OffsetTable | OffsetStatistics] = {}
    if instances := _in_form(parts, "instances"):
        tables["offset"] = OffsetTable(
            conditions=conditions_of(instances),
            instance=_texts(instances, "instance"),
            offset_v=_numbers(instances, "offset"),
            offset_low_v=_numbers(instances, "offset_low"),
            offset_high_v=_numbers(instances, "offset_high"),
            sources=_sources(instances),
            origin=_origin(instances),
        )
    if statistics := _in_form(parts, "statistics"):
        tables["offset_statistics"] = OffsetStatistics(
            conditions=conditions_of(statistics),
            mean_v=_numbers(statistics, "mean"),
            sigma_v=_numbers(statistics, "sigma"),
            instances=_integers(statistics, "instances"),
            sources=_sources(statistics),
        )
    return tables


def noise_tables(parts: Sequence[Part]) -> dict[str, NoiseTable]:
    """Return S-curves, single bits already counted, and ready-made sigmas."""
    curves = _in_form(parts, "counts", "bits")
    sigmas = _in_form(parts, "sigma")
    return {
        "noise": NoiseTable(
            conditions=conditions_of(curves),
            instance=_texts(curves, "instance"),
            vdiff_v=_numbers(curves, "vdiff"),
            trials=_integers(curves, "trials"),
            ones=_integers(curves, "ones"),
            sigma_conditions=conditions_of(sigmas),
            sigma_v=_numbers(sigmas, "sigma"),
            sigma_error_v=_numbers(sigmas, "sigma_error"),
            sources=_sources(parts),
            origin=_origin(curves),
        )
    }


def delay_tables(parts: Sequence[Part]) -> dict[str, DelayTable]:
    """Return delays; overdrive is input less trip point where the table gives these instead."""
    offset_v = _numbers(parts, "offset")
    overdrive_v = _numbers(parts, "overdrive")
    if not _is_in_all(parts, "overdrive"):
        from_input = np.isnan(overdrive_v)
        vdiff_v = _numbers(parts, "vdiff")[from_input]
        overdrive_v = np.array(overdrive_v)
        overdrive_v[from_input] = vdiff_v - np.nan_to_num(offset_v[from_input])
    return {
        "delay": DelayTable(
            conditions=conditions_of(parts),
            overdrive_v=overdrive_v,
            delay_s=_numbers(parts, "delay"),
            observed_for_s=_numbers(parts, "observed_for"),
            offset_v=offset_v,
            decision=_decisions(parts),
            measured=_measured(parts),
            sources=_sources(parts),
            origin=_origin(parts),
        )
    }


def window_tables(parts: Sequence[Part]) -> dict[str, WindowTable]:
    """Return windows; counted ones become widths with the binomial standard error.

    Where every trial was unresolved the window is wider than the span swept.
    """
    searched = _in_form(parts, "searched")
    counted = _in_form(parts, "counted")
    trials = _numbers(counted, "trials")
    share = _numbers(counted, "unresolved") / trials
    span_v = _numbers(counted, "span")
    with np.errstate(divide="ignore"):
        counted_error = np.sqrt((1.0 - share) / (trials * share))
    return {
        "window": WindowTable(
            conditions=conditions_of([*searched, *counted]),
            resolve_time_s=_numbers([*searched, *counted], "resolve_time"),
            window_v=np.concatenate(
                [_numbers(searched, "window"), np.where(share < 1.0, span_v * share, np.nan)]
            ),
            window_relative_error=np.concatenate(
                [np.zeros(_rows(searched)), np.where(share < 1.0, counted_error, 0.0)]
            ),
            searched_span_v=np.concatenate([_numbers(searched, "searched_span"), span_v]),
            measured=_measured(parts),
            sources=_sources([*searched, *counted]),
            origin=_origin([*searched, *counted]),
        )
    }


def reset_tables(parts: Sequence[Part]) -> dict[str, ResetTable]:
    """Return reset delays."""
    return {
        "reset": ResetTable(
            conditions=conditions_of(parts),
            reset_delay_s=_numbers(parts, "reset_delay"),
            sources=_sources(parts),
            origin=_origin(parts),
        )
    }


def memory_tables(parts: Sequence[Part]) -> dict[str, MemoryTable]:
    """Return shifts left by the previous decision; without a word on it none is only a bound."""
    return {
        "memory": MemoryTable(
            conditions=conditions_of(parts),
            reset_time_s=_numbers(parts, "reset_time"),
            memory_shift_v=_numbers(parts, "memory_shift"),
            censored=_numbers(parts, "censored") == 1.0,
            sources=_sources(parts),
            origin=_origin(parts),
        )
    }


def aperture_tables(parts: Sequence[Part]) -> dict[str, ApertureTable]:
    """Return weights after a step."""
    return {
        "aperture": ApertureTable(
            conditions=conditions_of(parts),
            step_time_s=_numbers(parts, "step_time"),
            step_weight=_numbers(parts, "step_weight"),
            step_v=_numbers(parts, "step"),
            sources=_sources(parts),
            origin=_origin(parts),
        )
    }


def energy_tables(parts: Sequence[Part]) -> dict[str, EnergyTable]:
    """Return energies; the fit takes the trip point off where inputs are given."""
    return {
        "energy": EnergyTable(
            conditions=conditions_of(parts),
            overdrive_v=_numbers(parts, "overdrive"),
            vdiff_v=_numbers(parts, "vdiff"),
            energy_j=_numbers(parts, "energy"),
            cycle_time_s=_numbers(parts, "cycle_time"),
            sources=_sources(parts),
            origin=_origin(parts),
        )
    }


def kickback_tables(parts: Sequence[Part]) -> dict[str, KickbackTable]:
    """Return charges driven out of the inputs."""
    return {
        "kickback": KickbackTable(
            conditions=conditions_of(parts),
            charge_common_c=_numbers(parts, "charge_common"),
            charge_differential_c=_numbers(parts, "charge_differential"),
            vdiff_v=_numbers(parts, "vdiff"),
            source_resistance_ohm=_numbers(parts, "source_resistance"),
            sources=_sources(parts),
            origin=_origin(parts),
        )
    }


ASSEMBLERS: Mapping[str, Callable[[Sequence[Part]], Mapping[str, Any]]] = {
    "offset": offset_tables,
    "noise": noise_tables,
    "delay": delay_tables,
    "window": window_tables,
    "memory": memory_tables,
    "reset": reset_tables,
    "aperture": aperture_tables,
    "energy": energy_tables,
    "kickback": kickback_tables,
}
"""Quantity to the function that turns its rows into fields of a characterisation."""


def _in_form(parts: Iterable[Part], *names: str) -> list[Part]:
    return [part for part in parts if part.form.name in names]


def _rows(parts: Iterable[Part]) -> int:
    return sum(part.frame.height for part in parts)


def _sources(parts: Iterable[Part]) -> tuple[TableSource, ...]:
    return tuple(part.source for part in parts)


def _origin(parts: Sequence[Part]) -> RowOrigin:
    """Return where the rows of all parts stand, one after another."""
    files = tuple(dict.fromkeys(part.source.file for part in parts))
    numbers = [
        np.broadcast_to(np.int64(files.index(part.source.file)), part.frame.height)
        for part in parts
    ]
    lines = [part.frame[LINE].to_numpy() for part in parts]
    if len(parts) == 1:
        return RowOrigin(files=files, file=numbers[0], line=lines[0])
    nothing = np.empty(0, dtype=np.int64)
    return RowOrigin(
        files=files,
        file=np.concatenate([nothing, *numbers]),
        line=np.concatenate([nothing, *lines]),
    )


def _measured(parts: Iterable[Part]) -> str:
    return next((part.source.measured for part in parts if part.source.measured), "")


def _numbers(parts: Sequence[Part], name: str) -> Floats:
    """Return a column of all parts, NaN where a part has none or a cell is empty."""
    arrays = [
        part.frame[name].to_numpy()
        if name in part.frame.columns
        else np.broadcast_to(np.float64(part.fixed.get(name, np.nan)), part.frame.height)
        for part in parts
    ]
    if len(arrays) == 1:
        return arrays[0]
    return np.concatenate([np.empty(0), *arrays])


def _is_in_all(parts: Iterable[Part], name: str) -> bool:
    return all(name in part.frame.columns or name in part.fixed for part in parts)


def _decisions(parts: Sequence[Part]) -> Integers:
    """Return what was decided, -1 where no table says."""
    if not any(_is_in_all([part], "decision") for part in parts):
        return np.broadcast_to(np.int64(-1), _rows(parts))
    decision = _numbers(parts, "decision")
    return np.where(np.isnan(decision), -1.0, decision).astype(np.int64)


def _integers(parts: Sequence[Part], name: str) -> Integers:
    return _numbers(parts, name).astype(np.int64)


def _texts(parts: Sequence[Part], name: str) -> Texts:
    arrays = [
        _text_array(part.frame[name])
        if name in part.frame.columns
        else np.broadcast_to(np.str_(part.fixed.get(name, "")), part.frame.height)
        for part in parts
    ]
    if len(arrays) == 1:
        return arrays[0]
    return np.concatenate([np.empty(0, dtype=np.str_), *arrays])


def _text_array(column: pl.Series) -> Texts:
    """Return texts as a numpy array by way of their few distinct values."""
    distinct = column.unique(maintain_order=True)
    codes = column.replace_strict(distinct, pl.int_range(distinct.len(), eager=True))
    names: Texts = np.array(distinct.to_list(), dtype=np.str_)
    texts: Texts = names[codes.to_numpy()]
    return texts
